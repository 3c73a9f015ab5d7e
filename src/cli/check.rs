//! `braidwise check`.

use super::flags::StationArgs;
use super::load::{Loaded, load};
use super::stop::Stop;
use crate::layout::{ConductorKind, Earth, Layout, PartKind};
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
        let _ = writeln!(
            text,
            "  {kind:<11} {}: {}, {:.2} mm thick{note}",
            c.name,
            metres_and_feet(c.length_m()),
            2e3 * c.radius_m
        );
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
        let _ = writeln!(text, "  {name}: {ohm:.1} ohm to remote earth by itself at low frequency");
    }
    let shown: Vec<String> =
        layout.operation.frequencies.iter().map(|f| format!("{:.3}", f.frequency_hz / 1e6)).collect();
    let _ = writeln!(text, "  computes    {} frequencies: {} MHz", shown.len(), shown.join(", "));
    if !loaded.variants.is_empty() {
        let names: Vec<&str> = loaded.variants.iter().map(|(name, _)| name.as_str()).collect();
        let _ = writeln!(text, "  variants    {}", names.join(", "));
    }
    for w in &layout.warnings {
        let _ = writeln!(text, "  warning     {}: {}", w.about, w.message);
    }
    Ok(text)
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
