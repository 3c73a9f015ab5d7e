//! Moments of a pair of elements: 4 × 4 complex numbers, real and imaginary parts apart so that rows are vectors.

use crate::mesh::MAX_DEGREE;
use crate::processor::mul_add;
use num_complex::Complex64;

/// Legendre polynomials on an element.
pub(super) const SIDE: usize = MAX_DEGREE + 1;

/// One row.
type Row = [f64; SIDE];

/// Means over a pair of elements of P_a P_b times a kernel, `[a][b]`.
#[derive(Debug, Clone, Copy)]
pub(super) struct Block {
    pub(super) re: [Row; SIDE],
    pub(super) im: [Row; SIDE],
}

/// The kernels of a pair in a form both the matrix and the potentials can use.
#[derive(Debug, Clone, Copy)]
pub(super) struct PairBlocks {
    /// Mean of t·K·t' over the pair, 1/m.
    pub(super) current: Block,
    /// Mean of K_Φ over the pair, 1/m.
    pub(super) potential: Block,
}

impl PairBlocks {
    pub(super) const ZERO: Self = Self { current: Block::ZERO, potential: Block::ZERO };
}

impl Block {
    pub(super) const ZERO: Self = Self { re: [[0.0; SIDE]; SIDE], im: [[0.0; SIDE]; SIDE] };

    /// One moment.
    #[inline(always)]
    pub(super) fn at(&self, a: usize, b: usize) -> Complex64 {
        Complex64::new(self.re[a][b], self.im[a][b])
    }

    /// Add a column times a complex row.
    #[inline(always)]
    pub(super) fn add_outer<const FMA: bool>(&mut self, column: &Row, re: &Row, im: &Row) {
        for a in 0..SIDE {
            for b in 0..SIDE {
                self.re[a][b] = mul_add::<FMA>(column[a], re[b], self.re[a][b]);
                self.im[a][b] = mul_add::<FMA>(column[a], im[b], self.im[a][b]);
            }
        }
    }

    /// Add a complex multiple of another block.
    #[inline(always)]
    pub(super) fn add<const FMA: bool>(&mut self, factor: Complex64, other: &Self) {
        for a in 0..SIDE {
            for b in 0..SIDE {
                let (re, im) = (other.re[a][b], other.im[a][b]);
                self.re[a][b] = mul_add::<FMA>(factor.re, re, mul_add::<FMA>(-factor.im, im, self.re[a][b]));
                self.im[a][b] = mul_add::<FMA>(factor.re, im, mul_add::<FMA>(factor.im, re, self.im[a][b]));
            }
        }
    }

    /// Add a complex multiple of real moments.
    #[inline(always)]
    pub(super) fn add_real<const FMA: bool>(&mut self, factor: Complex64, other: &[Row; SIDE]) {
        for a in 0..SIDE {
            for b in 0..SIDE {
                self.re[a][b] = mul_add::<FMA>(factor.re, other[a][b], self.re[a][b]);
                self.im[a][b] = mul_add::<FMA>(factor.im, other[a][b], self.im[a][b]);
            }
        }
    }
}

/// a · M + p · D N Dᵗ, D the transposed derivative of a Legendre series: the weak form of a pair.
#[inline(always)]
pub(super) fn weak_form<const FMA: bool>(a: f64, current: &Block, p: f64, potential: &Block) -> Block {
    Block {
        re: weak_part::<FMA>(a, &current.re, p, &potential.re),
        im: weak_part::<FMA>(a, &current.im, p, &potential.im),
    }
}

#[inline(always)]
fn weak_part<const FMA: bool>(a: f64, m: &[Row; SIDE], p: f64, n: &[Row; SIDE]) -> [Row; SIDE] {
    // P1′ = P0, P2′ = 3 P1, P3′ = 5 P2 + P0; no closures, which would not be inlined
    let mut rows = [[0.0; SIDE]; SIDE];
    for b in 0..SIDE {
        rows[1][b] = n[0][b];
        rows[2][b] = 3.0 * n[1][b];
        rows[3][b] = mul_add::<FMA>(5.0, n[2][b], n[0][b]);
    }
    let mut out = [[0.0; SIDE]; SIDE];
    for i in 0..SIDE {
        let r = &rows[i];
        let raised = [0.0, r[0], 3.0 * r[1], mul_add::<FMA>(5.0, r[2], r[0])];
        for b in 0..SIDE {
            out[i][b] = mul_add::<FMA>(a, m[i][b], p * raised[b]);
        }
    }
    out
}
