//! The two media and the wavenumbers in them.

use crate::quantity::{EPSILON_0_F_PER_M, SPEED_OF_LIGHT_M_PER_S};
use num_complex::Complex64;
use std::f64::consts::PI;

/// Why a half space cannot be set up.
#[derive(Debug, Clone, Copy, PartialEq, thiserror::Error)]
pub enum HalfSpaceError {
    /// Frequency zero, negative, not finite.
    #[error("the frequency over soil must be a positive number of hertz, not {0}")]
    Frequency(f64),
    /// Relative permittivity below one or not finite.
    #[error("the relative permittivity of soil must be at least 1, not {0}")]
    Permittivity(f64),
    /// Conductivity negative or not finite.
    #[error("the conductivity of soil cannot be negative, got {0} S/m")]
    Conductivity(f64),
}

/// On which sides of the surface source and observer lie. A height of exactly 0 counts as above.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Region {
    /// Both in the air.
    Above,
    /// Both in the soil.
    Below,
    /// One in the air, the other in the soil.
    Across,
}

impl Region {
    /// The region of a pair of heights, metres.
    #[must_use]
    pub fn of(z_m: f64, z_source_m: f64) -> Self {
        match (z_m >= 0.0, z_source_m >= 0.0) {
            (true, true) => Self::Above,
            (false, false) => Self::Below,
            _ => Self::Across,
        }
    }
}

/// Air over a uniform lossy soil at one frequency.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct HalfSpace {
    frequency_hz: f64,
    permittivity: f64,
    conductivity_s_per_m: f64,
    n2: Complex64,
    k0: f64,
    k1: Complex64,
}

impl HalfSpace {
    /// A half space of relative `permittivity` and `conductivity_s_per_m` at `frequency_hz`.
    ///
    /// # Errors
    /// A frequency that is not positive, a permittivity under 1, a negative conductivity, or any of them not finite.
    pub fn new(frequency_hz: f64, permittivity: f64, conductivity_s_per_m: f64) -> Result<Self, HalfSpaceError> {
        if !(frequency_hz.is_finite() && frequency_hz > 0.0) {
            return Err(HalfSpaceError::Frequency(frequency_hz));
        }
        if !(permittivity.is_finite() && permittivity >= 1.0) {
            return Err(HalfSpaceError::Permittivity(permittivity));
        }
        if !(conductivity_s_per_m.is_finite() && conductivity_s_per_m >= 0.0) {
            return Err(HalfSpaceError::Conductivity(conductivity_s_per_m));
        }
        let omega = 2.0 * PI * frequency_hz;
        let n2 = Complex64::new(permittivity, -conductivity_s_per_m / (omega * EPSILON_0_F_PER_M));
        let k0 = omega / SPEED_OF_LIGHT_M_PER_S;
        Ok(Self { frequency_hz, permittivity, conductivity_s_per_m, n2, k0, k1: k0 * root(n2) })
    }

    /// The same soil, made to have a loss tangent of at least 10⁻¹²: where waves enter a lossless soil their power is the
    /// limit of a vanishing loss.
    pub(super) fn not_lossless(&self) -> Self {
        let least = 1e-12 * self.permittivity * self.omega() * EPSILON_0_F_PER_M;
        if self.conductivity_s_per_m >= least {
            return *self;
        }
        let n2 = Complex64::new(self.n2.re, -1e-12 * self.n2.re);
        Self { conductivity_s_per_m: least, n2, k1: self.k0 * root(n2), ..*self }
    }

    /// Frequency, Hz.
    #[must_use]
    pub fn frequency_hz(&self) -> f64 {
        self.frequency_hz
    }

    /// Relative permittivity of the soil (its real part).
    #[must_use]
    pub fn permittivity(&self) -> f64 {
        self.permittivity
    }

    /// Conductivity of the soil, S/m.
    #[must_use]
    pub fn conductivity_s_per_m(&self) -> f64 {
        self.conductivity_s_per_m
    }

    /// Angular frequency, rad/s.
    #[must_use]
    pub fn omega(&self) -> f64 {
        2.0 * PI * self.frequency_hz
    }

    /// Square of the soil's refractive index, ε_r − jσ/(ωε₀).
    #[must_use]
    pub fn index_squared(&self) -> Complex64 {
        self.n2
    }

    /// Wavenumber in air, 1/m.
    #[must_use]
    pub fn k0_per_m(&self) -> f64 {
        self.k0
    }

    /// Wavenumber in the soil, 1/m; its imaginary part is not positive.
    #[must_use]
    pub fn k1_per_m(&self) -> Complex64 {
        self.k1
    }

    /// Wavenumber of the medium both points lie in; that of air for a pair across the surface.
    #[must_use]
    pub fn wavenumber_per_m(&self, region: Region) -> Complex64 {
        match region {
            Region::Below => self.k1,
            Region::Above | Region::Across => Complex64::new(self.k0, 0.0),
        }
    }
}

/// Principal square root without trigonometry.
pub(super) fn root(x: Complex64) -> Complex64 {
    let size = (x.re * x.re + x.im * x.im).sqrt();
    if size == 0.0 {
        return Complex64::new(0.0, 0.0);
    }
    let half = (0.5 * (size + x.re.abs())).sqrt();
    let other = 0.5 * x.im / half;
    if x.re >= 0.0 { Complex64::new(half, other) } else { Complex64::new(other.abs(), half.copysign(x.im)) }
}

/// e^x − 1 without loss of digits near zero.
pub(super) fn exp_less_one(x: Complex64) -> Complex64 {
    let (sin, cos) = x.im.sin_cos();
    let sin_half = (0.5 * x.im).sin();
    let grown = x.re.exp_m1();
    Complex64::new(grown * cos - 2.0 * sin_half * sin_half, (grown + 1.0) * sin)
}
