//! Spectral sums over many distances at once, as a matrix product.
//!
//! Weights times exponentials of the heights stand on one side, Bessel functions of λρ on the other. The two Hankel
//! branches are conjugates of each other, so that the Bessel side stays real.

use super::bessel_fast::{hankel_fast, j01_fast};
use super::panels::Fineness;
use super::rule::{Node, Reach, Wave, nodes};
use super::soil::HalfSpace;

/// Real and imaginary parts of H, Q and ∂P/∂ρ.
pub(super) const LANES: usize = 6;

/// Terms summed at once: what fits the nearest cache.
const BATCH: usize = 16;

/// The sum over the path, batch by batch. `fill` writes the spectral side of one node as lanes × columns.
pub(super) struct SpectralSum<'a, F> {
    rhos: &'a [f64],
    columns: usize,
    fill: &'a F,
    /// `[rho][order][term]`: Bessel functions of order 0, then 1.
    bessel: Vec<f64>,
    /// `[term][lane][column]`.
    spectral: Vec<f64>,
    filled: usize,
    /// `[rho][lane][column]`.
    total: Vec<f64>,
}

impl<'a, F: Fn(&Node, &mut [f64])> SpectralSum<'a, F> {
    pub(super) fn new(rhos: &'a [f64], columns: usize, fill: &'a F) -> Self {
        Self {
            rhos,
            columns,
            fill,
            bessel: vec![0.0; 2 * rhos.len() * BATCH],
            spectral: vec![0.0; LANES * columns * BATCH],
            filled: 0,
            total: vec![0.0; LANES * rhos.len() * columns],
        }
    }

    /// The sum as `[lane][rho][column]`.
    pub(super) fn run(mut self, space: &HalfSpace, reach: Reach, fineness: Fineness) -> Vec<f64> {
        let path = nodes(space, reach, fineness);
        let standing = path.iter().position(|n| n.wave != Wave::Standing).unwrap_or(path.len());
        let (standing, branches) = path.split_at(standing);
        let (outgoing, incoming) = branches.split_at(branches.len() / 2);
        for node in standing {
            self.standing(node);
        }
        let mut both = vec![0.0; 2 * LANES * self.columns];
        for (up, down) in outgoing.iter().zip(incoming) {
            self.branch(up, down, &mut both);
        }
        self.flush();
        self.by_lane()
    }

    fn standing(&mut self, node: &Node) {
        let term = self.filled;
        for (i, rho) in self.rhos.iter().enumerate() {
            let (j0, j1) = j01_fast(node.lambda.re * rho);
            self.bessel[2 * i * BATCH + term] = j0;
            self.bessel[(2 * i + 1) * BATCH + term] = j1;
        }
        let n = self.columns;
        (self.fill)(node, &mut self.spectral[term * LANES * n..(term + 1) * LANES * n]);
        self.advance();
    }

    /// ½H⁽¹⁾ of one branch and its conjugate of the other: Σ and j·Δ of the spectral sides beside Re and Im.
    fn branch(&mut self, up: &Node, down: &Node, both: &mut [f64]) {
        let n = self.columns;
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
        (self.fill)(up, above);
        (self.fill)(down, beneath);
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

    fn advance(&mut self) {
        self.filled += 1;
        if self.filled >= BATCH {
            self.flush();
        }
    }

    fn flush(&mut self) {
        let n = self.columns;
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
        let (m, n) = (self.rhos.len(), self.columns);
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
    for (t, b) in bessel.iter().enumerate().skip(whole) {
        for (out, a) in row.iter_mut().zip(side(t)) {
            *out += b * a;
        }
    }
}
