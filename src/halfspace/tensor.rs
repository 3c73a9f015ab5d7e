//! Chebyshev coefficients over a box of three variables, and their restriction to half of it.

use super::chebyshev::{analysis, restriction};
use super::spectral_sum::{LANES, add_rows};
use crate::processor::{Vectorised, widest};

/// Values or coefficients `[lane][first][second][third]`.
#[derive(Debug, Clone)]
pub(super) struct Tensor {
    pub size: [usize; 3],
    pub data: Vec<f64>,
}

/// The matrices that restrict to a half, kept while a patch is cut.
#[derive(Debug, Default)]
pub(super) struct Halvings {
    by_size: Vec<[Vec<f64>; 2]>,
}

impl Halvings {
    fn matrix(&mut self, from: usize, to: usize, upper: bool) -> &[f64] {
        if self.by_size.len() <= from {
            self.by_size.resize(from + 1, [Vec::new(), Vec::new()]);
        }
        let matrix = &mut self.by_size[from][usize::from(upper)];
        if matrix.len() != to * from {
            let (low, high) = if upper { (0.0, 1.0) } else { (-1.0, 0.0) };
            *matrix = restriction(to, from, low, high);
        }
        matrix
    }
}

impl Tensor {
    /// From values at Chebyshev points to coefficients.
    pub(super) fn transformed(self) -> Self {
        let size = self.size;
        (0..3)
            .filter(|&axis| size[axis] > 1)
            .fold(self, |tensor, axis| tensor.along(axis, size[axis], &analysis(size[axis])))
    }

    /// Coefficients on the lower or upper half of one axis; no fewer than `least` along it.
    pub(super) fn half(&self, axis: usize, upper: bool, least: usize, halvings: &mut Halvings) -> Self {
        let from = self.size[axis];
        let to = (from / 2 + 3).max(least).min(from.max(least));
        self.along(axis, to, halvings.matrix(from, to, upper))
    }

    /// Multiplies one axis by a `to` × `size[axis]` matrix.
    fn along(&self, axis: usize, to: usize, matrix: &[f64]) -> Self {
        let from = self.size[axis];
        let inner: usize = self.size[axis + 1..].iter().product();
        let mut size = self.size;
        size[axis] = to;
        let outer = self.data.len() / (from * inner);
        let mut data = vec![0.0; outer * to * inner];
        widest(Along { from, to, inner, matrix, source: &self.data, target: &mut data });
        Self { size, data }
    }

    /// One coefficient.
    pub(super) fn at(&self, lane: usize, [i, j, k]: [usize; 3]) -> f64 {
        let [a, b, c] = self.size;
        if i < a && j < b && k < c { self.data[((lane * a + i) * b + j) * c + k] } else { 0.0 }
    }

    /// Sums of the coefficients of total degree above `degree`, by the axis that has the highest degree; the largest
    /// over the lanes.
    pub(super) fn dropped(&self, degree: usize) -> [f64; 3] {
        let mut worst = [0.0f64; 3];
        let [a, b, c] = self.size;
        for lane in self.data.chunks_exact(a * b * c) {
            let mut sums = [0.0; 3];
            if c == 1 {
                for (i, row) in lane.chunks_exact(b).enumerate() {
                    let from = (degree + 1).saturating_sub(i).min(b);
                    let turn = (i + 1).clamp(from, b);
                    sums[0] += row[from..turn].iter().map(|v| v.abs()).sum::<f64>();
                    sums[1] += row[turn..].iter().map(|v| v.abs()).sum::<f64>();
                }
            }
            let cubes = if c == 1 { &[] } else { lane };
            for (i, layer) in cubes.chunks_exact(b * c).enumerate() {
                for (j, row) in layer.chunks_exact(c).enumerate() {
                    let from = (degree + 1).saturating_sub(i + j).min(c);
                    let most = i.max(j);
                    // Up to degree `most` in the last variable one of the first two leads, beyond it the last.
                    let turn = (most + 1).clamp(from, c);
                    let inner: f64 = row[from..turn].iter().map(|v| v.abs()).sum();
                    let outer: f64 = row[turn..].iter().map(|v| v.abs()).sum();
                    sums[if i >= j { 0 } else { 1 }] += inner;
                    sums[2] += outer;
                }
            }
            for (w, s) in worst.iter_mut().zip(sums) {
                *w = w.max(s);
            }
        }
        worst
    }

    /// Along each axis the largest of its last two layers' sums of magnitudes over the lanes: how well it is resolved.
    pub(super) fn tail(&self) -> [f64; 3] {
        let [a, b, c] = self.size;
        let mut worst = [0.0f64; 3];
        for lane in 0..LANES {
            let mut sums = [[0.0; 2]; 3];
            for i in 0..a {
                for j in 0..b {
                    for k in 0..c {
                        let size = self.at(lane, [i, j, k]).abs();
                        for (axis, (index, count)) in [(i, a), (j, b), (k, c)].into_iter().enumerate() {
                            if index + 2 >= count {
                                sums[axis][count - 1 - index] += size;
                            }
                        }
                    }
                }
            }
            for (w, s) in worst.iter_mut().zip(sums) {
                *w = w.max(s[0]).max(s[1]);
            }
        }
        worst
    }
}

/// A matrix applied to one axis, as work for the processor.
struct Along<'a> {
    from: usize,
    to: usize,
    /// Product of the sizes behind the axis.
    inner: usize,
    matrix: &'a [f64],
    source: &'a [f64],
    target: &'a mut [f64],
}

impl Vectorised for Along<'_> {
    type Output = ();

    #[inline(always)]
    fn run<const FMA: bool>(self) {
        let Self { from, to, inner, matrix, source, target } = self;
        if inner == 1 {
            let mut turned = vec![0.0; from * to];
            for p in 0..from * to {
                turned[p] = matrix[(p % to) * from + p / to];
            }
            for (source, target) in source.chunks_exact(from).zip(target.chunks_exact_mut(to)) {
                add_rows::<FMA>(target, source, &turned, (to, 0));
            }
            return;
        }
        for (source, target) in source.chunks_exact(from * inner).zip(target.chunks_exact_mut(to * inner)) {
            for (row, weights) in target.chunks_exact_mut(inner).zip(matrix.chunks_exact(from)) {
                add_rows::<FMA>(row, weights, source, (inner, 0));
            }
        }
    }
}
