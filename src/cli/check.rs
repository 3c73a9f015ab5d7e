//! `braidwise check`.

use super::flags::StationArgs;
use super::load::{Loaded, load};
use super::stop::Stop;
use crate::layout::{Conductor, ConductorKind, Earth, Layout, PartKind};
use crate::quantity::metres_and_feet;
use crate::station;
use crate::study::earthing::{LOW_FREQUENCY_HZ, rods_alone};
use clap::Args;
use serde_json::{Value, json};
use std::fmt::Write as _;
use std::io::Write;
use std::path::PathBuf;

/// Arguments of `check`.
#[derive(Debug, Args)]
pub(super) struct Check {
    /// Station files (TOML)
    #[arg(required_unless_present = "schema")]
    files: Vec<PathBuf>,
    /// Try a value without editing the file (repeatable)
    #[arg(long = "set", value_name = "PATH=VALUE")]
    sets: Vec<String>,
    /// Print the JSON Schema of the station file, for editors that complete and check it
    #[arg(long)]
    schema: bool,
    /// One JSON document on standard output, nothing else
    #[arg(long)]
    json: bool,
}

impl Check {
    pub(super) fn run(&self) -> Result<(), Stop> {
        let mut out = std::io::stdout().lock();
        if self.schema {
            let text = serde_json::to_string_pretty(&station::schema()).map_err(|e| Stop::Could(e.to_string()))?;
            writeln!(out, "{text}")?;
            return Ok(());
        }
        let mut refused = None;
        let mut documents = Vec::new();
        for file in &self.files {
            let args = StationArgs { file: file.clone(), sets: self.sets.clone() };
            match load(&args) {
                Ok(loaded) if self.json => documents.push(as_json(file, &loaded)?),
                Ok(loaded) => write!(out, "{}", as_text(file, &loaded)?)?,
                Err(stop) => {
                    // every file is judged; the last refusal gives the exit status
                    if let Some(earlier) = refused.replace(stop) {
                        let _ = Stop::report(earlier);
                    }
                }
            }
        }
        if self.json {
            let text =
                serde_json::to_string(&json!({ "stations": documents })).map_err(|e| Stop::Could(e.to_string()))?;
            writeln!(out, "{text}")?;
        }
        refused.map_or(Ok(()), Err)
    }
}

/// Earthing resistance of each rod alone, ohm.
fn rods(layout: &Layout) -> Result<Vec<(String, f64)>, Stop> {
    Ok(rods_alone(layout)?.into_iter().map(|(name, z)| (name, z.re)).collect())
}

fn as_json(file: &std::path::Path, loaded: &Loaded) -> Result<Value, Stop> {
    let layout = &loaded.layout;
    let conductors: Vec<Value> = layout
        .conductors
        .iter()
        .map(
            |c| json!({ "name": c.name, "length_m": c.length_m(), "radius_m": c.radius_m, "protective": c.protective }),
        )
        .collect();
    let rods: Vec<Value> = rods(layout)?
        .into_iter()
        .map(|(name, ohm)| json!({ "name": name, "resistance_ohm": ohm, "frequency_hz": LOW_FREQUENCY_HZ }))
        .collect();
    let frequencies: Vec<f64> = layout.operation.frequencies.iter().map(|f| f.frequency_hz).collect();
    let variants: Vec<&String> = loaded.variants.iter().map(|(name, _)| name).collect();
    Ok(json!({
        "file": file.display().to_string(),
        "station": layout.title,
        "gap_m": layout.feed.gap_m,
        "conductors": conductors,
        "frequencies_hz": frequencies,
        "variants": variants,
        "rods": rods,
        "warnings": layout.warnings,
    }))
}

