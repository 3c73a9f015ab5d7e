//! Electric and magnetic field at points near the station.
//!
//! Every element is a row of current moments; the field of each moment is that of a Hertzian dipole in free space, with its image over a
//! perfect earth, and from the half-space potentials over soil.

use super::along::Solution;
use crate::halfspace::{DipoleField, HalfSpace, HalfSpaceError};
use crate::interaction::quadrature::{MAX_POINTS, gauss, legendre};
use crate::layout::{EarthAt, Point};
use crate::mesh::Mesh;
use num_complex::Complex64;

/// Field at points at or above the surface: V/m and A/m, peak phasors of the solution.
///
/// Valid outside the conductors, a few radii and more away: an element closer than its length is split until its parts are
/// shorter than their distance.
///
/// # Errors
/// [`HalfSpaceError`] for soil constants that cannot be.
pub fn near_field(
    mesh: &Mesh,
    solution: &Solution,
    frequency_hz: f64,
    earth: EarthAt,
    points: &[Point],
) -> Result<Vec<DipoleField>, HalfSpaceError> {
    // free space is the half-space without contrast
    let (permittivity, conductivity) = match earth {
        EarthAt::Soil { permittivity, conductivity_s_per_m } => (permittivity, conductivity_s_per_m),
        _ => (1.0, 0.0),
    };
    let space = HalfSpace::new(frequency_hz, permittivity, conductivity)?;
    let perfect = earth == EarthAt::Perfect;
    Ok(points.iter().map(|p| field_at(mesh, solution, &space, perfect, *p)).collect())
}

fn field_at(mesh: &Mesh, solution: &Solution, space: &HalfSpace, perfect: bool, at: Point) -> DipoleField {
    let mut sum = DipoleField { electric_v_per_m: [Complex64::ZERO; 3], magnetic_a_per_m: [Complex64::ZERO; 3] };
    for (e, current) in mesh.elements.iter().zip(&solution.currents) {
        let parts = (e.length_m / distance(e.start, e.end, at)).ceil().clamp(1.0, 400.0) as usize;
        let rule = gauss(4.min(MAX_POINTS));
        for part in 0..parts {
            for (x, w) in rule.nodes.iter().zip(&rule.weights) {
                let xi = -1.0 + (2.0 * part as f64 + 1.0 + x) / parts as f64;
                let i: Complex64 = current.iter().zip(legendre(xi)).map(|(c, p)| c * p).sum();
                let moment = i * (0.5 * w * e.length_m / parts as f64);
                let source = e.at(xi);
                let unit = [e.tangent.x, e.tangent.y, e.tangent.z];
                add(&mut sum, &space.element_field(unit, source.into(), at.into()), moment);
                if perfect {
                    let image = [-e.tangent.x, -e.tangent.y, e.tangent.z];
                    add(&mut sum, &space.element_field(image, [source.x, source.y, -source.z], at.into()), moment);
                }
            }
        }
    }
    sum
}

fn add(sum: &mut DipoleField, unit: &DipoleField, moment: Complex64) {
    for axis in 0..3 {
        sum.electric_v_per_m[axis] += unit.electric_v_per_m[axis] * moment;
        sum.magnetic_a_per_m[axis] += unit.magnetic_a_per_m[axis] * moment;
    }
}

fn distance(a: Point, b: Point, p: Point) -> f64 {
    let along = b - a;
    let t = ((p - a).dot(&along) / along.norm_squared()).clamp(0.0, 1.0);
    (a + along * t - p).norm()
}
