//! One rectangle of (ρ, ζ): the remainders at a grid of Chebyshev points by one path shared by all of them.

use super::chebyshev::{analysis, spread};
use super::panels::Fineness;
use super::potentials::tilt;
use super::rule::{Node, Reach};
use super::soil::{HalfSpace, Region};
use super::spectral_sum::SpectralSum;
use super::spectrum::{Spectral, Weights};
use num_complex::Complex64;

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

impl Patch {
    /// Samples the remainders over `rectangle`; Q is multiplied by `q_scale`.
    pub(super) fn sample(
        space: &HalfSpace,
        region: Region,
        rectangle: Rectangle,
        fineness: Fineness,
        q_scale: f64,
    ) -> Self {
        let (rho_m, zeta_m) = (rectangle.rho_m, rectangle.zeta_m);
        let (m, n) = rectangle.points;
        let (rhos, zetas) = (spread(rho_m, m), spread(zeta_m, n));
        let below = region == Region::Below;
        let (up_m, down_m) = if below { (0.0, zeta_m.1) } else { (zeta_m.1, 0.0) };
        let reach = Reach { region, rho_m, up_m, down_m, least_m: zeta_m.0, from_k0: false };
        let weights = Weights::new(space, region);
        let fill = |node: &Node, out: &mut [f64]| {
            let s = Spectral::at(space, node);
            let [h, q, p] = weights.reduced(&s);
            let weight = node.weight * s.lambda;
            let u = if below { s.u1 } else { s.u0 };
            columns(out, [weight * h, weight * q * q_scale, -node.weight * p], u, &zetas);
        };
        let mut values = SpectralSum::new(&rhos, n, &fill).run(space, reach, fineness);
        let k = space.wavenumber_per_m(region);
        for (i, &rho) in rhos.iter().enumerate() {
            for (j, &zeta) in zetas.iter().enumerate() {
                let closed = weights.slope * tilt(k, rho, zeta);
                values[(4 * m + i) * n + j] -= closed.re;
                values[(5 * m + i) * n + j] -= closed.im;
            }
        }
        Self::from_values(rectangle, &values)
    }

    /// From values `[lane][rho][zeta]` at the Chebyshev points.
    pub(super) fn from_values(rectangle: Rectangle, values: &[f64]) -> Self {
        let (m, n) = rectangle.points;
        Self { rectangle, coefficients: transform(values, m, n) }
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

fn transform(values: &[f64], m: usize, n: usize) -> Vec<f64> {
    let (by_rho, by_zeta) = (analysis(m), analysis(n));
    // Transposed, so that the inner loops below run along rows.
    let turned: Vec<f64> = (0..n * n).map(|p| by_zeta[(p % n) * n + p / n]).collect();
    let mut out = vec![0.0; values.len()];
    let mut half = vec![0.0; m * n];
    for (from, to) in values.chunks_exact(m * n).zip(out.chunks_exact_mut(m * n)) {
        half.fill(0.0);
        for (row, weights) in half.chunks_exact_mut(n).zip(by_rho.chunks_exact(m)) {
            combine(row, weights, from);
        }
        for (row, weights) in to.chunks_exact_mut(n).zip(half.chunks_exact(n)) {
            combine(row, weights, &turned);
        }
    }
    out
}

/// row += Σ weights[i] · (row i of `rows`).
pub(super) fn combine(row: &mut [f64], weights: &[f64], rows: &[f64]) {
    let n = row.len();
    let (weights4, rows4) = (weights.chunks_exact(4), rows.chunks_exact(4 * n));
    let (rest_weights, rest_rows) = (weights4.remainder(), rows4.remainder());
    for (w, r) in weights4.zip(rows4) {
        let (a, b, c, d) = (&r[..n], &r[n..2 * n], &r[2 * n..3 * n], &r[3 * n..4 * n]);
        for (k, out) in row.iter_mut().enumerate() {
            *out += w[0] * a[k] + w[1] * b[k] + (w[2] * c[k] + w[3] * d[k]);
        }
    }
    for (w, r) in rest_weights.iter().zip(rest_rows.chunks_exact(n)) {
        for (out, r) in row.iter_mut().zip(r) {
            *out += w * r;
        }
    }
}

/// front · e^{−uζ} at every ζ, as lanes × ζ.
fn columns(out: &mut [f64], front: [Complex64; 3], u: Complex64, zetas: &[f64]) {
    let n = zetas.len();
    for (j, &zeta) in zetas.iter().enumerate() {
        let size = (-u.re * zeta).exp();
        if u.im == 0.0 {
            for (f, front) in front.iter().enumerate() {
                out[2 * f * n + j] = front.re * size;
                out[(2 * f + 1) * n + j] = front.im * size;
            }
        } else {
            let (sin, cos) = (-u.im * zeta).sin_cos();
            let fall = Complex64::new(size * cos, size * sin);
            for (f, front) in front.iter().enumerate() {
                let value = front * fall;
                out[2 * f * n + j] = value.re;
                out[(2 * f + 1) * n + j] = value.im;
            }
        }
    }
}
