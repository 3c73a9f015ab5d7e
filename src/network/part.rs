//! The impedance of a choke or inline part at a frequency.

use crate::layout::PartLaw;
use num_complex::Complex64;
use std::f64::consts::PI;

/// Smallest admittance told apart, S: a lossless parallel circuit exactly at its resonance is taken to have this.
const SMALLEST_S: f64 = 1e-12;

/// Impedance of a part, ohm, at a frequency, Hz, greater than zero. Always finite.
///
/// Elements in series add R + jωL + 1/(jωC); in parallel 1/(1/R + 1/(jωL) + jωC). An element not given is left out; with
/// none at all the part is a plain connection (0 ohm).
#[must_use]
pub fn impedance(law: &PartLaw, frequency_hz: f64) -> Complex64 {
    let omega = 2.0 * PI * frequency_hz;
    match *law {
        PartLaw::Fixed { resistance_ohm, reactance_ohm } => Complex64::new(resistance_ohm, reactance_ohm),
        PartLaw::ParallelResonant { resistance_ohm, inductance_h, capacitance_f } => {
            in_parallel(Some(resistance_ohm), Some(inductance_h), Some(capacitance_f), omega)
        }
        PartLaw::Elements { resistance_ohm, inductance_h, capacitance_f, in_series: true } => {
            let capacitive = capacitance_f.map_or(0.0, |c| -1.0 / (omega * c).max(SMALLEST_S));
            Complex64::new(resistance_ohm.unwrap_or(0.0), inductance_h.unwrap_or(0.0) * omega + capacitive)
        }
        PartLaw::Elements { resistance_ohm: None, inductance_h: None, capacitance_f: None, in_series: false } => {
            Complex64::new(0.0, 0.0)
        }
        PartLaw::Elements { resistance_ohm, inductance_h, capacitance_f, in_series: false } => {
            in_parallel(resistance_ohm, inductance_h, capacitance_f, omega)
        }
    }
}

/// Admittance of a part, S, at a frequency, Hz; infinite (real) for a plain connection.
#[must_use]
pub fn admittance(law: &PartLaw, frequency_hz: f64) -> Complex64 {
    let z = impedance(law, frequency_hz);
    if z == Complex64::new(0.0, 0.0) { Complex64::new(f64::INFINITY, 0.0) } else { z.inv() }
}

fn in_parallel(
    resistance_ohm: Option<f64>,
    inductance_h: Option<f64>,
    capacitance_f: Option<f64>,
    omega: f64,
) -> Complex64 {
    // An element of zero ohm shorts the rest.
    if resistance_ohm == Some(0.0) || inductance_h == Some(0.0) {
        return Complex64::new(0.0, 0.0);
    }
    let conductance = resistance_ohm.map_or(0.0, |r| 1.0 / r);
    let susceptance = capacitance_f.map_or(0.0, |c| omega * c) - inductance_h.map_or(0.0, |l| 1.0 / (omega * l));
    let y = Complex64::new(conductance, susceptance);
    if y.norm() < SMALLEST_S { Complex64::new(1.0 / SMALLEST_S, 0.0) } else { y.inv() }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn elements(r: Option<f64>, l: Option<f64>, c: Option<f64>, in_series: bool) -> PartLaw {
        PartLaw::Elements { resistance_ohm: r, inductance_h: l, capacitance_f: c, in_series }
    }

    #[test]
    fn a_coil_is_positive_and_a_capacitor_negative() {
        let coil = impedance(&elements(None, Some(34e-6), None, true), 3.65e6);
        assert!((coil - Complex64::new(0.0, 2.0 * PI * 3.65e6 * 34e-6)).norm() < 1e-9);
        let capacitor = impedance(&elements(None, None, Some(100e-12), true), 7e6);
        assert!((capacitor.im + 1.0 / (2.0 * PI * 7e6 * 100e-12)).abs() < 1e-9 && capacitor.re == 0.0);
        assert_eq!(impedance(&elements(None, None, Some(100e-12), false), 7e6).im, capacitor.im);
    }

    #[test]
    fn a_trap_at_resonance_is_its_resistance() {
        let (l, c) = (4e-6, 126e-12);
        let resonance = 1.0 / (2.0 * PI * f64::sqrt(l * c));
        let law = PartLaw::ParallelResonant { resistance_ohm: 20e3, inductance_h: l, capacitance_f: c };
        assert!((impedance(&law, resonance) - 20e3).norm() < 1e-6);
        assert!(impedance(&law, 0.9 * resonance).im > 0.0 && impedance(&law, 1.1 * resonance).im < 0.0);
    }

    #[test]
    fn nothing_is_infinite_or_not_a_number() {
        for in_series in [true, false] {
            for law in [
                elements(None, None, None, in_series),
                elements(Some(0.0), Some(0.0), Some(0.0), in_series),
                elements(None, Some(1.0), Some(1.0 / (4.0 * PI * PI * 1e12)), in_series),
            ] {
                assert!(impedance(&law, 1e6).is_finite(), "{law:?}");
            }
        }
        assert_eq!(impedance(&elements(None, None, None, false), 1e6).norm(), 0.0);
        assert!(admittance(&elements(None, None, None, true), 1e6).re.is_infinite());
    }
}
