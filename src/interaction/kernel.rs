//! e^{−jkR}/R for many distances at once.

use super::block::{Block, SIDE};
use crate::processor::{Vectorised, mul_add, sin_cos, widest};

/// Squared distances to e^{−j(k − jα)R}/R.
#[inline(always)]
fn wave<const FMA: bool>(squared: &[f64], k: f64, alpha: f64, re: &mut [f64], im: &mut [f64]) {
    let n = squared.len().min(re.len()).min(im.len());
    let (squared, re, im) = (&squared[..n], &mut re[..n], &mut im[..n]);
    for i in 0..n {
        let r = squared[i].sqrt();
        let inverse = 1.0 / r;
        let (sin, cos) = sin_cos::<FMA>(k * r);
        re[i] = cos * inverse;
        im[i] = -sin * inverse;
    }
    if alpha != 0.0 {
        for i in 0..n {
            let decay = (-alpha * squared[i].sqrt()).exp();
            re[i] *= decay;
            im[i] *= decay;
        }
    }
}

/// Points on each of two elements with their weights, and how far apart they count.
#[derive(Debug, Clone, Copy)]
pub(super) struct PointPair<'a> {
    /// x, y, z of the points on the first element, m.
    pub(super) observers: &'a [Vec<f64>; 3],
    /// The same on the second.
    pub(super) sources: &'a [Vec<f64>; 3],
    /// Weight times P_0..P_3 at each point of the first element.
    pub(super) left: &'a [[f64; SIDE]],
    /// The same of the second.
    pub(super) right: &'a [[f64; SIDE]],
    /// Added to every squared distance, m².
    pub(super) offset_m2: f64,
    /// Take the static part 1/R − k²R/2 out.
    pub(super) rest_only: bool,
}

/// Most points on one element.
pub(super) const MOST_POINTS: usize = 8;
const ROOM: usize = MOST_POINTS * MOST_POINTS;

/// [`pair_block`] by itself, compiled for the processor.
pub(super) fn pair_moments(pair: &PointPair, k_per_m: f64, alpha_per_m: f64) -> Block {
    struct Work<'a>(&'a PointPair<'a>, f64, f64);

    impl Vectorised for Work<'_> {
        type Output = Block;

        #[inline(always)]
        fn run<const FMA: bool>(self) -> Block {
            pair_block::<FMA>(self.0, self.1, self.2)
        }
    }
    widest(Work(pair, k_per_m, alpha_per_m))
}

/// Places on a line at which an element's field is wanted.
pub(super) const LINE_POINTS: usize = 16;

/// Real and imaginary parts of moments at [`LINE_POINTS`] places.
pub(super) type LineMoments = [[[f64; LINE_POINTS]; 2]; 4];

/// Σ_q left_a e^{−j(k − jα)R}/R at places u, v, w for points x, y, z of an element with their weights, 1/m.
#[inline(always)]
pub(super) fn line_moments<const FMA: bool>(
    (points, left): (&[[f64; 3]], &[[f64; SIDE]]),
    [u, v, w]: &[[f64; LINE_POINTS]; 3],
    offset_m2: f64,
    (k, alpha): (f64, f64),
) -> LineMoments {
    let mut out = [[[0.0; LINE_POINTS]; 2]; 4];
    let (mut squared, mut re, mut im) = ([1.0; LINE_POINTS], [0.0; LINE_POINTS], [0.0; LINE_POINTS]);
    for (p, weights) in points.iter().zip(left) {
        for q in 0..LINE_POINTS {
            let (dx, dy, dz) = (p[0] - u[q], p[1] - v[q], p[2] - w[q]);
            squared[q] = dx * dx + dy * dy + dz * dz + offset_m2;
        }
        wave::<FMA>(&squared, k, alpha, &mut re, &mut im);
        for ([sum_re, sum_im], l) in out.iter_mut().zip(weights) {
            for q in 0..LINE_POINTS {
                sum_re[q] = mul_add::<FMA>(re[q], *l, sum_re[q]);
                sum_im[q] = mul_add::<FMA>(im[q], *l, sum_im[q]);
            }
        }
    }
    out
}

/// Σ_q Σ_r left_a right_b e^{−j(k − jα)R}/R for a pair of elements, 1/m; with `rest_only` less Σ (1/R − k²R/2).
#[inline(always)]
pub(super) fn pair_block<const FMA: bool>(pair: &PointPair, k: f64, alpha: f64) -> Block {
    let (n, m) = (pair.left.len().min(MOST_POINTS), pair.right.len().min(MOST_POINTS));
    let [x, y, z] = pair.observers;
    let [u, v, w] = pair.sources;
    let (u, v, w) = (&u[..m], &v[..m], &w[..m]);
    let (mut squared, mut re, mut im) = ([1.0; ROOM], [0.0; ROOM], [0.0; ROOM]);
    for q in 0..n {
        let row = &mut squared[q * m..(q + 1) * m];
        for r in 0..m {
            let (dx, dy, dz) = (x[q] - u[r], y[q] - v[r], z[q] - w[r]);
            row[r] = dx * dx + dy * dy + dz * dz + pair.offset_m2;
        }
    }
    // whole vectors: the padding holds R = 1 and is not summed
    let count = (n * m).next_multiple_of(8).min(ROOM);
    wave::<FMA>(&squared[..count], k, alpha, &mut re[..count], &mut im[..count]);
    if pair.rest_only {
        // (k − jα)²/2
        let (half_re, half_im) = (0.5 * (k * k - alpha * alpha), -k * alpha);
        for i in 0..count {
            let r = squared[i].sqrt();
            re[i] += half_re * r - 1.0 / r;
            im[i] += half_im * r;
        }
    }
    let mut out = Block::ZERO;
    for q in 0..n {
        let (mut sum_re, mut sum_im) = ([0.0; 4], [0.0; 4]);
        for r in 0..m {
            let (a, b, weights) = (re[q * m + r], im[q * m + r], &pair.right[r]);
            for i in 0..4 {
                sum_re[i] = mul_add::<FMA>(a, weights[i], sum_re[i]);
                sum_im[i] = mul_add::<FMA>(b, weights[i], sum_im[i]);
            }
        }
        out.add_outer::<FMA>(&pair.left[q], &sum_re, &sum_im);
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_wave_decays_and_turns_as_it_should() {
        let r: Vec<f64> = (1..50).map(|i| f64::from(i) * 0.3).collect();
        let squared: Vec<f64> = r.iter().map(|r| r * r).collect();
        let (mut re, mut im) = (vec![0.0; r.len()], vec![0.0; r.len()]);
        wave::<false>(&squared, 0.7, 0.2, &mut re, &mut im);
        for (i, r) in r.iter().enumerate() {
            let want = num_complex::Complex64::new(-0.2 * r, -0.7 * r).exp() / r;
            assert!((want.re - re[i]).abs() < 1e-14 && (want.im - im[i]).abs() < 1e-14);
        }
    }
}
