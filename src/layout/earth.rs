//! The constants of the earth at a frequency, and what is doubtful about them there.

use super::{Earth, EarthAt, Soil, Warning};
use crate::quantity::EPSILON_0_F_PER_M;
use std::f64::consts::PI;

/// Permittivity that all the relaxations of the universal soil leave at very high frequency
/// (Longmire and Smith 1975, from memory).
const LONGMIRE_SMITH_HIGH_PERMITTIVITY: f64 = 5.0;

/// Strengths a_1 to a_13 of the relaxations of the universal soil, one a decade (Longmire and Smith, "A universal
/// impedance for soils", Defense Nuclear Agency report DNA 3788T, 1975; from memory, and checked against the
/// independently measured model of Alipio and Visacro in the tests).
const LONGMIRE_SMITH_STRENGTHS: [f64; 13] =
    [3.40e6, 2.74e5, 2.58e4, 3.38e3, 5.26e2, 1.33e2, 2.72e1, 1.25e1, 4.80, 2.17, 0.980, 0.392, 0.173];

/// Conductivity at which the relaxation frequencies of the universal soil are whole decades of hertz: soil with 10 %
/// water by volume (same source).
const LONGMIRE_SMITH_REFERENCE_S_PER_M: f64 = 8e-3;

/// Range of the measurements behind the universal soil, Hz (same source).
const LONGMIRE_SMITH_RANGE_HZ: (f64, f64) = (1e2, 2e8);

/// Low-frequency conductivities of soils with 1 and 100 % water by the universal soil's own rule
/// 8 mS/m · (percent / 10)^1.54, S/m.
const LONGMIRE_SMITH_RANGE_S_PER_M: (f64, f64) = (2.3e-4, 0.28);

/// Range of the measurements behind the model of Alipio and Visacro, Hz (from memory).
const ALIPIO_VISACRO_RANGE_HZ: (f64, f64) = (1e2, 4e6);

/// Low-frequency conductivities of the soils they measured, S/m: 60 to 18,000 ohm m (from memory).
const ALIPIO_VISACRO_RANGE_S_PER_M: (f64, f64) = (5.5e-5, 1.7e-2);

impl Earth {
    /// The earth at a frequency, Hz, greater than zero.
    ///
    /// Constants given as such hold at every frequency; the two one-figure soils follow [`Soil::at`].
    #[must_use]
    pub fn at(&self, frequency_hz: f64) -> EarthAt {
        match self {
            Earth::None => EarthAt::None,
            Earth::Perfect => EarthAt::Perfect,
            Earth::Soil(soil) => {
                let (permittivity, conductivity_s_per_m) = soil.at(frequency_hz);
                EarthAt::Soil { permittivity, conductivity_s_per_m }
            }
        }
    }

    /// What is doubtful about the earth's constants at a frequency, Hz; empty for free space and perfect earth.
    #[must_use]
    pub fn warnings_at(&self, frequency_hz: f64) -> Vec<Warning> {
        match self {
            Earth::None | Earth::Perfect => Vec::new(),
            Earth::Soil(soil) => soil.warnings_at(frequency_hz),
        }
    }
}

impl Soil {
    /// Relative permittivity and conductivity, S/m, at a frequency, Hz, greater than zero.
    ///
    /// - Constant: as given.
    /// - Longmire–Smith: ε = 5 + Σ aₙ/(1 + (f/fₙ)²), σ = σ₀ + 2πε₀ Σ aₙ fₙ (f/fₙ)²/(1 + (f/fₙ)²), with
    ///   fₙ = (125 σ₀)^0.8312 · 10^(n−1) Hz: thirteen Debye relaxations, causal by construction.
    ///   Source: Longmire and Smith 1975 (from memory).
    /// - Alipio–Visacro, mean values: σ = σ₀ + Δσ, Δσ = 1.26 σ₀^0.27 (f/1 MHz)^0.54 with both in mS/m, and
    ///   ε = 12 + tan(0.27 π) Δσ/(2πf ε₀), which is what causality gives for that Δσ.
    ///   Source: R. Alipio and S. Visacro, IEEE Trans. EMC 56(5), 2014 (from memory).
    ///
    /// # Valid
    /// Where [`Soil::warnings_at`] is empty.
    #[must_use]
    pub fn at(&self, frequency_hz: f64) -> (f64, f64) {
        match *self {
            Soil::Constant { permittivity, conductivity_s_per_m } => (permittivity, conductivity_s_per_m),
            Soil::LongmireSmith { conductivity_s_per_m } => longmire_smith(conductivity_s_per_m, frequency_hz),
            Soil::AlipioVisacro { conductivity_s_per_m } => alipio_visacro(conductivity_s_per_m, frequency_hz),
        }
    }

