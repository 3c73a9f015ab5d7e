//! One rectangle of (ρ, ζ): the remainders at a grid of Chebyshev points by one path shared by all of them.
//!
//! Over a rectangle the spectral sum is a matrix product: weights times e^{−uζ} on one side, Bessel functions of λρ
//! on the other. The two Hankel branches are conjugates of each other, so that the Bessel side stays real.

use super::bessel_fast::{hankel_fast, j01_fast};
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

impl Patch {
    /// Samples the remainders over `rectangle`; Q is multiplied by `q_scale`.
    pub(super) fn sample(
        space: &HalfSpace,
        region: Region,
        rectangle: Rectangle,
        fineness: Fineness,
        q_scale: f64,
    ) -> Self {
        let mut sum = SpectralSum::new(space, region, rectangle, q_scale);
        sum.run(fineness);
        let (m, n) = rectangle.points;
        let mut values = sum.by_lane();
        let slope = Weights::new(space, region).slope;
        let k = space.wavenumber_per_m(region);
        for (i, &rho) in sum.rhos.iter().enumerate() {
            for (j, &zeta) in sum.zetas.iter().enumerate() {
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

/// Terms summed at once: what fits the nearest cache.
const BATCH: usize = 16;

/// The sum over the path, batch by batch.
struct SpectralSum<'a> {
    space: &'a HalfSpace,
    region: Region,
    rectangle: Rectangle,
    q_scale: f64,
    weights: Weights,
    rhos: Vec<f64>,
    zetas: Vec<f64>,
    /// `[rho][order][term]`: Bessel functions of order 0, then 1.
    bessel: Vec<f64>,
    /// `[term][lane][zeta]`.
    spectral: Vec<f64>,
    filled: usize,
    /// `[rho][lane][zeta]`.
    total: Vec<f64>,
}

impl<'a> SpectralSum<'a> {
    fn new(space: &'a HalfSpace, region: Region, rectangle: Rectangle, q_scale: f64) -> Self {
        let (m, n) = rectangle.points;
        Self {
            space,
            region,
            rectangle,
            q_scale,
            weights: Weights::new(space, region),
            rhos: spread(rectangle.rho_m, m),
            zetas: spread(rectangle.zeta_m, n),
            bessel: vec![0.0; 2 * m * BATCH],
            spectral: vec![0.0; LANES * n * BATCH],
            filled: 0,
            total: vec![0.0; LANES * m * n],
        }
    }

    fn run(&mut self, fineness: Fineness) {
        let (rho_m, zeta_m) = (self.rectangle.rho_m, self.rectangle.zeta_m);
        let (up_m, down_m) = if self.region == Region::Below { (0.0, zeta_m.1) } else { (zeta_m.1, 0.0) };
        let reach = Reach { region: self.region, rho_m, up_m, down_m, least_m: zeta_m.0 };
        let path = nodes(self.space, reach, fineness);
        let standing = path.iter().position(|n| n.wave != Wave::Standing).unwrap_or(path.len());
        let (standing, branches) = path.split_at(standing);
        let (outgoing, incoming) = branches.split_at(branches.len() / 2);
        for node in standing {
            self.standing(node);
        }
        let mut both = vec![0.0; 2 * LANES * self.zetas.len()];
        for (up, down) in outgoing.iter().zip(incoming) {
            self.branch(up, down, &mut both);
        }
        self.flush();
    }

    fn standing(&mut self, node: &Node) {
        let term = self.filled;
        for (i, rho) in self.rhos.iter().enumerate() {
            let (j0, j1) = j01_fast(node.lambda.re * rho);
            self.bessel[2 * i * BATCH + term] = j0;
            self.bessel[(2 * i + 1) * BATCH + term] = j1;
        }
        let n = self.zetas.len();
        let (front, u) = self.front(node);
        fill(&mut self.spectral[term * LANES * n..(term + 1) * LANES * n], front, u, &self.zetas);
        self.advance();
    }

    /// ½H⁽¹⁾ of one branch and its conjugate of the other: Σ and j·Δ of the spectral sides beside Re and Im.
    fn branch(&mut self, up: &Node, down: &Node, both: &mut [f64]) {
        let n = self.zetas.len();
        if self.filled + 2 > BATCH {
            self.flush();
        }
        let term = self.filled;
        for (i, &rho) in self.rhos.iter().enumerate() {
            let (h0, h1) = hankel_fast(up.lambda * rho);
            for (order, h) in [h0, h1].into_iter().enumerate() {
                self.bessel[(2 * i + order) * BATCH + term] = h.re;
                self.bessel[(2 * i + order) * BATCH + term + 1] = h.im;
            }
        }
        let (above, beneath) = both.split_at_mut(LANES * n);
        for (node, side) in [(up, &mut *above), (down, &mut *beneath)] {
            let (front, u) = self.front(node);
            fill(side, front, u, &self.zetas);
        }
        let target = &mut self.spectral[term * LANES * n..(term + 2) * LANES * n];
        let (sum, turned) = target.split_at_mut(LANES * n);
        for lane in (0..LANES).step_by(2) {
            for j in 0..n {
                let (re, im) = (lane * n + j, (lane + 1) * n + j);
                sum[re] = above[re] + beneath[re];
                sum[im] = above[im] + beneath[im];
                turned[re] = beneath[im] - above[im];
                turned[im] = above[re] - beneath[re];
            }
        }
        self.filled += 1;
        self.advance();
    }

    /// Weighted spectral functions at a node, and the u that goes with ζ.
    fn front(&self, node: &Node) -> ([Complex64; 3], Complex64) {
        let s = Spectral::at(self.space, node);
        let [h, q, p] = self.weights.reduced(&s);
        let weight = node.weight * s.lambda;
        let u = if self.region == Region::Below { s.u1 } else { s.u0 };
        ([weight * h, weight * q * self.q_scale, -node.weight * p], u)
    }

    fn advance(&mut self) {
        self.filled += 1;
        if self.filled >= BATCH {
            self.flush();
        }
    }

    fn flush(&mut self) {
        let n = self.zetas.len();
        let (count, width) = (self.filled, LANES * n);
        for (row, bessel) in self.total.chunks_exact_mut(width).zip(self.bessel.chunks_exact(2 * BATCH)) {
            let (first, second) = row.split_at_mut(4 * n);
            product(first, &bessel[..count], &self.spectral, width, 0);
            product(second, &bessel[BATCH..BATCH + count], &self.spectral, width, 4 * n);
        }
        self.filled = 0;
    }

    /// The total as `[lane][rho][zeta]`.
    fn by_lane(&self) -> Vec<f64> {
        let (m, n) = self.rectangle.points;
        let mut out = vec![0.0; LANES * m * n];
        for (i, row) in self.total.chunks_exact(LANES * n).enumerate() {
            for (lane, part) in row.chunks_exact(n).enumerate() {
                out[(lane * m + i) * n..(lane * m + i + 1) * n].copy_from_slice(part);
            }
        }
        out
    }
}

/// row += Σ bessel[t] · spectral[t·width + from ..].
fn product(row: &mut [f64], bessel: &[f64], spectral: &[f64], width: usize, from: usize) {
    let n = row.len();
    let side = |t: usize| &spectral[t * width + from..t * width + from + n];
    let whole = bessel.len() / 4 * 4;
    for t in (0..whole).step_by(4) {
        let (p, q, r, s) = (bessel[t], bessel[t + 1], bessel[t + 2], bessel[t + 3]);
        let (a, b, c, d) = (side(t), side(t + 1), side(t + 2), side(t + 3));
        for (k, out) in row.iter_mut().enumerate() {
            *out += p * a[k] + q * b[k] + (r * c[k] + s * d[k]);
        }
    }
    for t in whole..bessel.len() {
        for (out, a) in row.iter_mut().zip(side(t)) {
            *out += bessel[t] * a;
        }
    }
}

/// front · e^{−uζ} at every ζ, as lanes × ζ.
fn fill(out: &mut [f64], front: [Complex64; 3], u: Complex64, zetas: &[f64]) {
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
