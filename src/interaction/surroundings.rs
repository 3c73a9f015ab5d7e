//! The earth at one frequency as the interaction needs it: the closed-form families, and the rest of the soil's potentials.
//!
//! Built once a frequency and soil, shared by every pair, every mesh of the same station and every study there.

use super::medium::Medium;
use crate::halfspace::{
    AcrossDistances, AcrossTable, Distances, HalfSpace, HalfSpaceError, ImageCoefficients, Potentials, Region,
    SideTable,
};
use crate::layout::{EarthAt, Layout};
use crate::processor::sin_cos;
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

/// Largest error of a table times the distance from the mirror point.
const TABLE_TOLERANCE: f64 = 1e-5;
/// Least horizontal distance a table resolves where conductors reach the surface, m.
const LEAST_RHO_M: f64 = 4e-4;

/// The space a station takes up: which distances the soil's tables must cover.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Extent {
    /// Largest horizontal distance between two points, m.
    pub rho_m: f64,
    /// Lowest and highest point above the surface, m.
    pub above_m: Option<(f64, f64)>,
    /// Least and greatest depth of points below the surface, m.
    pub below_m: Option<(f64, f64)>,
}

impl Extent {
    /// The extent of a layout's conductors.
    #[must_use]
    pub fn of(layout: &Layout) -> Self {
        let points = || layout.conductors.iter().flat_map(|c| &c.points);
        let low = points().fold([f64::INFINITY; 2], |m, p| [m[0].min(p.x), m[1].min(p.y)]);
        let high = points().fold([f64::NEG_INFINITY; 2], |m, p| [m[0].max(p.x), m[1].max(p.y)]);
        let legs = || layout.conductors.iter().flat_map(|c| c.points.windows(2));
        let widen = |range: Option<(f64, f64)>, z: f64| match range {
            None => Some((z, z)),
            Some((a, b)) => Some((a.min(z), b.max(z))),
        };
        let side = |sign: f64| {
            legs()
                .filter(|leg| sign * (leg[0].z + leg[1].z) > 0.0)
                .flat_map(|leg| [leg[0].z * sign, leg[1].z * sign])
                .fold(None, |range, z| widen(range, z.max(0.0)))
        };
        Self { rho_m: (high[0] - low[0]).hypot(high[1] - low[1]), above_m: side(1.0), below_m: side(-1.0) }
    }

    /// The smallest extent that holds both.
    #[must_use]
    pub fn union(self, other: Self) -> Self {
        let join = |a: Option<(f64, f64)>, b: Option<(f64, f64)>| match (a, b) {
            (Some(a), Some(b)) => Some((a.0.min(b.0), a.1.max(b.1))),
            (a, b) => a.or(b),
        };
        Self {
            rho_m: self.rho_m.max(other.rho_m),
            above_m: join(self.above_m, other.above_m),
            below_m: join(self.below_m, other.below_m),
        }
    }

    /// Box of distances across the surface.
    fn across(&self) -> Option<AcrossDistances> {
        let (height_m, depth_m) = self.above_m.zip(self.below_m)?;
        let least_rho = if height_m.0 + depth_m.0 < LEAST_RHO_M { LEAST_RHO_M } else { 0.0 };
        Some(AcrossDistances { rho_m: (least_rho, self.rho_m.max(2.0 * LEAST_RHO_M)), height_m, depth_m })
    }

    /// Box of distances for one side of the surface.
    fn distances(&self, side: Option<(f64, f64)>) -> Option<Distances> {
        side.map(|(low, high)| {
            let least_rho = if 2.0 * low < LEAST_RHO_M { LEAST_RHO_M } else { 0.0 };
            Distances { rho_m: (least_rho, self.rho_m.max(2.0 * LEAST_RHO_M)), zeta_m: (2.0 * low, 2.0 * high) }
        })
    }
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
    pub(super) space: HalfSpace,
    pub(super) above: Option<SideTable>,
    below: Option<SideTable>,
    across: Option<AcrossTable>,
    /// The closed-form parts above, below and across.
    images: [ImageCoefficients; 3],
    /// Use reflection coefficients instead of the rest: for comparison only.
    reflected: bool,
}

impl Surroundings {
    /// Prepare the earth at a frequency; over soil, tables for all distances within the extent.
    ///
    /// # Errors
    /// [`HalfSpaceError`] for soil constants that no half-space can have.
    pub fn new(frequency_hz: f64, earth: EarthAt, extent: &Extent) -> Result<Self, HalfSpaceError> {
        let soil = match earth {
            EarthAt::Soil { permittivity, conductivity_s_per_m } => {
                let space = HalfSpace::new(frequency_hz, permittivity, conductivity_s_per_m)?;
                let above = extent.distances(extent.above_m).map(|d| SideTable::above(&space, d, TABLE_TOLERANCE));
                let below = extent.distances(extent.below_m).map(|d| SideTable::below(&space, d, TABLE_TOLERANCE));
                let across = extent.across().map(|d| AcrossTable::build(&space, d, TABLE_TOLERANCE));
                Some(SoilRest { space, above, below, across, images: images(&space), reflected: false })
            }
            _ => None,
        };
        Ok(Self { frequency_hz, earth, soil })
    }

