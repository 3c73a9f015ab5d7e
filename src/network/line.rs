//! The inside of the coax: a lossy line from its loss points.

use crate::layout::LineData;
use crate::quantity::SPEED_OF_LIGHT_M_PER_S;
use num_complex::Complex64;
use std::f64::consts::{LN_10, PI};

/// Nepers per metre in one decibel per 100 m.
const NEPER_PER_M_IN_DB_PER_100M: f64 = LN_10 / 20.0 / 100.0;

/// Matched loss as k₁·√f + k₂·f: skin effect and dielectric.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LossFit {
    /// k₁, dB per 100 m and √Hz.
    pub skin_db_per_100m: f64,
    /// k₂, dB per 100 m and Hz.
    pub dielectric_db_per_100m: f64,
}

impl LossFit {
    /// Fits loss points (frequency Hz, dB per 100 m), by least squares of loss/√f against √f.
    ///
    /// One point is all skin effect; no usable point is no loss. Neither part may be negative: where the points ask for
    /// that, the other part alone is fitted.
    #[must_use]
    pub fn new(points: &[(f64, f64)]) -> Self {
        let usable: Vec<(f64, f64)> = points
            .iter()
            .filter(|(f, loss)| *f > 0.0 && f.is_finite() && loss.is_finite() && *loss >= 0.0)
            .map(|&(f, loss)| (f.sqrt(), loss / f.sqrt()))
            .collect();
        let count = usable.len() as f64;
        if usable.is_empty() {
            return LossFit { skin_db_per_100m: 0.0, dielectric_db_per_100m: 0.0 };
        }
        let mean_x = usable.iter().map(|p| p.0).sum::<f64>() / count;
        let mean_y = usable.iter().map(|p| p.1).sum::<f64>() / count;
        let spread: f64 = usable.iter().map(|p| (p.0 - mean_x).powi(2)).sum();
        let slope = if spread > 1e-12 * mean_x * mean_x {
            usable.iter().map(|p| (p.0 - mean_x) * (p.1 - mean_y)).sum::<f64>() / spread
        } else {
            0.0
        };
        let intercept = mean_y - slope * mean_x;
        if slope < 0.0 {
            LossFit { skin_db_per_100m: mean_y, dielectric_db_per_100m: 0.0 }
        } else if intercept < 0.0 {
            let squares: f64 = usable.iter().map(|p| p.0 * p.0).sum();
            let products: f64 = usable.iter().map(|p| p.0 * p.1).sum();
            LossFit { skin_db_per_100m: 0.0, dielectric_db_per_100m: products / squares }
        } else {
            LossFit { skin_db_per_100m: intercept, dielectric_db_per_100m: slope }
        }
    }

    /// Matched loss at a frequency, Hz: dB per 100 m.
    #[must_use]
    pub fn at(&self, frequency_hz: f64) -> f64 {
        self.skin_db_per_100m * frequency_hz.sqrt() + self.dielectric_db_per_100m * frequency_hz
    }
}

/// A kind of line, fitted.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Line {
    /// Nominal characteristic impedance, ohm.
    pub impedance_ohm: f64,
    /// Velocity factor.
    pub velocity_factor: f64,
    /// The loss.
    pub loss: LossFit,
}

/// A line at one frequency.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct LineAt {
    /// Propagation constant γ = α + jβ, 1/m.
    pub propagation_per_m: Complex64,
    /// Characteristic impedance, ohm.
    pub impedance_ohm: Complex64,
}

/// Chain matrix of a length of line: V₁ = A V₂ + B I₂, I₁ = C V₂ + D I₂, I₂ flowing out into the load.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Abcd {
    /// Ratio of voltages, far end open.
    pub a: Complex64,
    /// Transfer impedance, ohm.
    pub b_ohm: Complex64,
    /// Transfer admittance, S.
    pub c_s: Complex64,
    /// Ratio of currents, far end shorted.
    pub d: Complex64,
}

/// A loaded length of line seen from its near end.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Transfer {
    /// Input impedance, ohm.
    pub input_ohm: Complex64,
    /// Voltage at the load over voltage at the input.
    pub voltage: Complex64,
    /// Current into the load over current into the input.
    pub current: Complex64,
}

impl Line {
    /// From the data of a cable.
    #[must_use]
    pub fn new(data: &LineData) -> Self {
        Line {
            impedance_ohm: data.impedance_ohm,
            velocity_factor: data.velocity_factor,
            loss: LossFit::new(&data.loss),
        }
    }

