//! One factorisation for a whole family of systems that begin with the same unknowns.
//!
//! The symmetric matrix Z = L D Lᵀ (no conjugation, no pivoting, blocked): the factors of its leading block of any size are the
//! leading blocks of its factors. A system of a leading block with a few further unknowns then costs one forward solve of
//! their columns and a small Schur complement. Without pivoting nothing bounds the growth of rounding errors, so every answer is
//! checked by its residual ([`Leading::solve`] says how large it is) and the caller falls back to a full solve.

use super::factor::{Factored, SingularMatrix};
use super::fill::Matrix;
use faer::linalg::matmul::matmul;
use faer::linalg::triangular_solve::{solve_unit_lower_triangular_in_place, solve_unit_upper_triangular_in_place};
use faer::{Accum, Mat, Par};
use num_complex::Complex64;

/// Columns factored at a time.
const BLOCK: usize = 24;

/// The factors of a symmetric matrix, ready for systems that begin with it.
#[derive(Debug, Clone)]
pub struct Leading {
    matrix: Matrix,
    lower: Matrix,
    diagonal: Vec<Complex64>,
}

/// Further unknowns behind the first `leading` ones: their columns against those, and among themselves.
#[derive(Debug, Clone, Copy)]
pub struct Bordered<'a> {
    /// How many unknowns of the common matrix come first.
    pub leading: usize,
    /// Shape (leading, further).
    pub columns: &'a Matrix,
    /// Shape (further, further).
    pub corner: &'a Matrix,
}

impl Leading {
    /// Factor.
    ///
    /// # Errors
    /// [`SingularMatrix`] when a pivot is zero or not finite.
    pub fn new(matrix: Matrix) -> Result<Self, SingularMatrix> {
        let n = matrix.nrows();
        let mut lower = matrix.clone();
        let mut diagonal = vec![Complex64::ZERO; n];
        let one = Complex64::ONE;
        for from in (0..n).step_by(BLOCK) {
            let to = (from + BLOCK).min(n);
            for k in from..to {
                let pivot = lower[(k, k)];
                if !pivot.is_finite() || pivot == Complex64::ZERO {
                    return Err(SingularMatrix { unknowns: n });
                }
                diagonal[k] = pivot;
                let inverse = pivot.inv();
                for i in k + 1..n {
                    lower[(i, k)] *= inverse;
                }
                // within the panel, column by column
                for j in k + 1..to {
                    let factor = lower[(j, k)] * pivot;
                    for i in j..n {
                        let update = lower[(i, k)] * factor;
                        lower[(i, j)] -= update;
                    }
                }
                lower[(k, k)] = one;
            }
            if to == n {
                break;
            }
            let panel = lower.get(to..n, from..to).to_owned();
            let scaled = Mat::from_fn(n - to, to - from, |i, k| panel[(i, k)] * diagonal[from + k]);
            let rest = lower.get_mut(to..n, to..n);
            matmul(rest, Accum::Add, scaled.as_ref(), panel.transpose(), -one, Par::Seq);
        }
        Ok(Self { matrix, lower, diagonal })
    }

    /// Number of unknowns.
    #[must_use]
    pub fn unknowns(&self) -> usize {
        self.diagonal.len()
    }

    /// Solve a bordered system for many right sides (columns; the leading unknowns first). The number is the largest residual of
    /// the first right side over its largest entry.
    ///
    /// # Errors
    /// [`SingularMatrix`] when the small system of the further unknowns is singular.
    pub fn solve(&self, system: Bordered, right: &Matrix) -> Result<(Matrix, f64), SingularMatrix> {
        let (m, t, p) = (system.leading, system.corner.ncols(), right.ncols());
        let one = Complex64::ONE;
        let mut forward = Mat::from_fn(m, t + p, |i, j| if j < t { system.columns[(i, j)] } else { right[(i, j - t)] });
        let lower = self.lower.get(0..m, 0..m);
        solve_unit_lower_triangular_in_place(lower, forward.as_mut(), Par::Seq);
        let divided = Mat::from_fn(m, t + p, |i, j| forward[(i, j)] / self.diagonal[i]);
        let mut schur =
            Mat::from_fn(t, t + p, |i, j| if j < t { system.corner[(i, j)] } else { right[(m + i, j - t)] });
        matmul(schur.as_mut(), Accum::Add, forward.get(.., 0..t).transpose(), divided.as_ref(), -one, Par::Seq);
        let small = Factored::new(schur.get(.., 0..t).to_owned())?;
        let mut further = schur.get(.., t..t + p).to_owned();
        small.solve_in_place(&mut further);
        let mut first = divided.get(.., t..t + p).to_owned();
        matmul(first.as_mut(), Accum::Add, divided.get(.., 0..t), further.as_ref(), -one, Par::Seq);
        solve_unit_upper_triangular_in_place(lower.transpose(), first.as_mut(), Par::Seq);
        let x = Mat::from_fn(m + t, p, |i, j| if i < m { first[(i, j)] } else { further[(i - m, j)] });
        let residual = self.residual(system, &x, right);
        Ok((x, residual))
    }

