//! The earth at one frequency as the interaction needs it: the closed-form families, and the rest of the soil's potentials.
//!
//! Built once a frequency and soil, shared by every pair, every mesh of the same station and every study there.

use super::medium::Medium;
use crate::halfspace::{HalfSpace, HalfSpaceError, Potentials, Region};
use crate::layout::EarthAt;
use num_complex::Complex64;

/// What one family of source lines (the conductors themselves, or their images) contributes.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Weight {
    /// On the horizontal components of the vector potential.
    pub(crate) horizontal: Complex64,
    /// On the vertical component.
    pub(crate) vertical: Complex64,
    /// On the scalar potential.
    pub(crate) potential: Complex64,
}

/// A family of pairs whose kernel is a constant times e^{−jkR}/R.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Family {
    /// Which side the two elements lie on.
    pub(crate) region: Region,
    /// The second element stands for its mirror image.
    pub(crate) mirrored: bool,
    /// Wavenumber, 1/m.
    pub(crate) k: Complex64,
    /// Constants.
    pub(crate) weight: Weight,
}

/// The earth at one frequency.
#[derive(Debug, Clone)]
pub struct Surroundings {
    frequency_hz: f64,
    earth: EarthAt,
    soil: Option<SoilRest>,
}

/// What soil adds beyond the closed-form families.
#[derive(Debug, Clone)]
pub(crate) struct SoilRest {
    space: HalfSpace,
}

impl Surroundings {
    /// Prepare the earth at a frequency.
    ///
    /// # Errors
    /// [`HalfSpaceError`] for soil constants that no half-space can have.
    pub fn new(frequency_hz: f64, earth: EarthAt) -> Result<Self, HalfSpaceError> {
        let soil = match earth {
            EarthAt::Soil { permittivity, conductivity_s_per_m } => {
                Some(SoilRest { space: HalfSpace::new(frequency_hz, permittivity, conductivity_s_per_m)? })
            }
            _ => None,
        };
        Ok(Self { frequency_hz, earth, soil })
    }

    /// Hz.
    #[must_use]
    pub fn frequency_hz(&self) -> f64 {
        self.frequency_hz
    }

    /// The earth.
    #[must_use]
    pub fn earth(&self) -> EarthAt {
        self.earth
    }

    pub(crate) fn air(&self) -> Medium {
        Medium::air(self.frequency_hz)
    }

    pub(crate) fn soil(&self) -> Option<&SoilRest> {
        self.soil.as_ref()
    }

    /// Relative permittivity of what an element lies in.
    pub(crate) fn permittivity(&self, below: bool) -> Complex64 {
        match &self.soil {
            Some(soil) if below => soil.space.index_squared(),
            _ => Complex64::ONE,
        }
    }

    /// The closed-form families of this earth.
    pub(crate) fn families(&self) -> Vec<Family> {
        let one = Complex64::ONE;
        let k = self.air().k;
        let family = |region, mirrored, k, h: Complex64, v: Complex64, p: Complex64| Family {
            region,
            mirrored,
            k,
            weight: Weight { horizontal: h, vertical: v, potential: p },
        };
        let mut out = Vec::new();
        match (&self.soil, self.earth) {
            (Some(soil), _) => {
                for region in [Region::Above, Region::Below, Region::Across] {
                    let c = soil.space.image_coefficients(region);
                    let k = c.wavenumber_per_m;
                    let (d, i) = (c.direct, c.image);
                    if region == Region::Across {
                        out.push(family(region, false, k, i.xx, i.zz, i.phi));
                    } else {
                        out.push(family(region, false, k, d.xx, d.zz, d.phi));
                        out.push(family(region, true, k, i.xx, i.zz, i.phi));
                    }
                }
            }
            (None, EarthAt::Perfect) => {
                out.push(family(Region::Above, false, k, one, one, one));
                out.push(family(Region::Above, true, k, -one, one, -one));
            }
            _ => out.push(family(Region::Above, false, k, one, one, one)),
        }
        out
    }
}

impl SoilRest {
    /// Wavenumber in the soil, 1/m.
    pub(crate) fn wavenumber(&self) -> Complex64 {
        self.space.k1_per_m()
    }

    /// What is left of the four potentials beyond the families, the image of `p_rho` included, 1/m.
    pub(crate) fn rest(&self, region: Region, rho_m: f64, z_m: f64, z_source_m: f64) -> Potentials {
        let mut rest = self.space.remainder(rho_m, z_m, z_source_m);
        let c = self.space.image_coefficients(region);
        let zeta = z_m.abs() + z_source_m.abs();
        let r = rho_m.hypot(zeta);
        if r > 0.0 {
            rest.p_rho += c.image.p_rho * (-Complex64::I * c.wavenumber_per_m * r).exp() * rho_m / (r * (r + zeta));
        }
        rest
    }
}
