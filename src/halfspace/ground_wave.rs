//! The field of a short vertical along the surface, from the exact integrals over a flat earth.

use super::soil::HalfSpace;
use crate::quantity::{EPSILON_0_F_PER_M, ETA_0_OHM};
use num_complex::Complex64;
use std::f64::consts::PI;

impl HalfSpace {
    /// Vertical electric field at the surface of a vertical element at the surface `distance_m` away, over what it would
    /// be on a perfect conductor: the attenuation function, Norton's F where his approximations hold.
    ///
    /// A flat earth; 47 CFR 73.184 takes curves of this kind as usable to 80/∛(f in MHz) kilometres.
    #[must_use]
    pub fn ground_wave_attenuation(&self, distance_m: f64) -> Complex64 {
        let field = self.element_field([0.0, 0.0, 1.0], [0.0; 3], [distance_m, 0.0, 0.0]);
        let jkr = Complex64::i() * self.k0_per_m() * distance_m;
        let charge = 4.0 * PI * EPSILON_0_F_PER_M * Complex64::i() * self.omega();
        let perfect = -2.0 * (jkr * jkr + jkr + 1.0) * (-jkr).exp() / (distance_m.powi(3) * charge);
        field.electric_v_per_m[2] / perfect
    }

    /// RMS vertical field at the surface, V/m, of a short vertical with an effective monopole-radiated power of
    /// `power_w` (that which on a perfect earth would give √(3ηP/4π)/d, 300 V of cymomotive force for 1 kW; ITU-R
    /// BS.561, P.368).
    #[must_use]
    pub fn ground_wave_v_per_m(&self, distance_m: f64, power_w: f64) -> f64 {
        let force_v = (3.0 * ETA_0_OHM * power_w / (4.0 * PI)).sqrt();
        self.ground_wave_attenuation(distance_m).norm() * force_v / distance_m
    }
}