    /// The same soil by reflection coefficients, for comparison only: what the approximation that this program does not use would give.
    ///
    /// Each spectral coefficient is taken at the specular ray, λ = k0 ρ/R', in front of e^{−jk0R'}/R' (the method of
    /// stationary phase). Good only for conductors a good part of a wavelength above the surface; none may lie below it.
    ///
    /// # Errors
    /// [`HalfSpaceError`] for soil constants that no half-space can have.
    pub fn by_reflection_coefficients(frequency_hz: f64, earth: EarthAt) -> Result<Self, HalfSpaceError> {
        let soil = match earth {
            EarthAt::Soil { permittivity, conductivity_s_per_m } => {
                let space = HalfSpace::new(frequency_hz, permittivity, conductivity_s_per_m)?;
                Some(SoilRest {
                    space,
                    above: None,
                    below: None,
                    across: None,
                    images: images(&space),
                    reflected: true,
                })
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

fn images(space: &HalfSpace) -> [ImageCoefficients; 3] {
    [Region::Above, Region::Below, Region::Across].map(|region| space.image_coefficients(region))
}

impl SoilRest {
    /// Wavenumber in the soil, 1/m.
    pub(crate) fn wavenumber(&self) -> Complex64 {
        self.space.k1_per_m()
    }

    /// Wavenumber in the air, 1/m.
    pub(crate) fn air_wavenumber(&self) -> f64 {
        self.space.k0_per_m()
    }

    /// What is left of the four potentials beyond the families at (z, z'), 1/m; with `crossed` the image of `p_rho` is included, without
    /// it `p_rho` is of no use (only vertical with horizontal currents meet it).
    #[inline(always)]
    pub(crate) fn rest<const FMA: bool>(
        &self,
        region: Region,
        rho_m: f64,
        (z_m, z_source_m): (f64, f64),
        crossed: bool,
    ) -> Potentials {
        let zeta = z_m.abs() + z_source_m.abs();
        let tabulated = match region {
            _ if self.reflected => return self.specular(rho_m, zeta),
            Region::Above => self.above.as_ref().map(|t| t.eval_inlined::<FMA>(rho_m, zeta)),
            Region::Below => self.below.as_ref().map(|t| t.eval_inlined::<FMA>(rho_m, zeta)),
            Region::Across => {
                let (height, depth) = (z_m.max(z_source_m), -z_m.min(z_source_m));
                self.across.as_ref().map(|t| t.eval(rho_m, height.max(0.0), depth.max(0.0)))
            }
        };
        let mut rest = match tabulated {
            Some([xx, zz, phi, p_rho]) => Potentials { xx, zz, phi, p_rho },
            None => self.space.remainder(rho_m, z_m, z_source_m),
        };
        let r = (rho_m * rho_m + zeta * zeta).sqrt();
        if crossed && r > 0.0 {
            let c = &self.images[region as usize];
            let k = c.wavenumber_per_m;
            let (sin, cos) = sin_cos::<FMA>(k.re * r);
            let size = rho_m / (r * (r + zeta)) * if k.im == 0.0 { 1.0 } else { (k.im * r).exp() };
            rest.p_rho += c.image.p_rho * Complex64::new(size * cos, -size * sin);
        }
        rest
    }

    /// The reflection-coefficient approximation of the rest above the surface, less the quasi-static images.
    fn specular(&self, rho_m: f64, zeta_m: f64) -> Potentials {
        let r = rho_m.hypot(zeta_m);
        let (sin, cos) = (rho_m / r, zeta_m / r);
        let k = Complex64::I * self.space.k0_per_m();
        let n2 = self.space.index_squared();
        // u0 and u1 over jk0 at the specular ray
        let (u0, u1) = (cos, (n2 - sin * sin).sqrt());
        let u1 = if u1.im > 0.0 { -u1 } else { u1 };
        let wave = (-k * r).exp() / r;
        let c = self.space.image_coefficients(Region::Above).image;
        let horizontal = (u0 - u1) / (u0 + u1);
        let charge = 2.0 * u0 / (u1 + n2 * u0) - 1.0;
        let vertical = horizontal + (n2 - 1.0) * 2.0 * u0 / (u1 + n2 * u0);
        let coupling = 2.0 * (n2 - 1.0) * u0 / ((u0 + u1) * (u1 + n2 * u0)) / k;
        Potentials {
            xx: (horizontal - c.xx) * wave,
            zz: (vertical - c.zz) * wave,
            phi: (charge - c.phi) * wave,
            p_rho: coupling * (-k * sin) * wave,
        }
    }
}
