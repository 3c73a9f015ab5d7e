//! The far field: radiated power and gain, over free space, a perfect earth or soil.
//!
//! Radiation vector N = ∫ I t e^{jk r̂·r'} ds (Schelkunoff); the earth adds the ray reflected with Fresnel's coefficients, and for currents
//! below the surface the transmitted ray (reciprocity with a plane wave coming in). Radiation intensity
//! U = η0 k²/(32π²) (|N_θ|² + |N_φ|²) for peak currents.

use super::along::Solution;
use crate::interaction::quadrature::{MAX_POINTS, gauss, legendre};
use crate::layout::{EarthAt, Point};
use crate::mesh::Mesh;
use crate::processor::cos_sin;
use crate::quantity::{EPSILON_0_F_PER_M, ETA_0_OHM, SPEED_OF_LIGHT_M_PER_S};
use num_complex::Complex64;
use std::f64::consts::PI;

/// Current moments ready to be summed in any direction.
#[derive(Debug, Clone)]
pub struct FarField {
    k: f64,
    earth: Surface,
    /// Points about the middle of the station (height from the surface), m.
    x: Vec<f64>,
    y: Vec<f64>,
    z: Vec<f64>,
    /// I t ds at the points, A m.
    moment: Vec<[Complex64; 3]>,
    reach_m: f64,
    height_m: f64,
}

/// Gain in many directions.
#[derive(Debug, Clone)]
pub struct Pattern {
    /// Elevation above the horizon, degrees.
    pub elevation_deg: f64,
    /// Bearing from north through east, degrees.
    pub bearing_deg: f64,
    /// Gain of the θ component, dBi relative to the input power.
    pub vertical_dbi: f64,
    /// Gain of the φ component, dBi.
    pub horizontal_dbi: f64,
    /// Total gain, dBi.
    pub total_dbi: f64,
}

#[derive(Debug, Clone, Copy)]
enum Surface {
    None,
    /// Square of the refractive index; infinite for a perfect earth.
    Below(Option<Complex64>),
}

/// Factors at one elevation: direct and reflected ray for horizontal currents in the vertical plane, vertical currents, and
/// horizontal currents across.
struct Ray {
    along: Complex64,
    up: Complex64,
    across: Complex64,
}

impl FarField {
    /// Collect the moments of a solution.
    #[must_use]
    pub fn new(mesh: &Mesh, solution: &Solution, frequency_hz: f64, earth: EarthAt) -> Self {
        let k = 2.0 * PI * frequency_hz / SPEED_OF_LIGHT_M_PER_S;
        let middle = middle(mesh);
        let (mut x, mut y, mut z, mut moment) = (Vec::new(), Vec::new(), Vec::new(), Vec::new());
        let mut reach_m = 0.0_f64;
        for (e, c) in mesh.elements.iter().zip(&solution.currents) {
            let rule = gauss(if k * e.length_m < 0.1 { 2 } else { 5 });
            for (xi, w) in rule.nodes.iter().zip(&rule.weights) {
                let p = e.at(*xi) - middle;
                let i: Complex64 = c.iter().zip(legendre(*xi)).map(|(c, p)| c * p).sum();
                let m = i * (0.5 * w * e.length_m);
                x.push(p.x);
                y.push(p.y);
                z.push(p.z);
                moment.push([m * e.tangent.x, m * e.tangent.y, m * e.tangent.z]);
                reach_m = reach_m.max(p.x.hypot(p.y));
            }
        }
        let height_m = z.iter().fold(0.0_f64, |h, z| h.max(z.abs()));
        let earth = match earth {
            EarthAt::None => Surface::None,
            EarthAt::Perfect => Surface::Below(None),
            EarthAt::Soil { permittivity, conductivity_s_per_m } => {
                let loss = conductivity_s_per_m / (2.0 * PI * frequency_hz * EPSILON_0_F_PER_M);
                Surface::Below(Some(Complex64::new(permittivity, -loss)))
            }
        };
        Self { k, earth, x, y, z, moment, reach_m, height_m }
    }

