//! Takes text; gives SI numbers or a [`Misread`] that says what to write. And back: numbers as people read them.
//!
//! Constants with their origin, and quantities as a person writes them ("41 ft", "2.45 kohm").

/// Speed of light in vacuum, m/s (exact, SI definition).
pub const SPEED_OF_LIGHT_M_PER_S: f64 = 299_792_458.0;
/// Vacuum permeability, H/m (4π·10⁻⁷; the 2019 SI value differs by less than 2·10⁻¹⁰).
pub const MU_0_H_PER_M: f64 = 4.0e-7 * std::f64::consts::PI;
/// Vacuum permittivity, F/m, from the two above.
pub const EPSILON_0_F_PER_M: f64 = 1.0 / (MU_0_H_PER_M * SPEED_OF_LIGHT_M_PER_S * SPEED_OF_LIGHT_M_PER_S);
/// Wave impedance of free space, ohm.
pub const ETA_0_OHM: f64 = MU_0_H_PER_M * SPEED_OF_LIGHT_M_PER_S;

mod parse;
mod show;

pub use parse::{
    Misread, capacitance_f, conductivity_s_per_m, current_a, decibel, degrees, fraction, frequency_hz, inductance_h,
    length_m, power_w, ratio, resistance_ohm, wire_diameter_m,
};
pub use show::{METRES_PER_FOOT, engineering, feet_and_inches, metres, metres_and_feet};
