//! One rectangle of (ρ, ζ): the remainders at a grid of Chebyshev points by one path shared by all of them.
//!
//! Over a rectangle the spectral sum is a matrix product: weights times e^{−uζ} on one side, Bessel functions of λρ
//! on the other. The two Hankel branches are conjugates of each other, so that the Bessel side stays real.

use super::bessel::hankel_series;
use super::bessel_fast::j01_fast;
use super::chebyshev::{analysis, points};
use super::panels::Fineness;
use super::potentials::tilt;
use super::rule::{Node, Reach, Wave, nodes};
use super::soil::{HalfSpace, Region};
use super::spectrum::{Spectral, Weights};
use num_complex::Complex64;

/// Real and imaginary parts of H, Q (scaled) and ∂P/∂ρ.
pub(super) const LANES: usize = 6;

/// A rectangle and how many Chebyshev points it gets each way.
#[derive(Debug, Clone, Copy)]
pub(super) struct Rectangle {
    pub rho_m: (f64, f64),
    pub zeta_m: (f64, f64),
    pub points: (usize, usize),
}

/// Chebyshev coefficients over a rectangle, `[lane][rho degree][zeta degree]`.
#[derive(Debug, Clone)]
pub(super) struct Patch {
    pub rectangle: Rectangle,
    pub coefficients: Vec<f64>,
}

/// Left and right factors of the spectral sum.
struct Factors {
    /// One row per spectral term: J₀ and J₁ parts at every ρ.
    bessel: Vec<[Vec<f64>; 2]>,
    /// One row per spectral term: lanes × ζ.
    spectral: Vec<Vec<f64>>,
}

impl Patch {
    /// Samples the remainders over `rectangle`; Q is multiplied by `q_scale`.
    pub(super) fn sample(space: &HalfSpace, region: Region, rectangle: Rectangle, fineness: Fineness, q_scale: f64) -> Self {
        let (rhos, zetas) = (spread(rectangle.rho_m, rectangle.points.0), spread(rectangle.zeta_m, rectangle.points.1));
        let factors = Factors::new(space, region, rectangle, fineness, (&rhos, &zetas), q_scale);
        let mut values = factors.product(rhos.len(), zetas.len());
        let slope = Weights::new(space, region).slope;
        let k = space.wavenumber_per_m(region);
        let (m, n) = rectangle.points;
        for (i, &rho) in rhos.iter().enumerate() {
            for (j, &zeta) in zetas.iter().enumerate() {
                let closed = slope * tilt(k, rho, zeta);
                values[(4 * m + i) * n + j] -= closed.re;
                values[(5 * m + i) * n + j] -= closed.im;
            }
        }
        Self { rectangle, coefficients: transform(&values, m, n) }
    }

    /// The largest of the last two coefficients each way, summed over the other way: how well it is resolved.
    pub(super) fn tail(&self) -> (f64, f64) {
        let (m, n) = self.rectangle.points;
        let (mut by_rho, mut by_zeta) = (0.0f64, 0.0f64);
        for lane in self.coefficients.chunks_exact(m * n) {
            let row = |i: usize| lane[i * n..(i + 1) * n].iter().map(|c| c.abs()).sum::<f64>();
            let column = |j: usize| (0..m).map(|i| lane[i * n + j].abs()).sum::<f64>();
            by_rho = by_rho.max(row(m - 1)).max(row(m - 2));
            by_zeta = by_zeta.max(column(n - 1)).max(column(n - 2));
        }
        (by_rho, by_zeta)
    }
}

fn spread(range: (f64, f64), count: usize) -> Vec<f64> {
    let (middle, half) = (0.5 * (range.0 + range.1), 0.5 * (range.1 - range.0));
    points(count).iter().map(|x| middle + half * x).collect()
}

fn transform(values: &[f64], m: usize, n: usize) -> Vec<f64> {
    let (by_rho, by_zeta) = (analysis(m), analysis(n));
    let mut out = vec![0.0; values.len()];
    let mut half = vec![0.0; m * n];
    for (from, to) in values.chunks_exact(m * n).zip(out.chunks_exact_mut(m * n)) {
        half.fill(0.0);
        for k in 0..m {
            for i in 0..m {
                let a = by_rho[k * m + i];
                for (h, v) in half[k * n..(k + 1) * n].iter_mut().zip(&from[i * n..(i + 1) * n]) {
                    *h += a * v;
                }
            }
        }
        for k in 0..m {
            for l in 0..n {
                to[k * n + l] = by_zeta[l * n..(l + 1) * n].iter().zip(&half[k * n..(k + 1) * n]).map(|(a, h)| a * h).sum();
            }
        }
    }
    out
}