    /// Power through the far sphere (the upper half where there is an earth), W, for peak currents.
    ///
    /// Gauss rule in the sine of the elevation (in its root over an earth, where reflection changes fast near the horizon), equal
    /// steps in bearing, with more points than the pattern has lobes.
    #[must_use]
    pub fn radiated_w(&self) -> f64 {
        if matches!(self.earth, Surface::None) {
            let down: f64 = self.elevations(|x| (-x, 1.0)).map(|(s, w)| w * self.ring(s, &self.earth, [1.0; 2])).sum();
            let up: f64 = self.elevations(|x| (x, 1.0)).map(|(s, w)| w * self.ring(s, &self.earth, [1.0; 2])).sum();
            return down + up;
        }
        self.elevations(|x| (x * x, 2.0 * x)).map(|(s, w)| w * self.ring(s, &self.earth, [1.0; 2])).sum()
    }

    /// Power that the plane waves leaving the currents downwards carry into the soil, W; 0 without soil.
    ///
    /// The direct far field below the horizon times 1 − |Γ|², wave by wave.
    #[must_use]
    pub fn downward_w(&self) -> f64 {
        let Surface::Below(Some(n2)) = self.earth else { return 0.0 };
        self.elevations(|x| (x * x, 2.0 * x))
            .map(|(s, w)| {
                let (vertical, horizontal) = fresnel(n2, s);
                let shares = [1.0 - vertical.norm_sqr(), 1.0 - horizontal.norm_sqr()];
                w * self.ring(-s, &Surface::None, shares)
            })
            .sum()
    }

    /// Values x of 0..1 with weights, mapped by a function to (sine of elevation, derivative).
    fn elevations(&self, map: impl Fn(f64) -> (f64, f64)) -> impl Iterator<Item = (f64, f64)> {
        let lobes = self.k * (self.reach_m.hypot(self.height_m));
        let points = ((1.2 * lobes) as usize + 14).min(MAX_POINTS);
        // a long station is cut into bands so that the rule never runs out of points
        let bands = (1.2 * lobes / 26.0).ceil().max(1.0) as usize;
        let rule = gauss(points);
        let width = 1.0 / bands as f64;
        (0..bands)
            .flat_map(move |band| {
                rule.nodes
                    .iter()
                    .zip(&rule.weights)
                    .map(move |(x, w)| (width * (band as f64 + 0.5 * (1.0 + x)), 0.5 * width * w))
            })
            .map(move |(x, w)| {
                let (s, slope) = map(x);
                (s, w * slope)
            })
    }

    /// ∫ U dφ at one elevation, the θ and φ parts each times a share.
    fn ring(&self, sin_elevation: f64, surface: &Surface, shares: [f64; 2]) -> f64 {
        let plane = self.plane(sin_elevation, surface);
        let bearings = 2 * (self.k * self.reach_m).ceil() as usize + 12;
        let step = 2.0 * PI / bearings as f64;
        (0..bearings)
            .map(|b| {
                let (n_theta, n_phi) = plane.at(self, step * b as f64);
                shares[0] * self.intensity(n_theta) + shares[1] * self.intensity(n_phi)
            })
            .sum::<f64>()
            * step
    }

    fn intensity(&self, n: Complex64) -> f64 {
        ETA_0_OHM * self.k * self.k / (32.0 * PI * PI) * n.norm_sqr()
    }

    /// Gain over an isotropic radiator fed with `input_w`, losses included.
    #[must_use]
    pub fn gain(&self, elevation_deg: f64, bearing_deg: f64, input_w: f64) -> Pattern {
        let plane = self.plane(elevation_deg.to_radians().sin(), &self.earth);
        // bearing from north through east; the field's angle runs from east through north
        let (n_theta, n_phi) = plane.at(self, (90.0 - bearing_deg).to_radians());
        let dbi = |u: f64| (10.0 * (4.0 * PI * u / input_w).max(1e-20).log10()).max(-200.0);
        let (v, h) = (self.intensity(n_theta), self.intensity(n_phi));
        Pattern { elevation_deg, bearing_deg, vertical_dbi: dbi(v), horizontal_dbi: dbi(h), total_dbi: dbi(v + h) }
    }

