//! A rod, or anything buried, alone: its impedance to remote earth.

use super::Failure;
use crate::interaction::{Extent, Factored, Interaction, Surroundings};
use crate::layout::{Conductor, ConductorKind, EarthAt, Feed, Junction, Layout, Limits, Operation, Point, Radio};
use crate::mesh::{Density, Mesh};
use faer::Mat;
use num_complex::Complex64;

/// Frequency for the resistance that an earth tester reads, Hz: low enough that only conduction is left.
pub const LOW_FREQUENCY_HZ: f64 = 1e3;

/// Impedance to remote earth, ohm, of conductors below the surface when a current enters at one end of one of them.
///
/// The current is brought from remote earth by a lead that does nothing else; the voltage is the scalar potential of the end against zero at
/// infinity. Galerkin: the end's own basis function has a current there, and its row of Z·I is that potential, so the answer
/// is 1/(Z⁻¹)_ee. At low frequency its real part is the earthing resistance; the imaginary part depends on where the lead runs.
///
/// # Inputs
/// - `conductors`, `junctions`: everything buried and how it is joined; the junction named by `entry` may be among them
/// - `entry`: (conductor, vertex) where the current enters
/// - `earth`: soil constants at the frequency
///
/// # Errors
/// [`Failure`] for soil constants that cannot be, or a singular matrix.
pub fn impedance_to_remote_earth(
    conductors: Vec<Conductor>,
    junctions: Vec<Junction>,
    entry: (usize, usize),
    frequency_hz: f64,
    earth: EarthAt,
) -> Result<Complex64, Failure> {
    let layout = buried(conductors, junctions, entry, earth);
    let mesh = Mesh::new(&layout, frequency_hz.max(1e6), Density::default(), &[]);
    let entering = entering_unknowns(&mesh, &layout, entry);
    let interaction = Interaction::new(mesh, true);
    let surroundings = Surroundings::new(frequency_hz, earth, &Extent::of(&layout))?;
    let factored =
        Factored::new(interaction.fill(&surroundings)).map_err(|source| Failure::Singular { frequency_hz, source })?;
    let mut solution: Mat<Complex64> = Mat::zeros(factored.unknowns(), 1);
    for &k in &entering {
        solution[(k, 0)] = Complex64::ONE;
    }
    factored.solve_in_place(&mut solution);
    let current: Complex64 = entering.iter().map(|&k| solution[(k, 0)]).sum();
    Ok(current.inv())
}

/// Impedance to remote earth of each rod of a station over soil, ohm, at [`LOW_FREQUENCY_HZ`]: (name, impedance).
///
/// # Errors
/// As [`impedance_to_remote_earth`].
pub fn rods_alone(layout: &Layout) -> Result<Vec<(String, Complex64)>, Failure> {
    let earth = layout.earth.at(LOW_FREQUENCY_HZ);
    if !matches!(earth, EarthAt::Soil { .. }) {
        return Ok(Vec::new());
    }
    layout
        .conductors
        .iter()
        .filter(|c| c.kind == ConductorKind::Rod)
        .map(|c| {
            let points: Vec<Point> = c.points.iter().copied().filter(|p| p.z <= 0.0).collect();
            let top = if points.first().is_some_and(|p| p.z == 0.0) { 0 } else { points.len() - 1 };
            let rod = Conductor { points, ..c.clone() };
            let z = impedance_to_remote_earth(vec![rod], Vec::new(), (0, top), LOW_FREQUENCY_HZ, earth)?;
            Ok((c.name.clone(), z))
        })
        .collect()
}

fn buried(conductors: Vec<Conductor>, junctions: Vec<Junction>, entry: (usize, usize), earth: EarthAt) -> Layout {
    use crate::layout::{Earth, Soil};
    let position = conductors[entry.0].points[entry.1];
    let mut junctions = junctions;
    match junctions.iter_mut().find(|j| j.members.contains(&entry)) {
        // here `to_earth` says that current may leave the conductors: it enters from the lead
        Some(junction) => junction.to_earth = true,
        None => junctions.push(Junction { position, members: vec![entry], to_earth: true }),
    }
    let earth = match earth {
        EarthAt::Soil { permittivity, conductivity_s_per_m } => {
            Earth::Soil(Soil::Constant { permittivity, conductivity_s_per_m })
        }
        EarthAt::Perfect => Earth::Perfect,
        EarthAt::None => Earth::None,
    };
    Layout {
        title: String::new(),
        earth,
        conductors,
        junctions,
        feed: Feed {
            position,
            hot: Vec::new(),
            cold: Vec::new(),
            cold_is_earth: false,
            gap_m: 0.0,
            impedance_ratio: None,
        },
        coax: None,
        parts: Vec::new(),
        radio: Radio { impedance_ohm: 50.0, body: None },
        operation: Operation { power_w: 1.0, frequencies: Vec::new() },
        limits: Limits { entry_current_a: 0.0, swr: 1.0 },
        warnings: Vec::new(),
    }
}

/// The unknowns that are currents out of the entry.
fn entering_unknowns(mesh: &Mesh, layout: &Layout, entry: (usize, usize)) -> Vec<usize> {
    let position = layout.conductors[entry.0].points[entry.1];
    let mut out: Vec<usize> = mesh
        .elements
        .iter()
        .flat_map(|e| {
            let start = (e.start == position).then_some(&e.start_current);
            let end = (e.end == position).then_some(&e.end_current);
            start.into_iter().chain(end).flatten().map(|(k, _)| *k)
        })
        .collect();
    out.sort_unstable();
    out.dedup();
    out
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn a_rod_reads_what_an_independent_solution_has() {
        // 1.5 m, radius 7 mm, εr 13, 5 mS/m at 10 kHz: 120.72 ohm (independent solution, no published source)
        let rod = Conductor {
            name: "rod".into(),
            kind: ConductorKind::Rod,
            points: vec![Point::zeros(), Point::new(0.0, 0.0, -1.5)],
            radius_m: 0.007,
            conductivity_s_per_m: None,
            jacket: None,
            protective: false,
        };
        let earth = EarthAt::Soil { permittivity: 13.0, conductivity_s_per_m: 5e-3 };
        let z = impedance_to_remote_earth(vec![rod.clone()], Vec::new(), (0, 0), 1e4, earth).unwrap();
        assert!((z.re / 120.724 - 1.0).abs() < 0.01, "{z}");
        let dry = EarthAt::Soil { permittivity: 13.0, conductivity_s_per_m: 1e-3 };
        let z = impedance_to_remote_earth(vec![rod], Vec::new(), (0, 0), 1e4, dry).unwrap();
        assert!((z.re / 603.6 - 1.0).abs() < 0.02, "resistance goes as resistivity: {z}");
    }
}
