//! What the reflection-coefficient approximation would have made of each model over soil: the table in DEVELOPERS.md.
//!
//!     cargo run --release --example reflection_coefficients

use braidwise::interaction::{Extent, Interaction, Surroundings};
use braidwise::layout::{Earth, EarthAt, Layout};
use braidwise::mesh::{Density, Mesh};
use braidwise::network;
use braidwise::ports::PortModel;
use braidwise::station::{Document, Embedded};
use num_complex::Complex64;

fn main() -> Result<(), Box<dyn std::error::Error>> {
    println!("| model | MHz | feed, full solution | by reflection coefficients | off by |");
    println!("|---|---|---|---|---|");
    let mut files: Vec<_> = std::fs::read_dir("models")?.filter_map(Result::ok).map(|e| e.path()).collect();
    files.sort();
    for file in files.iter().filter(|f| f.extension().is_some_and(|e| e == "toml")) {
        let name = file.display().to_string();
        let station = Document::parse(&std::fs::read_to_string(file)?, &name)?.station(&Embedded)?;
        let layout = Layout::place(&station).map_err(|faults| format!("{name}: {faults:?}"))?;
        let buried = layout.conductors.iter().any(|c| c.points.iter().any(|p| p.z < 0.0));
        if buried || !matches!(layout.earth, Earth::Soil(_)) {
            continue;
        }
        let middle = layout.operation.frequencies.len() / 2;
        let frequency_hz = layout.operation.frequencies[middle].frequency_hz;
        let earth = layout.earth.at(frequency_hz);
        let full = feed(&layout, frequency_hz, earth, true)?;
        let approximate = feed(&layout, frequency_hz, earth, false)?;
        println!(
            "| {} | {:.2} | {:.0} {:+.0}j | {:.0} {:+.0}j | {:.0} % |",
            file.file_stem().unwrap_or_default().to_string_lossy(),
            frequency_hz / 1e6,
            full.re,
            full.im,
            approximate.re,
            approximate.im,
            100.0 * (full - approximate).norm() / full.norm()
        );
    }
    Ok(())
}

fn feed(
    layout: &Layout,
    frequency_hz: f64,
    earth: EarthAt,
    full: bool,
) -> Result<Complex64, Box<dyn std::error::Error>> {
    let interaction = Interaction::new(Mesh::new(layout, frequency_hz, Density::default(), &[]), true);
    let surroundings = if full {
        Surroundings::new(frequency_hz, earth, &Extent::of(layout))?
    } else {
        Surroundings::by_reflection_coefficients(frequency_hz, earth)?
    };
    let model = PortModel::solve(&interaction, &surroundings)?;
    let parts: Vec<Complex64> = layout.parts.iter().map(|p| network::impedance(&p.law, frequency_hz)).collect();
    Ok(model.loaded_currents(&parts)[0].inv())
}
