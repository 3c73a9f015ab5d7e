//! Bessel functions of orders 0 and 1: fast ones of a real argument, scaled Hankel functions of a complex one.

use num_complex::Complex64;

/// J₀(x) and J₁(x) for x ≥ 0: power series, downward recurrence, Hankel's asymptotic series.
pub(super) fn j01(x: f64) -> (f64, f64) {
    if x < 5.0 {
        by_series(x)
    } else if x < 25.0 {
        by_recurrence(x)
    } else {
        by_asymptotics(x)
    }
}

/// Σ (−x²/4)^m / (m!)², and its companion for order 1; under 5 no digit beyond the fourteenth is lost.
fn by_series(x: f64) -> (f64, f64) {
    let square = -0.25 * x * x;
    let (mut term, mut j0, mut j1) = (1.0, 1.0, 1.0);
    for m in 1..40 {
        let m = f64::from(m);
        term *= square / (m * m);
        j0 += term;
        j1 += term / (m + 1.0);
        if term.abs() < 1e-17 {
            break;
        }
    }
    (j0, 0.5 * x * j1)
}

/// Miller's downward recurrence, normalised by J₀ + 2 Σ J_2m = 1.
fn by_recurrence(x: f64) -> (f64, f64) {
    let start = 2 * ((x + 38.0) as usize / 2);
    let inverse = 2.0 / x;
    let (mut above, mut here, mut sum) = (0.0, 1e-30, 0.0);
    let mut order = start;
    while order > 0 {
        if order.is_multiple_of(2) {
            sum += here;
        }
        (above, here) = (here, order as f64 * inverse * here - above);
        order -= 1;
    }
    let scale = 1.0 / (here + 2.0 * sum);
    (here * scale, above * scale)
}

/// DLMF 10.17.3.
fn by_asymptotics(x: f64) -> (f64, f64) {
    let z = Complex64::new(x, 0.0);
    let (h0, h1) = hankel_series(z);
    let turn = Complex64::new(x.cos(), x.sin());
    ((h0 * turn).re, (h1 * turn).re)
}

/// e^{−jz} H₀⁽¹⁾(z) and e^{−jz} H₁⁽¹⁾(z) by Hankel's asymptotic series (DLMF 10.17.5), cut at its smallest term,
/// about e^{−2|z|}.
pub(super) fn hankel_series(z: Complex64) -> (Complex64, Complex64) {
    let over = Complex64::new(0.0, 1.0) / (8.0 * z);
    let front = super::soil::root(std::f64::consts::FRAC_2_PI / z) * std::f64::consts::FRAC_1_SQRT_2;
    let one = Complex64::new(1.0, 0.0);
    let (mut term0, mut term1, mut sum0, mut sum1) = (one, one, one, one);
    for m in 1..30 {
        let m = f64::from(m);
        let odd = (2.0 * m - 1.0) * (2.0 * m - 1.0);
        let next0 = term0 * over * (-odd / m);
        if next0.norm_sqr() > term0.norm_sqr() {
            break;
        }
        term0 = next0;
        term1 *= over * ((4.0 - odd) / m);
        sum0 += term0;
        sum1 += term1;
        if term0.norm_sqr() < 1e-33 {
            break;
        }
    }
    let h0 = front * Complex64::new(1.0, -1.0) * sum0;
    let h1 = front * Complex64::new(-1.0, -1.0) * sum1;
    (h0, h1)
}

/// e^{−jz} H₀⁽¹⁾(z) and e^{−jz} H₁⁽¹⁾(z) to full accuracy for any z ≠ 0 with Re z > 0, Im z ≥ 0.
pub(super) fn hankel_scaled(z: Complex64) -> (Complex64, Complex64) {
    if z.norm_sqr() > 400.0 {
        return hankel_series(z);
    }
    let order = |nu: f64| complex_bessel::hankel1_scaled(nu, z).unwrap_or_else(|_| Complex64::new(f64::NAN, f64::NAN));
    (order(0.0), order(1.0))
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn real_arguments_agree_with_the_amos_algorithm() {
        let mut x = 1e-6;
        while x < 2e4 {
            let (j0, j1) = j01(x);
            let z = Complex64::new(x, 0.0);
            let (a0, a1) = (complex_bessel::besselj(0.0, z).unwrap().re, complex_bessel::besselj(1.0, z).unwrap().re);
            let size = 1.0 / (1.0 + x).sqrt();
            assert!((j0 - a0).abs() < 3e-14 * size + 1e-16 * x * size, "J0({x}) {j0} {a0}");
            assert!((j1 - a1).abs() < 3e-14 * size + 1e-16 * x * size, "J1({x}) {j1} {a1}");
            x *= 1.0137;
        }
    }

    #[test]
    fn asymptotic_series_is_good_beyond_twenty() {
        for angle in 0..10 {
            let z = Complex64::from_polar(20.5, f64::from(angle) * 0.15);
            let (h0, h1) = hankel_series(z);
            let a0 = complex_bessel::hankel1_scaled(0.0, z).unwrap();
            let a1 = complex_bessel::hankel1_scaled(1.0, z).unwrap();
            assert!((h0 - a0).norm() < 1e-14 * a0.norm(), "{z} {h0} {a0}");
            assert!((h1 - a1).norm() < 1e-14 * a1.norm(), "{z} {h1} {a1}");
        }
    }
}