    /// The line at a frequency, Hz, greater than zero.
    ///
    /// With α_c and α_d the skin and dielectric parts of the fitted loss in nepers per metre, β₀ = ω/v and Z₀ nominal:
    ///
    /// γ = α_c + α_d + j(β₀ + α_c),   Y' = (2α_d + jβ₀)/Z₀,   Z_c = γ/Y'
    ///
    /// Skin effect is a series resistance 2Z₀α_c with an internal reactance as large, dielectric loss a conductance
    /// 2α_d/Z₀ (transmission-line theory, to first order in loss per radian); taken this way round the matched loss is
    /// exactly the fitted one, and the line is passive for every α_d < β₀. Below about 1 MHz the metal is no longer thick
    /// against the skin depth and √f is too small a loss.
    #[must_use]
    pub fn at(&self, frequency_hz: f64) -> LineAt {
        let root = frequency_hz.sqrt();
        let skin = self.loss.skin_db_per_100m * root * NEPER_PER_M_IN_DB_PER_100M;
        let dielectric = self.loss.dielectric_db_per_100m * frequency_hz * NEPER_PER_M_IN_DB_PER_100M;
        let lossless = 2.0 * PI * frequency_hz / (self.velocity_factor * SPEED_OF_LIGHT_M_PER_S);
        let propagation_per_m = Complex64::new(skin + dielectric, lossless + skin);
        let shunt_s_per_m = Complex64::new(2.0 * dielectric, lossless) / self.impedance_ohm;
        LineAt { propagation_per_m, impedance_ohm: propagation_per_m / shunt_s_per_m }
    }
}

impl LineAt {
    /// Chain matrix of a length, m. For lengths of many hundred decibels use [`LineAt::loaded`], which cannot overflow.
    #[must_use]
    pub fn abcd(&self, length_m: f64) -> Abcd {
        let angle = self.propagation_per_m * length_m;
        let (cosh, sinh) = (angle.cosh(), angle.sinh());
        Abcd { a: cosh, b_ohm: self.impedance_ohm * sinh, c_s: sinh / self.impedance_ohm, d: cosh }
    }

    /// A length, m, closed by a load, ohm (infinite for open).
    ///
    /// By the reflected wave: Γ at the load, Γ e^{−2γl} at the input, so nothing overflows however long the line is.
    #[must_use]
    pub fn loaded(&self, length_m: f64, load_ohm: Complex64) -> Transfer {
        let one_way = (-self.propagation_per_m * length_m).exp();
        // Waves as (sum, difference) of Z and Z_c, scaled so that neither an open nor a short divides by zero.
        let (forward, backward) = if load_ohm.is_finite() {
            let size = load_ohm.norm() + self.impedance_ohm.norm();
            ((load_ohm + self.impedance_ohm) / size, (load_ohm - self.impedance_ohm) / size)
        } else {
            (Complex64::new(1.0, 0.0), Complex64::new(1.0, 0.0))
        };
        let returned = backward * one_way * one_way;
        Transfer {
            input_ohm: self.impedance_ohm * divide(forward + returned, forward - returned),
            voltage: divide(one_way * (forward + backward), forward + returned),
            current: divide(one_way * (forward - backward), forward - returned),
        }
    }

    /// Input impedance, ohm, of a length, m, closed by a load, ohm.
    #[must_use]
    pub fn input_impedance(&self, length_m: f64, load_ohm: Complex64) -> Complex64 {
        self.loaded(length_m, load_ohm).input_ohm
    }
}

/// A quotient whose divisor may be an exact zero (a lossless line exactly at resonance): then very large, not infinite.
fn divide(dividend: Complex64, divisor: Complex64) -> Complex64 {
    const SMALLEST: f64 = 1e-15;
    if divisor.norm() < SMALLEST { dividend / SMALLEST } else { dividend / divisor }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn one_point_is_all_skin_effect() {
        let fit = LossFit::new(&[(10e6, 4.6)]);
        assert_eq!(fit.dielectric_db_per_100m, 0.0);
        assert!((fit.at(10e6) - 4.6).abs() < 1e-12 && (fit.at(40e6) - 9.2).abs() < 1e-12);
        assert_eq!(LossFit::new(&[(10e6, 4.6), (10e6, 5.0)]).at(10e6), 4.8);
    }

    #[test]
    fn points_that_ask_for_a_negative_part_get_none() {
        let falling = LossFit::new(&[(10e6, 4.0), (100e6, 8.0)]);
        assert!(falling.dielectric_db_per_100m == 0.0 && falling.skin_db_per_100m > 0.0);
        let steep = LossFit::new(&[(10e6, 1.0), (100e6, 30.0)]);
        assert!(steep.skin_db_per_100m == 0.0 && steep.dielectric_db_per_100m > 0.0);
        assert_eq!(LossFit::new(&[]).at(7e6), 0.0);
        assert_eq!(LossFit::new(&[(7e6, 0.0)]).at(7e6), 0.0);
    }

    #[test]
    fn extremes_stay_finite() {
        for loss in [vec![(10e6, 0.0)], vec![(10e6, 500.0)]] {
            let line = Line::new(&LineData { impedance_ohm: 50.0, velocity_factor: 0.66, loss });
            let at = line.at(7e6);
            let quarter = 0.25 * 0.66 * SPEED_OF_LIGHT_M_PER_S / 7e6;
            for length in [0.0, quarter, 2.0 * quarter, 1e5] {
                for load in [0.0, 1e-12, 50.0, 1e12, f64::INFINITY] {
                    let t = at.loaded(length, Complex64::new(load, 0.0));
                    assert!(
                        t.input_ohm.is_finite() && t.voltage.is_finite() && t.current.is_finite(),
                        "{length} {load}"
                    );
                }
            }
        }
    }
}
