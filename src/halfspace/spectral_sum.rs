//! Spectral sums over many distances at once, as a matrix product.
//!
//! Weights times exponentials of the heights stand on one side, Bessel functions of λρ on the other. The two Hankel
//! branches are conjugates of each other, so that the Bessel side stays real.

use super::bessel_fast::{hankel_fast, j01_fast};
use super::panels::Fineness;
use super::rule::{Node, Reach, Wave, nodes};
use super::soil::HalfSpace;
use crate::processor::{Vectorised, mul_add, widest};

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
        widest(Flush {
            columns: self.columns,
            count: self.filled,
            bessel: &self.bessel,
            spectral: &self.spectral,
            total: &mut self.total,
        });
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

/// One batch added to the total, as work for the processor.
struct Flush<'a> {
    columns: usize,
    count: usize,
    bessel: &'a [f64],
    spectral: &'a [f64],
    total: &'a mut [f64],
}

impl Vectorised for Flush<'_> {
    type Output = ();

    #[inline(always)]
    fn run<const FMA: bool>(self) {
        let (n, width) = (self.columns, LANES * self.columns);
        for (row, bessel) in self.total.chunks_exact_mut(width).zip(self.bessel.chunks_exact(2 * BATCH)) {
            let (first, second) = row.split_at_mut(4 * n);
            add_rows::<FMA>(first, &bessel[..self.count], self.spectral, (width, 0));
            add_rows::<FMA>(second, &bessel[BATCH..BATCH + self.count], self.spectral, (width, 4 * n));
        }
    }
}

/// row += Σ weights[t] · rows[t·stride + from ..].
#[inline(always)]
pub(super) fn add_rows<const FMA: bool>(
    row: &mut [f64],
    weights: &[f64],
    rows: &[f64],
    (stride, from): (usize, usize),
) {
    let n = row.len();
    let whole = weights.len() / 4 * 4;
    for t in (0..whole).step_by(4) {
        let (p, q, r, s) = (weights[t], weights[t + 1], weights[t + 2], weights[t + 3]);
        let a = &rows[t * stride + from..t * stride + from + n];
        let b = &rows[(t + 1) * stride + from..(t + 1) * stride + from + n];
        let c = &rows[(t + 2) * stride + from..(t + 2) * stride + from + n];
        let d = &rows[(t + 3) * stride + from..(t + 3) * stride + from + n];
        for k in 0..n {
            let pair = mul_add::<FMA>(p, a[k], row[k]);
            row[k] = mul_add::<FMA>(q, b[k], pair) + mul_add::<FMA>(r, c[k], s * d[k]);
        }
    }
    for t in whole..weights.len() {
        let a = &rows[t * stride + from..t * stride + from + n];
        for k in 0..n {
            row[k] = mul_add::<FMA>(weights[t], a[k], row[k]);
        }
    }
}