    fn residual(&self, system: Bordered, x: &Matrix, right: &Matrix) -> f64 {
        let (m, t) = (system.leading, system.corner.ncols());
        let minus = -Complex64::ONE;
        let (first, further) = (x.get(0..m, 0..1), x.get(m..m + t, 0..1));
        let mut top = right.get(0..m, 0..1).to_owned();
        matmul(top.as_mut(), Accum::Add, self.matrix.get(0..m, 0..m), first, minus, Par::Seq);
        matmul(top.as_mut(), Accum::Add, system.columns.as_ref(), further, minus, Par::Seq);
        let mut bottom = right.get(m..m + t, 0..1).to_owned();
        matmul(bottom.as_mut(), Accum::Add, system.columns.transpose(), first, minus, Par::Seq);
        matmul(bottom.as_mut(), Accum::Add, system.corner.as_ref(), further, minus, Par::Seq);
        let largest =
            |m: &Matrix| m.col_iter().flat_map(|c| c.iter().map(|v| v.norm()).collect::<Vec<_>>()).fold(0.0, f64::max);
        let scale = (0..m + t).map(|i| right[(i, 0)].norm()).fold(f64::MIN_POSITIVE, f64::max);
        let worst = largest(&top).max(largest(&bottom)) / scale;
        if worst.is_nan() { f64::INFINITY } else { worst }
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    /// Symmetric, diagonally heavy, of any size.
    fn symmetric(n: usize) -> Matrix {
        Mat::from_fn(n, n, |i, j| {
            let (low, high) = (i.min(j) as f64, i.max(j) as f64);
            let x = (low * 1.7 + high * 0.9).sin() + if i == j { 4.0 } else { 0.0 };
            Complex64::new(0.3 * (low + 2.0 * high).cos(), x / (1.0 + 0.1 * (high - low)))
        })
    }

    #[test]
    fn a_bordered_system_solves_as_the_whole_does() {
        let whole = symmetric(90);
        let common = Leading::new(whole.get(0..70, 0..70).to_owned()).unwrap();
        for leading in [70, 61, 24, 5] {
            let columns = whole.get(0..leading, 70..90).to_owned();
            let corner = whole.get(70..90, 70..90).to_owned();
            let chosen = |k: usize| if k < leading { k } else { 70 + k - leading };
            let n = leading + 20;
            let small = Mat::from_fn(n, n, |i, j| whole[(chosen(i), chosen(j))]);
            let right = Mat::from_fn(n, 2, |i, j| Complex64::new((i + j) as f64, 1.0 - j as f64));
            let mut want = right.clone();
            Factored::new(small).unwrap().solve_in_place(&mut want);
            let (x, residual) = common.solve(Bordered { leading, columns: &columns, corner: &corner }, &right).unwrap();
            assert!(residual < 1e-12, "{residual}");
            for i in 0..n {
                for j in 0..2 {
                    assert!((x[(i, j)] - want[(i, j)]).norm() < 1e-9 * (1.0 + want[(i, j)].norm()), "{i} {j}");
                }
            }
            // a border that is not its own must show in the answer
            let wrong = Mat::from_fn(leading, 20, |i, j| columns[(i, j)] * 1.01);
            let (y, _) = common.solve(Bordered { leading, columns: &wrong, corner: &corner }, &right).unwrap();
            assert!((0..n).any(|i| (y[(i, 0)] - want[(i, 0)]).norm() > 1e-6 * (1.0 + want[(i, 0)].norm())));
        }
        assert!(Leading::new(Mat::zeros(3, 3)).is_err());
    }
}
