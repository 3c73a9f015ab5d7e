//! A homogeneous medium at a frequency.

use crate::quantity::{EPSILON_0_F_PER_M, MU_0_H_PER_M, SPEED_OF_LIGHT_M_PER_S};
use num_complex::Complex64;
use std::f64::consts::PI;

/// The medium the conductors of a pair lie in.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Medium {
    /// ω, 1/s.
    pub(crate) angular: f64,
    /// Wavenumber k − jα, 1/m.
    pub(crate) k: Complex64,
}

impl Medium {
    pub(crate) fn air(frequency_hz: f64) -> Self {
        let angular = 2.0 * PI * frequency_hz;
        Self { angular, k: Complex64::from(angular / SPEED_OF_LIGHT_M_PER_S) }
    }

    /// jωμ0/4π, ohm per metre.
    pub(crate) fn magnetic(&self) -> Complex64 {
        Complex64::new(0.0, self.angular * MU_0_H_PER_M / (4.0 * PI))
    }

    /// 1/(jωε0 4π), ohm metre: the scalar potential's factor; the kernels carry the relative permittivity.
    pub(crate) fn electric(&self) -> Complex64 {
        Complex64::new(0.0, self.angular * EPSILON_0_F_PER_M * 4.0 * PI).inv()
    }
}
