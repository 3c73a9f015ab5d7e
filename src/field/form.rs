//! Radiated power as a quadratic form of currents on fixed nodes, for many currents on the same lines.
//!
//! The far field of a current on a straight line is a smooth function of where on the line it flows: the current is laid on a few
//! Gauss nodes of the line (the transpose of interpolation), and the power of all nodes together is one Hermitian matrix.
//! Directions as in [`super::FarField`]: a Gauss rule in elevation, equal steps in bearing, with more points than the pattern has lobes.

use crate::interaction::Extent;
use crate::interaction::quadrature::{MAX_POINTS, gauss};
use crate::layout::{EarthAt, Point};
use crate::processor::cos_sin;
use crate::quantity::{EPSILON_0_F_PER_M, ETA_0_OHM, SPEED_OF_LIGHT_M_PER_S};
use faer::linalg::matmul::matmul;
use faer::{Accum, Mat, Par};
use num_complex::Complex64;
use std::f64::consts::PI;

/// A place where current flows, and its direction.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct CurrentNode {
    /// m.
    pub position: Point,
    /// Unit vector.
    pub tangent: Point,
}

/// All directions over one earth, for conductors within an extent.
#[derive(Debug, Clone)]
pub struct Sphere {
    k: f64,
    earth: EarthAt,
    frequency_hz: f64,
    /// Sine of the elevation with its weight.
    elevations: Vec<(f64, f64)>,
    bearings: usize,
}

impl Sphere {
    /// Directions enough for currents within an extent.
    #[must_use]
    pub fn new(frequency_hz: f64, earth: EarthAt, extent: &Extent) -> Self {
        let k = 2.0 * PI * frequency_hz / SPEED_OF_LIGHT_M_PER_S;
        let reach_m = 0.5 * extent.rho_m;
        let height_m = extent.above_m.map_or(0.0, |a| a.1);
        let lobes = k * reach_m.hypot(height_m);
        let wanted = 1.2 * lobes + 14.0;
        let bands = (wanted / MAX_POINTS as f64).ceil().max(1.0);
        let rule = gauss((wanted / bands).ceil() as usize);
        let half = (0..bands as usize).flat_map(|band| {
            let at = move |x: &f64| (band as f64 + 0.5 * (1.0 + x)) / bands;
            rule.nodes.iter().zip(&rule.weights).map(move |(x, w)| (at(x), 0.5 * w / bands))
        });
        // over an earth the reflection changes fast near the horizon: a rule in the root of the sine
        let elevations = match earth {
            EarthAt::None => half.flat_map(|(x, w)| [(x, w), (-x, w)]).collect(),
            _ => half.map(|(x, w)| (x * x, 2.0 * x * w)).collect(),
        };
        let bearings = 2 * (k * reach_m).ceil() as usize + 12;
        Self { k, earth, frequency_hz, elevations, bearings }
    }

    /// Wavenumber in the air, 1/m.
    #[must_use]
    pub fn k_per_m(&self) -> f64 {
        self.k
    }

    /// Power of peak currents times lengths (A m) at nodes, W.
    #[must_use]
    pub fn radiated_w(&self, nodes: &[CurrentNode], moments: &[Complex64]) -> f64 {
        let column = Mat::from_fn(moments.len(), 1, |i, _| moments[i]);
        self.elevations
            .iter()
            .map(|&(sin, weight)| {
                let field = self.ring(nodes, sin, weight) * &column;
                (0..field.nrows()).map(|i| field[(i, 0)].norm_sqr()).sum::<f64>()
            })
            .sum()
    }

    /// The Hermitian form of these nodes: power = mᴴ · form · m, W, for moments m in A m.
    #[must_use]
    pub fn form(&self, nodes: &[CurrentNode]) -> Mat<Complex64> {
        let n = nodes.len();
        let mut out = Mat::zeros(n, n);
        for &(sin, weight) in &self.elevations {
            let field = self.ring(nodes, sin, weight);
            matmul(out.as_mut(), Accum::Add, field.adjoint(), field.as_ref(), Complex64::ONE, Par::Seq);
        }
        out
    }