fn as_text(file: &std::path::Path, loaded: &Loaded) -> Result<String, Stop> {
    let layout = &loaded.layout;
    let mut text = String::new();
    // writing to a String cannot fail
    let _ = writeln!(text, "{}: {}", file.display(), layout.title);
    let _ = writeln!(text, "  earth       {}", earth(layout));
    for c in layout.conductors.iter().filter(|c| c.kind != ConductorKind::Body) {
        let kind = match c.kind {
            ConductorKind::Wire => "wire",
            ConductorKind::Shield => "coax",
            ConductorKind::Radial => "radial",
            ConductorKind::Rod => "rod",
            ConductorKind::Body => "case",
        };
        let note = if c.protective { ", protective" } else { "" };
        let _ = writeln!(text, "  {kind:<11} {}: {}, {:.2} mm thick{note}", c.name, lengths(c), 2e3 * c.radius_m);
    }
    let ratio = layout.feed.impedance_ratio.map_or("no transformer".to_string(), |r| format!("transformer {r}:1"));
    let _ = writeln!(text, "  feed        gap {:.1} mm, {ratio}", 1e3 * layout.feed.gap_m);
    if let Some(coax) = &layout.coax {
        let _ = writeln!(
            text,
            "  entry       at {} of {} of coax",
            metres_and_feet(coax.entry_m),
            metres_and_feet(coax.length_m)
        );
    }
    for p in &layout.parts {
        let kind = if p.kind == PartKind::Choke { "choke" } else { "inline" };
        let on = &layout.conductors[p.conductor].name;
        let _ = writeln!(text, "  {kind:<11} {}: at {} on {on}", p.name, metres_and_feet(p.at_m));
    }
    for (name, ohm) in rods(layout)? {
        let _ = writeln!(text, "  {:<11} {name}: {ohm:.1} ohm to remote earth by itself at low frequency", "earthing");
    }
    let shown: Vec<String> =
        layout.operation.frequencies.iter().map(|f| format!("{:.3}", f.frequency_hz / 1e6)).collect();
    let what = if shown.len() == 1 { "frequency" } else { "frequencies" };
    let _ = writeln!(text, "  computes    {} {what}: {} MHz", shown.len(), shown.join(", "));
    if !loaded.variants.is_empty() {
        let names: Vec<&str> = loaded.variants.iter().map(|(name, _)| name.as_str()).collect();
        let _ = writeln!(text, "  variants    {}", names.join(", "));
    }
    for w in &layout.warnings {
        let _ = writeln!(text, "  warning     {}: {}", w.about, w.message);
    }
    Ok(text)
}

/// How long a conductor is; of a rod, how deep, and what joins it to a head above the surface.
fn lengths(conductor: &Conductor) -> String {
    let length_m = conductor.length_m();
    let above_m: f64 = conductor
        .points
        .windows(2)
        .map(|leg| {
            let (low, high) = (leg[0].z.min(leg[1].z), leg[0].z.max(leg[1].z));
            let part = if high > low { ((high - low.max(0.0)) / (high - low)).clamp(0.0, 1.0) } else { 0.0 };
            part * (leg[1] - leg[0]).norm()
        })
        .sum();
    if conductor.kind == ConductorKind::Rod && above_m > 1e-6 {
        let (below, above) = (metres_and_feet(length_m - above_m), metres_and_feet(above_m));
        return format!("{below} in the earth, {above} above it");
    }
    metres_and_feet(length_m)
}

fn earth(layout: &Layout) -> String {
    match layout.earth {
        Earth::None => "none (free space)".to_string(),
        Earth::Perfect => "perfect conductor at height 0".to_string(),
        Earth::Soil(_) => {
            let highest = layout.operation.frequencies.iter().map(|f| f.frequency_hz).fold(1e6, f64::max);
            match layout.earth.at(highest) {
                crate::layout::EarthAt::Soil { permittivity, conductivity_s_per_m } => format!(
                    "soil, relative permittivity {permittivity:.1}, conductivity {:.2} mS/m at {:.2} MHz",
                    1e3 * conductivity_s_per_m,
                    highest / 1e6
                ),
                _ => "soil".to_string(),
            }
        }
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn every_line_keeps_the_column_of_labels_and_a_rod_is_as_long_as_it_is_deep() {
        let text = "
            [earth]
            kind = \"soil\"
            permittivity = 13
            conductivity = \"5 mS/m\"
            [points]
            feed = [0, 0, 3]
            head = [0, 0, 0.1]
            [[wire]]
            name = \"radiator\"
            path = [\"feed\", [0, 10, 6]]
            diameter = \"2 mm\"
            [[wire]]
            name = \"lead\"
            path = [\"feed\", \"head\"]
            diameter = \"2 mm\"
            [[rod]]
            name = \"foot rod\"
            at = \"head\"
            length = 2
            diameter = \"14 mm\"
            [feed]
            at = \"feed\"
            hot = [\"radiator\"]
            cold = [\"lead\"]
            [operation]
            frequencies = [\"7.1 MHz\"]";
        let folder = tempfile::tempdir().unwrap();
        let file = folder.path().join("m.toml");
        std::fs::write(&file, text).unwrap();
        let loaded = load(&StationArgs { file: file.clone(), sets: Vec::new() }).unwrap();
        let said = as_text(&file, &loaded).unwrap();
        assert!(said.contains("foot rod: 2 m (6 ft 7 in) in the earth, 0.1 m (4 in) above it"), "{said}");
        assert!(said.contains("computes    1 frequency: 7.100 MHz"), "{said}");
        for line in said.lines().skip(1) {
            let column: Vec<char> = line.chars().skip(12).take(3).collect();
            assert!(column[0] == ' ' || column[1] == ' ', "{line}");
            assert!(column[1] == ' ' && column[2] != ' ', "{line}");
        }
    }
}
