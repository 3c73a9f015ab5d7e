//! Current and voltage along conductors, and what the metal takes.

use crate::interaction::quadrature::legendre;
use crate::interaction::{Legendre, internal_impedance};
use crate::layout::{Layout, Point};
use crate::mesh::{Element, Mesh};
use num_complex::Complex64;
use std::f64::consts::PI;

/// Solved currents on every element.
#[derive(Debug, Clone)]
pub struct Solution {
    /// Legendre coefficients of the current of each element, A (peak phasors).
    pub currents: Vec<Legendre>,
}

/// Current and potential at a place of a conductor.
#[derive(Debug, Clone, Copy)]
pub struct Sample {
    /// Along the conductor, m.
    pub distance_m: f64,
    /// `Some(false)`: the side before a join, `Some(true)`: after, `None`: elsewhere.
    pub after: Option<bool>,
    /// Where, m.
    pub position: Point,
    /// A, peak phasor, positive towards the conductor's last point.
    pub current_a: Complex64,
    /// V, peak phasor; `None` below the surface.
    pub potential_v: Option<Complex64>,
}

impl Solution {
    /// From the unknowns of a mesh.
    #[must_use]
    pub fn new(mesh: &Mesh, unknowns: &[Complex64]) -> Self {
        Self { currents: mesh.elements.iter().map(|e| e.legendre_current(unknowns)).collect() }
    }

    /// All currents times a factor.
    #[must_use]
    pub fn scaled(&self, factor: Complex64) -> Self {
        Self { currents: self.currents.iter().map(|c| c.map(|x| x * factor)).collect() }
    }

    /// Power lost in the metal of all elements, W: ½ Σ Re z_i ∫ |I|² ds.
    #[must_use]
    pub fn metal_w(&self, mesh: &Mesh, frequency_hz: f64) -> f64 {
        mesh.elements.iter().zip(&self.currents).map(|(e, c)| metal_of(e, c, frequency_hz)).sum()
    }

    /// Current at ξ of an element, A.
    #[must_use]
    pub fn current_at(&self, element: usize, xi: f64) -> Complex64 {
        series(&self.currents[element], xi)
    }

    /// Samples along a conductor: at most `step_m` apart, with both ends, every vertex, every join twice and both edges of every gap.
    ///
    /// # Inputs
    /// - `potentials`: Legendre coefficients of the potential of every element, V
    #[must_use]
    pub fn along(
        &self,
        layout: &Layout,
        mesh: &Mesh,
        conductor: usize,
        potentials: &[Legendre],
        step_m: f64,
    ) -> Vec<Sample> {
        let joins = joins(layout, conductor);
        let range = mesh.conductor_elements[conductor].clone();
        let mut out = Vec::new();
        for k in range.clone() {
            let e = &mesh.elements[k];
            let sample = |xi: f64, after: Option<bool>| Sample {
                distance_m: if xi >= 1.0 { e.to_m } else { e.from_m + 0.5 * (1.0 + xi) * e.length_m },
                after,
                position: e.at(xi),
                current_a: series(&self.currents[k], xi),
                potential_v: (!e.below).then(|| series(&potentials[k], xi)),
            };
            let is_join = |x: f64| joins.iter().any(|s| (s - x).abs() < 1e-9 * (1.0 + x));
            if k == range.start || is_join(e.from_m) {
                out.push(sample(-1.0, is_join(e.from_m).then_some(true)));
            }
            let steps = (e.length_m / step_m).ceil().max(1.0) as usize;
            for n in 1..steps {
                out.push(sample(-1.0 + 2.0 * n as f64 / steps as f64, None));
            }
            out.push(sample(1.0, is_join(e.to_m).then_some(false)));
        }
        out
    }
}

fn series(c: &Legendre, xi: f64) -> Complex64 {
    c.iter().zip(legendre(xi)).map(|(c, p)| c * p).sum()
}

fn metal_of(e: &Element, c: &Legendre, frequency_hz: f64) -> f64 {
    let Some(sigma) = e.conductivity_s_per_m else { return 0.0 };
    let z = internal_impedance(e.radius_m, sigma, 2.0 * PI * frequency_hz);
    let square: f64 = c.iter().enumerate().map(|(a, c)| c.norm_sqr() / (2.0 * a as f64 + 1.0)).sum();
    0.5 * z.re * e.length_m * square
}

/// Distances on a conductor where other conductors join it.
fn joins(layout: &Layout, conductor: usize) -> Vec<f64> {
    let at = layout.conductors[conductor].distances_m();
    layout.junctions.iter().flat_map(|j| j.members.iter().filter(|m| m.0 == conductor).map(|m| at[m.1])).collect()
}
