//! What soil costs against a perfect earth: tables, fill and whole solve at about 100, 300 and 1,000 unknowns, as ratios of one run.
//! A station with conductors below the surface is compared with itself raised above a perfect earth.
//!
//!     cargo bench --bench soil

use braidwise::interaction::{Extent, Factored, Interaction, Surroundings};
use braidwise::layout::{Earth, EarthAt, Layout};
use braidwise::mesh::{Density, Mesh};
use braidwise::station::{Document, Embedded};
use std::time::Instant;

fn main() -> Result<(), Box<dyn std::error::Error>> {
    println!(
        "station                  unknowns  tables ms  solve ms  perfect ms  fill soil/perfect  solve soil/perfect, tables included"
    );
    for (name, densities) in [
        ("gauge-hut", [0.6, 2.1, 8.0]),
        ("gauge-hut-rod", [0.4, 1.4, 5.5]),
        ("reservoir-radials-buried", [0.3, 0.9, 3.2]),
    ] {
        let path = format!("models/{name}.toml");
        let station = Document::parse(&std::fs::read_to_string(&path)?, &path)?.station(&Embedded)?;
        let layout = Layout::place(&station).map_err(|faults| format!("{faults:?}"))?;
        let frequency_hz = 7.1e6;
        for factor in densities {
            let interaction = Interaction::new(Mesh::new(&layout, 28e6, Density { factor }, &[]), true);
            let (tables, soil_fill, soil) = solve(&interaction, &layout, frequency_hz, layout.earth.at(frequency_hz))?;
            let raised = raised(&layout);
            let above = Interaction::new(Mesh::new(&raised, 28e6, Density { factor }, &[]), true);
            let (_, fill, perfect) = solve(&above, &raised, frequency_hz, EarthAt::Perfect)?;
            // as for one size: fill and solve of the two meshes, which differ by a few unknowns, go with the square
            let same = (interaction.mesh().unknowns as f64 / above.mesh().unknowns as f64).powi(2);
            println!(
                "{name:24} {:8}  {:9.1}  {:8.1}  {:10.1}  {:17.2}  {:10.2}",
                interaction.mesh().unknowns,
                1e3 * tables,
                1e3 * soil,
                1e3 * perfect,
                soil_fill / (fill * same),
                soil / (perfect * same)
            );
        }
    }
    Ok(())
}

/// The station over a perfect earth, lifted so far that nothing lies below the surface.
fn raised(layout: &Layout) -> Layout {
    let lowest = layout.conductors.iter().flat_map(|c| &c.points).fold(0.0f64, |low, p| low.min(p.z));
    let mut out = Layout { earth: Earth::Perfect, ..layout.clone() };
    if lowest < 0.0 {
        out.conductors.iter_mut().flat_map(|c| &mut c.points).for_each(|p| p.z += 0.1 - lowest);
    }
    out
}

/// Best of nine: seconds for the tables, the fill, and everything with the factorisation.
fn solve(
    interaction: &Interaction,
    layout: &Layout,
    frequency_hz: f64,
    earth: EarthAt,
) -> Result<(f64, f64, f64), Box<dyn std::error::Error>> {
    let (mut tables, mut fill, mut whole) = (f64::INFINITY, f64::INFINITY, f64::INFINITY);
    for _ in 0..9 {
        let started = Instant::now();
        let surroundings = Surroundings::new(frequency_hz, earth, &Extent::of(layout))?;
        tables = tables.min(started.elapsed().as_secs_f64());
        let filling = Instant::now();
        let matrix = interaction.fill(&surroundings);
        fill = fill.min(filling.elapsed().as_secs_f64());
        std::hint::black_box(Factored::new(matrix)?);
        whole = whole.min(started.elapsed().as_secs_f64());
    }
    Ok((tables, fill, whole))
}