impl Factors {
    fn new(
        space: &HalfSpace,
        region: Region,
        rectangle: Rectangle,
        fineness: Fineness,
        (rhos, zetas): (&[f64], &[f64]),
        q_scale: f64,
    ) -> Self {
        let below = region == Region::Below;
        let (up_m, down_m) = if below { (0.0, rectangle.zeta_m.1) } else { (rectangle.zeta_m.1, 0.0) };
        let reach = Reach { region, rho_m: rectangle.rho_m, up_m, down_m, least_m: rectangle.zeta_m.0 };
        let weights = Weights::new(space, region);
        let path = nodes(space, reach, fineness);
        let (mut bessel, mut spectral) = (Vec::with_capacity(path.len()), Vec::with_capacity(path.len()));
        let column = |node: &Node| -> Vec<[Complex64; 3]> {
            let s = Spectral::at(space, node);
            let [h, q, p] = weights.reduced(&s);
            let front = [node.weight * s.lambda * h, node.weight * s.lambda * q * q_scale, -node.weight * p];
            let u = if below { s.u1 } else { s.u0 };
            let real = u.im == 0.0;
            zetas
                .iter()
                .map(|&zeta| {
                    if real {
                        let fall = (-u.re * zeta).exp();
                        front.map(|f| f * fall)
                    } else {
                        let fall = Complex64::from_polar((-u.re * zeta).exp(), -u.im * zeta);
                        front.map(|f| f * fall)
                    }
                })
                .collect()
        };
        let standing = path.iter().filter(|n| n.wave == Wave::Standing);
        for node in standing {
            bessel.push(bessel_row(rhos, |rho| {
                let (j0, j1) = j01_fast(node.lambda.re * rho);
                (j0, j1)
            }));
            spectral.push(flatten(&column(node)));
        }
        let outgoing = path.iter().filter(|n| n.wave == Wave::Outgoing);
        let incoming = path.iter().filter(|n| n.wave == Wave::Incoming);
        for (up, down) in outgoing.zip(incoming) {
            let waves: Vec<(Complex64, Complex64)> = rhos.iter().map(|&rho| hankel(up.lambda * rho)).collect();
            let (above, beneath) = (column(up), column(down));
            let joined = |sign: f64, turn: Complex64| -> Vec<[Complex64; 3]> {
                above.iter().zip(&beneath).map(|(a, b)| [0, 1, 2].map(|i| turn * (a[i] + sign * b[i]))).collect()
            };
            bessel.push([waves.iter().map(|w| w.0.re).collect(), waves.iter().map(|w| w.1.re).collect()]);
            spectral.push(flatten(&joined(1.0, Complex64::new(1.0, 0.0))));
            bessel.push([waves.iter().map(|w| w.0.im).collect(), waves.iter().map(|w| w.1.im).collect()]);
            spectral.push(flatten(&joined(-1.0, Complex64::i())));
        }
        Self { bessel, spectral }
    }

    /// Values `[lane][rho][zeta]`.
    fn product(&self, m: usize, n: usize) -> Vec<f64> {
        let mut out = vec![0.0; LANES * m * n];
        let (first, second) = out.split_at_mut(4 * m * n);
        for (bessel, spectral) in self.bessel.chunks(4).zip(self.spectral.chunks(4)) {
            for lane in 0..LANES {
                let (target, order) = if lane < 4 { (&mut *first, 0) } else { (&mut *second, 1) };
                let base = (if lane < 4 { lane } else { lane - 4 }) * m * n;
                for i in 0..m {
                    let row = &mut target[base + i * n..base + (i + 1) * n];
                    accumulate(row, bessel, spectral, (order, i, lane * n));
                }
            }
        }
        out
    }
}

/// row += Σ bessel[order][i] · spectral[from..], four terms at a time.
fn accumulate(row: &mut [f64], bessel: &[[Vec<f64>; 2]], spectral: &[Vec<f64>], (order, i, from): (usize, usize, usize)) {
    let n = row.len();
    if let ([a, b, c, d], [e, f, g, h]) = (bessel, spectral) {
        let (a, b, c, d) = (a[order][i], b[order][i], c[order][i], d[order][i]);
        let (e, f, g, h) = (&e[from..from + n], &f[from..from + n], &g[from..from + n], &h[from..from + n]);
        for (k, out) in row.iter_mut().enumerate() {
            *out += a * e[k] + b * f[k] + (c * g[k] + d * h[k]);
        }
    } else {
        for (b, s) in bessel.iter().zip(spectral) {
            let b = b[order][i];
            for (out, s) in row.iter_mut().zip(&s[from..from + n]) {
                *out += b * s;
            }
        }
    }
}

fn bessel_row(rhos: &[f64], f: impl Fn(f64) -> (f64, f64)) -> [Vec<f64>; 2] {
    let both: Vec<(f64, f64)> = rhos.iter().map(|&rho| f(rho)).collect();
    [both.iter().map(|b| b.0).collect(), both.iter().map(|b| b.1).collect()]
}

fn hankel(z: Complex64) -> (Complex64, Complex64) {
    let turn = Complex64::from_polar((-z.im).exp(), z.re);
    let (h0, h1) = hankel_series(z);
    (h0 * turn, h1 * turn)
}

/// From one triple per ζ to lanes × ζ.
fn flatten(column: &[[Complex64; 3]]) -> Vec<f64> {
    let mut out = Vec::with_capacity(LANES * column.len());
    for f in 0..3 {
        out.extend(column.iter().map(|c| c[f].re));
        out.extend(column.iter().map(|c| c[f].im));
    }
    out
}
