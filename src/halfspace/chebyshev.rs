//! Chebyshev nodes and coefficients, restriction to a part of the interval, and monomials.

use std::f64::consts::PI;

/// The m first-kind Chebyshev points on [−1, 1].
pub(super) fn points(m: usize) -> Vec<f64> {
    (0..m).map(|i| (PI * (i as f64 + 0.5) / m as f64).cos()).collect()
}

/// The m Chebyshev points of a range.
pub(super) fn spread(range: (f64, f64), m: usize) -> Vec<f64> {
    let (middle, half) = (0.5 * (range.0 + range.1), 0.5 * (range.1 - range.0));
    points(m).iter().map(|x| middle + half * x).collect()
}

/// Row k, column i: the matrix that turns values at [`points`] into Chebyshev coefficients.
pub(super) fn analysis(m: usize) -> Vec<f64> {
    // cos of every multiple of π/2m; the angles of the matrix are k(2i+1) of them.
    let cosines: Vec<f64> = (0..4 * m).map(|j| (0.5 * PI * j as f64 / m as f64).cos()).collect();
    let mut matrix = vec![0.0; m * m];
    for k in 0..m {
        let scale = if k == 0 { 1.0 } else { 2.0 } / m as f64;
        for i in 0..m {
            matrix[k * m + i] = scale * cosines[k * (2 * i + 1) % (4 * m)];
        }
    }
    matrix
}

/// Row k of `to`, column l of `from`: from the coefficients on [−1, 1] to those, up to degree `to` − 1, on the part
/// of it from `low` to `high`. Exact if the function has no degree above `to` − 1 there.
pub(super) fn restriction(to: usize, from: usize, low: f64, high: f64) -> Vec<f64> {
    let (middle, half) = (0.5 * (low + high), 0.5 * (high - low));
    let values: Vec<Vec<f64>> = points(to).iter().map(|x| polynomials(from, middle + half * x)).collect();
    let analysis = analysis(to);
    let mut matrix = vec![0.0; to * from];
    for k in 0..to {
        for (i, row) in values.iter().enumerate() {
            let a = analysis[k * to + i];
            for (out, t) in matrix[k * from..(k + 1) * from].iter_mut().zip(row) {
                *out += a * t;
            }
        }
    }
    matrix
}

/// T_0(x) … T_{m−1}(x).
fn polynomials(m: usize, x: f64) -> Vec<f64> {
    let mut out = vec![1.0; m];
    if m > 1 {
        out[1] = x;
    }
    for k in 2..m {
        out[k] = 2.0 * x * out[k - 1] - out[k - 2];
    }
    out
}

/// Row k: the monomial coefficients of T_k, for k below N.
pub(super) fn monomials<const N: usize>() -> [[f64; N]; N] {
    let mut rows = [[0.0; N]; N];
    for k in 0..N {
        if k < 2 {
            rows[k][k] = 1.0;
            continue;
        }
        for i in 0..N {
            let shifted = if i > 0 { rows[k - 1][i - 1] } else { 0.0 };
            rows[k][i] = 2.0 * shifted - rows[k - 2][i];
        }
    }
    rows
}