    /// What is doubtful about this soil's constants at a frequency, Hz.
    #[must_use]
    pub fn warnings_at(&self, frequency_hz: f64) -> Vec<Warning> {
        let (model, conductivity, range_hz, range_s_per_m) = match *self {
            Soil::Constant { .. } => return Vec::new(),
            Soil::LongmireSmith { conductivity_s_per_m } => {
                ("Longmire–Smith", conductivity_s_per_m, LONGMIRE_SMITH_RANGE_HZ, LONGMIRE_SMITH_RANGE_S_PER_M)
            }
            Soil::AlipioVisacro { conductivity_s_per_m } => {
                ("Alipio–Visacro", conductivity_s_per_m, ALIPIO_VISACRO_RANGE_HZ, ALIPIO_VISACRO_RANGE_S_PER_M)
            }
        };
        let mut messages = Vec::new();
        if !(range_hz.0..=range_hz.1).contains(&frequency_hz) {
            let mend = match self {
                Soil::AlipioVisacro { .. } => "; the Longmire–Smith soil was measured up to 200 MHz",
                _ => "; give permittivity and conductivity instead",
            };
            messages.push(format!(
                "the {model} soil was measured from {} Hz to {} MHz, so at {} MHz its constants are extrapolated and may be \
                 off by half{mend}",
                range_hz.0,
                (range_hz.1 / 1e6).round(),
                (frequency_hz / 1e3).round() / 1e3,
            ));
        }
        if !(range_s_per_m.0..=range_s_per_m.1).contains(&conductivity) {
            messages.push(format!(
                "the {model} soil was measured on soils of {} to {} mS/m; {} mS/m is outside that, so give permittivity \
                 and conductivity instead",
                (range_s_per_m.0 * 1e5).round() / 1e2,
                (range_s_per_m.1 * 1e4).round() / 1e1,
                (conductivity * 1e6).round() / 1e3,
            ));
        }
        messages.into_iter().map(|message| Warning { about: "earth".to_owned(), message }).collect()
    }
}

fn longmire_smith(low_conductivity_s_per_m: f64, frequency_hz: f64) -> (f64, f64) {
    let mut relaxation_hz = (low_conductivity_s_per_m / LONGMIRE_SMITH_REFERENCE_S_PER_M).powf(0.8312);
    let mut permittivity = LONGMIRE_SMITH_HIGH_PERMITTIVITY;
    let mut conductivity_s_per_m = low_conductivity_s_per_m;
    for strength in LONGMIRE_SMITH_STRENGTHS {
        let square = (frequency_hz / relaxation_hz).powi(2);
        permittivity += strength / (1.0 + square);
        conductivity_s_per_m += 2.0 * PI * EPSILON_0_F_PER_M * strength * relaxation_hz * square / (1.0 + square);
        relaxation_hz *= 10.0;
    }
    (permittivity, conductivity_s_per_m)
}

fn alipio_visacro(low_conductivity_s_per_m: f64, frequency_hz: f64) -> (f64, f64) {
    const POWER: f64 = 0.54;
    let low_millisiemens = low_conductivity_s_per_m * 1e3;
    let rise_s_per_m = 1.26e-3 * low_millisiemens.powf(1.0 - 0.73) * (frequency_hz * 1e-6).powf(POWER);
    let omega_epsilon = 2.0 * PI * frequency_hz * EPSILON_0_F_PER_M;
    (12.0 + (POWER * PI / 2.0).tan() * rise_s_per_m / omega_epsilon, low_conductivity_s_per_m + rise_s_per_m)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The permittivity that causality (Kramers–Kronig) makes of the conductivity, by a logarithmic sum.
    fn permittivity_by_causality(soil: Soil, frequency_hz: f64, high_permittivity: f64) -> f64 {
        // ε(f) = ε_∞ + (2/π) ∫ [σ(x) − σ(f)] / (2πε₀) · dx / (x² − f²) from 0 to infinity.
        let at_f = soil.at(frequency_hz).1;
        let steps = 40_000;
        let (low, high) = (1e-7_f64, 1e7_f64);
        let ratio = (high / low).ln() / f64::from(steps);
        let sum: f64 = (0..steps)
            .map(|i| {
                let u = low * ((f64::from(i) + 0.5) * ratio).exp();
                let rise = soil.at(u * frequency_hz).1 - at_f;
                rise / (u * u - 1.0) * u * ratio
            })
            .sum();
        high_permittivity + 2.0 / PI * sum / (2.0 * PI * EPSILON_0_F_PER_M * frequency_hz)
    }

    #[test]
    fn both_one_figure_soils_are_causal() {
        for frequency_hz in [1e5, 3e6, 14e6] {
            for (soil, high) in [
                (Soil::LongmireSmith { conductivity_s_per_m: 5e-3 }, 5.0),
                (Soil::AlipioVisacro { conductivity_s_per_m: 5e-3 }, 12.0),
            ] {
                let direct = soil.at(frequency_hz).0;
                let causal = permittivity_by_causality(soil, frequency_hz, high);
                assert!((causal / direct - 1.0).abs() < 2e-3, "{soil:?} at {frequency_hz}: {direct} {causal}");
            }
        }
    }

    #[test]
    fn the_earth_passes_its_soil_on() {
        let soil = Soil::Constant { permittivity: 13.0, conductivity_s_per_m: 5e-3 };
        assert_eq!(Earth::Soil(soil).at(7e6), EarthAt::Soil { permittivity: 13.0, conductivity_s_per_m: 5e-3 });
        assert_eq!(Earth::None.at(7e6), EarthAt::None);
        assert_eq!(Earth::Perfect.at(7e6), EarthAt::Perfect);
        assert!(Earth::Soil(soil).warnings_at(7e6).is_empty() && Earth::Perfect.warnings_at(7e6).is_empty());
    }

    #[test]
    fn warnings_stand_where_a_model_was_not_measured() {
        let alipio = Soil::AlipioVisacro { conductivity_s_per_m: 5e-3 };
        assert!(alipio.warnings_at(3.6e6).is_empty());
        let message = &alipio.warnings_at(7.1e6)[0].message;
        assert!(message.contains("4 MHz") && message.contains("7.1 MHz") && message.contains("Longmire"), "{message}");
        let smith = Soil::LongmireSmith { conductivity_s_per_m: 5e-3 };
        assert!(smith.warnings_at(28e6).is_empty());
        assert_eq!(smith.warnings_at(3e8).len(), 1);
        let message = &Soil::LongmireSmith { conductivity_s_per_m: 5.0 }.warnings_at(7e6)[0].message;
        assert!(message.contains("5000 mS/m") && message.contains("280 mS/m"), "{message}");
    }
}