    fn plane(&self, sin_elevation: f64, surface: &Surface) -> Plane {
        let sin = sin_elevation.clamp(-1.0, 1.0);
        let cos = (1.0 - sin * sin).sqrt();
        let weighted = self
            .z
            .iter()
            .zip(&self.moment)
            .map(|(&z, m)| {
                let ray = self.ray(surface, sin, cos, z);
                [m[0] * ray.along, m[1] * ray.along, m[2] * ray.up, m[0] * ray.across, m[1] * ray.across]
            })
            .collect();
        Plane { sin, cos, weighted }
    }

    /// How a current at height z enters the field at an elevation.
    fn ray(&self, surface: &Surface, sin: f64, cos: f64, z: f64) -> Ray {
        let direct = Complex64::from_polar(1.0, self.k * z * sin);
        match *surface {
            Surface::None => Ray { along: direct, up: direct, across: direct },
            Surface::Below(None) => {
                let image = direct.conj();
                Ray { along: direct - image, up: direct + image, across: direct - image }
            }
            Surface::Below(Some(n2)) => {
                let (vertical, horizontal) = fresnel(n2, sin);
                let root = below(n2, cos);
                if z >= 0.0 {
                    let image = direct.conj();
                    Ray {
                        along: direct - vertical * image,
                        up: direct + vertical * image,
                        across: direct + horizontal * image,
                    }
                } else {
                    let down = (Complex64::I * self.k * root * z).exp();
                    Ray {
                        along: (1.0 - vertical) * down,
                        up: (1.0 + vertical) / n2 * down,
                        across: (1.0 + horizontal) * down,
                    }
                }
            }
        }
    }
}

/// √(n² − cos²ψ), the root whose field decays downwards.
fn below(n2: Complex64, cos: f64) -> Complex64 {
    let root = (n2 - cos * cos).sqrt();
    if root.im > 0.0 { -root } else { root }
}

/// Fresnel's reflection coefficients at an elevation: vertical (of the magnetic field) and horizontal polarisation.
fn fresnel(n2: Complex64, sin: f64) -> (Complex64, Complex64) {
    let root = below(n2, (1.0 - sin * sin).sqrt());
    ((n2 * sin - root) / (n2 * sin + root), (sin - root) / (sin + root))
}

/// All moments weighted for one elevation.
struct Plane {
    sin: f64,
    cos: f64,
    weighted: Vec<[Complex64; 5]>,
}

impl Plane {
    /// N_θ and N_φ at an angle from east.
    fn at(&self, far: &FarField, angle: f64) -> (Complex64, Complex64) {
        const CHUNK: usize = 256;
        let (s, c) = angle.sin_cos();
        let (kx, ky) = (far.k * self.cos * c, far.k * self.cos * s);
        let mut sum = [Complex64::ZERO; 5];
        let (mut phase, mut re, mut im) = ([0.0; CHUNK], [0.0; CHUNK], [0.0; CHUNK]);
        for from in (0..far.x.len()).step_by(CHUNK) {
            let n = CHUNK.min(far.x.len() - from);
            for i in 0..n {
                phase[i] = kx * far.x[from + i] + ky * far.y[from + i];
            }
            cos_sin(&phase[..n], &mut re, &mut im);
            for (i, w) in self.weighted[from..from + n].iter().enumerate() {
                let turn = Complex64::new(re[i], im[i]);
                for (total, value) in sum.iter_mut().zip(w) {
                    *total += value * turn;
                }
            }
        }
        let n_theta = self.sin * (c * sum[0] + s * sum[1]) - self.cos * sum[2];
        let n_phi = -s * sum[3] + c * sum[4];
        (n_theta, n_phi)
    }
}

/// Horizontal middle of the conductors at height 0 (in free space the height of the middle too would do; phases only).
fn middle(mesh: &Mesh) -> Point {
    let mut low = Point::repeat(f64::INFINITY);
    let mut high = Point::repeat(f64::NEG_INFINITY);
    for e in &mesh.elements {
        low = low.inf(&e.start.inf(&e.end));
        high = high.sup(&e.start.sup(&e.end));
    }
    let middle = (low + high) * 0.5;
    Point::new(middle.x, middle.y, 0.0)
}
