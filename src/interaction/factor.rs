//! LU factorisation with partial pivoting by faer (equal to LAPACK's zgetrf on one thread), and solves with it.

use super::Matrix;
use faer::dyn_stack::{MemBuffer, MemStack};
use faer::linalg::lu::partial_pivoting::factor::{lu_in_place, lu_in_place_scratch};
use faer::linalg::lu::partial_pivoting::solve::{solve_in_place, solve_in_place_scratch};
use faer::{Mat, Par};
use num_complex::Complex64;

/// The matrix was singular or not finite: the station cannot be solved at this frequency.
#[derive(Debug, Clone, Copy, thiserror::Error, PartialEq, Eq)]
#[error("the interaction matrix of {unknowns} unknowns is singular or not finite")]
pub struct SingularMatrix {
    /// Size of the matrix.
    pub unknowns: usize,
}

/// A factored interaction matrix.
#[derive(Debug, Clone)]
pub struct Factored {
    lu: Matrix,
    forward: Vec<usize>,
    inverse: Vec<usize>,
}

impl Factored {
    /// Factor a square matrix in place.
    ///
    /// # Errors
    /// [`SingularMatrix`] when a pivot is zero or anything is not finite (faer itself would hand on NaN).
    pub fn new(mut matrix: Matrix) -> Result<Self, SingularMatrix> {
        let n = matrix.nrows();
        let (mut forward, mut inverse) = (vec![0_usize; n], vec![0_usize; n]);
        let mut memory = MemBuffer::new(lu_in_place_scratch::<usize, Complex64>(n, n, Par::Seq, Default::default()));
        lu_in_place(
            matrix.as_mut(),
            &mut forward,
            &mut inverse,
            Par::Seq,
            MemStack::new(&mut memory),
            Default::default(),
        );
        let sound = (0..n).all(|k| {
            let pivot = matrix[(k, k)];
            pivot.is_finite() && pivot != Complex64::ZERO
        });
        if sound { Ok(Self { lu: matrix, forward, inverse }) } else { Err(SingularMatrix { unknowns: n }) }
    }

    /// Solve for many right sides (columns), in place.
    pub fn solve_in_place(&self, right: &mut Mat<Complex64>) {
        let n = self.lu.nrows();
        let perm = faer::perm::PermRef::new_checked(&self.forward, &self.inverse, n);
        let mut memory = MemBuffer::new(solve_in_place_scratch::<usize, Complex64>(n, right.ncols(), Par::Seq));
        solve_in_place(self.lu.as_ref(), self.lu.as_ref(), perm, right.as_mut(), Par::Seq, MemStack::new(&mut memory));
    }

    /// Number of unknowns.
    #[must_use]
    pub fn unknowns(&self) -> usize {
        self.lu.nrows()
    }
}
