//! What an element does to itself alone: the metal's internal impedance.

use crate::quantity::MU_0_H_PER_M;
use num_complex::Complex64;
use std::f64::consts::PI;

/// Internal impedance of a round wire, ohm per metre: z_i = γ/(2πaσ) · I0(γa)/I1(γa), γ = √(jωμ0σ).
///
/// # Inputs
/// - `radius_m` (a), `conductivity_s_per_m` (σ), `angular_per_s` (ω): all > 0
///
/// # Source
/// Schelkunoff 1934; exact for a round wire with axially symmetric current.
#[must_use]
pub fn internal_impedance(radius_m: f64, conductivity_s_per_m: f64, angular_per_s: f64) -> Complex64 {
    let gamma = Complex64::new(0.0, angular_per_s * MU_0_H_PER_M * conductivity_s_per_m).sqrt();
    let x = gamma * radius_m;
    // the common scale factor e^{-Re x} of the scaled functions cancels in the ratio
    let ratio = match (complex_bessel::besseli_scaled(0.0, x), complex_bessel::besseli_scaled(1.0, x)) {
        (Ok(i0), Ok(i1)) if x.norm() < 700.0 => i0 / i1,
        // I0/I1 = 1 + 1/(2x) + 3/(8x²) + … (Abramowitz & Stegun 9.7.1)
        _ => 1.0 + 0.5 / x + 0.375 / (x * x) + 0.375 / (x * x * x),
    };
    gamma / (2.0 * PI * radius_m * conductivity_s_per_m) * ratio
}
