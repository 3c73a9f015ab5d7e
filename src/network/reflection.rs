//! Reflection coefficient and standing-wave ratio against a real reference.

use num_complex::Complex64;

/// The largest standing-wave ratio that is told apart: beyond it nothing on the line could be measured.
pub const LARGEST_SWR: f64 = 1e6;

/// Reflection coefficient (Z − R₀)/(Z + R₀) of an impedance, ohm, against a real reference, ohm, greater than zero.
///
/// An infinite impedance reflects +1.
#[must_use]
pub fn reflection(impedance_ohm: Complex64, reference_ohm: f64) -> Complex64 {
    if !impedance_ohm.is_finite() {
        return Complex64::new(1.0, 0.0);
    }
    (impedance_ohm - reference_ohm) / (impedance_ohm + reference_ohm)
}

/// The impedance, ohm, that reflects Γ against a real reference, ohm: R₀ (1 + Γ)/(1 − Γ).
#[must_use]
pub fn impedance_of_reflection(reflection: Complex64, reference_ohm: f64) -> Complex64 {
    reference_ohm * (1.0 + reflection) / (1.0 - reflection)
}

/// Standing-wave ratio of an impedance, ohm, against a real reference, ohm: between 1 and [`LARGEST_SWR`].
///
/// (1 + |Γ|)/(1 − |Γ|), with 1 − |Γ|² taken as 4 R R₀/|Z + R₀|², which keeps its digits where |Γ| is all but 1.
/// An impedance without resistance, or with less than none, has the largest ratio.
#[must_use]
pub fn swr(impedance_ohm: Complex64, reference_ohm: f64) -> f64 {
    if !impedance_ohm.is_finite() || impedance_ohm.re <= 0.0 {
        return LARGEST_SWR;
    }
    let sum = (impedance_ohm + reference_ohm).norm();
    let difference = (impedance_ohm - reference_ohm).norm();
    let ratio = (sum + difference) / (4.0 * impedance_ohm.re * reference_ohm) * (sum + difference);
    ratio.clamp(1.0, LARGEST_SWR)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nearly_total_reflection_keeps_its_digits() {
        // R = 1 milliohm against 50 ohm: 50,000 to one; far beyond: the cap, never NaN.
        assert!((swr(Complex64::new(1e-3, 0.0), 50.0) / 5e4 - 1.0).abs() < 1e-12);
        for bad in [Complex64::new(0.0, 3.0), Complex64::new(-1.0, 0.0), Complex64::new(f64::INFINITY, f64::NAN)] {
            assert_eq!(swr(bad, 50.0), LARGEST_SWR);
        }
        assert_eq!(swr(Complex64::new(50.0, 0.0), 50.0), 1.0);
    }

    #[test]
    fn reflection_turns_back_into_impedance() {
        let z = Complex64::new(2450.0, -310.0);
        assert!((impedance_of_reflection(reflection(z, 50.0), 50.0) - z).norm() < 1e-9 * z.norm());
    }
}