    /// Field components (θ then φ) at all bearings of one elevation, scaled so that the sum of their squares is power;
    /// shape (2 bearings, nodes).
    fn ring(&self, nodes: &[CurrentNode], sin: f64, weight: f64) -> Mat<Complex64> {
        let cos = (1.0 - sin * sin).max(0.0).sqrt();
        let step = 2.0 * PI / self.bearings as f64;
        let scale = (weight * step * ETA_0_OHM * self.k * self.k / (32.0 * PI * PI)).sqrt();
        let turns: Vec<(f64, f64)> = (0..self.bearings).map(|b| (step * b as f64).sin_cos()).collect();
        let mut out = Mat::zeros(2 * self.bearings, nodes.len());
        let (mut phase, mut re, mut im) =
            (vec![0.0; self.bearings], vec![0.0; self.bearings], vec![0.0; self.bearings]);
        for (n, node) in nodes.iter().enumerate() {
            let (p, t) = (node.position, node.tangent);
            for (value, (s, c)) in phase.iter_mut().zip(&turns) {
                *value = self.k * cos * (c * p.x + s * p.y);
            }
            cos_sin(&phase, &mut re, &mut im);
            let [along, up, across] = self.ray(sin, cos, p.z).map(|r| r * scale);
            for (b, (s, c)) in turns.iter().enumerate() {
                let wave = Complex64::new(re[b], im[b]);
                out[(b, n)] = wave * (along * (sin * (c * t.x + s * t.y)) - up * (cos * t.z));
                out[(self.bearings + b, n)] = wave * across * (c * t.y - s * t.x);
            }
        }
        out
    }

    /// How a current at height z enters the field: horizontal in the vertical plane, vertical, horizontal across. Direct and reflected
    /// ray with Fresnel's coefficients; from below the surface the transmitted ray, by reciprocity.
    fn ray(&self, sin: f64, cos: f64, z: f64) -> [Complex64; 3] {
        let direct = Complex64::from_polar(1.0, self.k * z * sin);
        let image = direct.conj();
        match self.earth {
            EarthAt::None => [direct; 3],
            EarthAt::Perfect => [direct - image, direct + image, direct - image],
            EarthAt::Soil { permittivity, conductivity_s_per_m } => {
                let loss = conductivity_s_per_m / (2.0 * PI * self.frequency_hz * EPSILON_0_F_PER_M);
                let n2 = Complex64::new(permittivity, -loss);
                let root = (n2 - cos * cos).sqrt();
                // the root whose field decays downwards
                let root = if root.im > 0.0 { -root } else { root };
                let vertical = (n2 * sin - root) / (n2 * sin + root);
                let horizontal = (sin - root) / (sin + root);
                if z >= 0.0 {
                    [direct - vertical * image, direct + vertical * image, direct + horizontal * image]
                } else {
                    let down = (Complex64::I * self.k * root * z).exp();
                    [(1.0 - vertical) * down, (1.0 + vertical) / n2 * down, (1.0 + horizontal) * down]
                }
            }
        }
    }

    /// Nodes that carry the far field of any current on a line this long, which is at most [`Sphere::longest_m`], to some 10⁻⁶:
    /// interpolation of a wave of phase ±a at n Gauss nodes errs by about aⁿ/(2ⁿ⁻¹ n!). Four at least, so that polynomials as on an
    /// element are carried too.
    #[must_use]
    pub fn nodes_for(&self, length_m: f64) -> usize {
        let half = 0.5 * self.k * length_m;
        let (mut error, mut nodes) = (2.0, 0);
        while nodes < 4 || error > 3e-7 && nodes < MAX_POINTS {
            nodes += 1;
            error *= 0.5 * half / nodes as f64;
        }
        nodes
    }

    /// Longest line that one rule of nodes serves, m: 33 nodes.
    #[must_use]
    pub fn longest_m(&self) -> f64 {
        30.0 / self.k
    }
}
