//! J₀ and J₁ to nine digits in a few nanoseconds, for tables.

use super::bessel::j01;
use super::soil::root;
use num_complex::Complex64;
use std::sync::OnceLock;

const STEPS_PER_UNIT: f64 = 4.0;
const LAST: usize = 160;
const TERMS: usize = 7;

/// Taylor coefficients of both functions about multiples of a quarter.
fn expansions() -> &'static [[[f64; TERMS]; 2]] {
    static TABLE: OnceLock<Vec<[[f64; TERMS]; 2]>> = OnceLock::new();
    TABLE.get_or_init(|| (0..=LAST).map(|i| expand(i as f64 / STEPS_PER_UNIT)).collect())
}

/// From x J₀' = −x J₁ and (x J₁)' = x J₀, order by order: with t = x − c, coefficients a of J₀ and b of J₁ obey
/// (m+1) a_{m+1} = −b_m and c (m+1) b_{m+1} = c a_m + a_{m−1} − (m+1) b_m.
fn expand(c: f64) -> [[f64; TERMS]; 2] {
    let (mut a, mut b) = ([0.0; TERMS], [0.0; TERMS]);
    (a[0], b[0]) = j01(c);
    if c == 0.0 {
        return [
            [1.0, 0.0, -0.25, 0.0, 1.0 / 64.0, 0.0, -1.0 / 2304.0],
            [0.0, 0.5, 0.0, -0.0625, 0.0, 1.0 / 384.0, 0.0],
        ];
    }
    for m in 0..TERMS - 1 {
        let next = (m + 1) as f64;
        let before = if m > 0 { a[m - 1] } else { 0.0 };
        a[m + 1] = -b[m] / next;
        b[m + 1] = (c * a[m] + before - next * b[m]) / (c * next);
    }
    [a, b]
}

/// J₀(x) and J₁(x) for x ≥ 0, errors under 1e-9.
pub(super) fn j01_fast(x: f64) -> (f64, f64) {
    let at = (x * STEPS_PER_UNIT + 0.5) as usize;
    if at > LAST {
        return by_phase(x);
    }
    let t = x - at as f64 / STEPS_PER_UNIT;
    let [a, b] = &expansions()[at];
    let horner = |c: &[f64; TERMS]| c.iter().rev().fold(0.0, |sum, &c| sum * t + c);
    (horner(a), horner(b))
}

/// Four terms of Hankel's series (DLMF 10.17.3), enough beyond 40.
fn by_phase(x: f64) -> (f64, f64) {
    let (sin, cos) = x.sin_cos();
    let y = 1.0 / (64.0 * x * x);
    let p0 = 1.0 - y * (4.5 - y * 459.375);
    let q0 = (-1.0 + y * (37.5 - y * 7_441.875)) / (8.0 * x);
    let p1 = 1.0 + y * (7.5 - y * 590.625);
    let q1 = (3.0 - y * (52.5 - y * 9_095.625)) / (8.0 * x);
    let size = (std::f64::consts::FRAC_1_PI / x).sqrt();
    let (even, odd) = (cos + sin, sin - cos);
    (size * (p0 * even - q0 * odd), size * (p1 * odd + q1 * even))
}

/// Coefficients of (j/z)^m in Hankel's series for orders 0 and 1 (DLMF 10.17.1).
const SERIES: [[f64; 2]; 14] = [
    [1.0, 1.0],
    [-0.125, 0.375],
    [0.0703125, -0.1171875],
    [-0.0732421875, 0.1025390625],
    [0.112152099609375, -0.144195556640625],
    [-0.22710800170898438, 0.2775764465332031],
    [0.5725014209747314, -0.6765925884246826],
    [-1.7277275025844574, 1.993531733751297],
    [6.074042001273483, -6.883914268109947],
    [-24.380529699556064, 27.248827311268542],
    [110.01714026924674, -121.59789187653587],
    [-551.3358961220206, 603.8440767050702],
    [3038.090510922384, -3302.2722944808525],
    [-18257.755474293175, 19718.37591223663],
];

/// H₀⁽¹⁾(z) and H₁⁽¹⁾(z) for Re z > 0, Im z ≥ 0 by Hankel's series, cut where |z| allows: errors about e^{−2|z|}, at
/// best 1e-9.
pub(super) fn hankel_fast(z: Complex64) -> (Complex64, Complex64) {
    let size = z.norm_sqr();
    let terms = if size > 400.0 {
        8
    } else if size > 144.0 {
        9
    } else {
        SERIES.len()
    };
    let inverse = z.conj() / size;
    let w = Complex64::new(-inverse.im, inverse.re);
    let zero = Complex64::new(0.0, 0.0);
    let (mut sum0, mut sum1) = (zero, zero);
    for [a, b] in SERIES[..terms].iter().rev() {
        sum0 = sum0 * w + a;
        sum1 = sum1 * w + b;
    }
    let (sin, cos) = z.re.sin_cos();
    let fall = (-z.im).exp();
    let turn = Complex64::new(cos * fall, sin * fall);
    let front = root(inverse * std::f64::consts::FRAC_1_PI) * turn;
    (front * Complex64::new(1.0, -1.0) * sum0, front * Complex64::new(-1.0, -1.0) * sum1)
}

#[cfg(test)]
mod tests {
    use super::super::bessel::hankel_scaled;
    use super::*;

    #[test]
    fn fast_hankel_functions_are_good_beyond_six() {
        for (x, y, allowed) in
            [(6.0, 0.0, 1e-5), (6.0, 5.0, 1e-6), (12.1, 0.0, 1e-8), (20.1, 3.0, 1e-9), (300.0, 0.0, 1e-9)]
        {
            let z = Complex64::new(x, y);
            let (h0, h1) = hankel_fast(z);
            let (a0, a1) = hankel_scaled(z);
            let turn = (Complex64::i() * z).exp();
            let (a0, a1) = (a0 * turn, a1 * turn);
            assert!((h0 - a0).norm() < allowed * a0.norm(), "{z}: {h0} {a0}");
            assert!((h1 - a1).norm() < allowed * a1.norm(), "{z}: {h1} {a1}");
        }
    }

    #[test]
    fn fast_functions_keep_nine_digits() {
        let mut x = 0.0;
        while x < 500.0 {
            let ((f0, f1), (j0, j1)) = (j01_fast(x), j01(x));
            assert!((f0 - j0).abs() < 1e-9 && (f1 - j1).abs() < 1e-9, "{x}: {f0} {j0} {f1} {j1}");
            x += 0.0371;
        }
    }
}
