//! Coax of open standards: the shield and jacket outside, the line data inside.

use super::name::{Named, find};
use serde::Deserialize;
use std::sync::OnceLock;

/// A coaxial cable.
#[derive(Debug, Clone, PartialEq)]
pub struct Cable {
    /// Name as in the catalogue.
    pub name: String,
    /// Further names it answers to.
    pub aliases: Vec<String>,
    /// Diameter over the braid, m: the conductor of the antenna.
    pub shield_diameter_m: f64,
    /// Relative permittivity of the jacket.
    pub jacket_permittivity: f64,
    /// Thickness of the jacket, m.
    pub jacket_thickness_m: f64,
    /// Characteristic impedance, ohm.
    pub impedance_ohm: f64,
    /// Velocity inside over that of light.
    pub velocity_factor: f64,
    /// Loss points: (frequency Hz, dB per 100 m), rising frequency.
    pub loss: Vec<(f64, f64)>,
    /// Where the figures come from.
    pub source: String,
}

impl Named for Cable {
    fn name(&self) -> &str {
        &self.name
    }
    fn aliases(&self) -> &[String] {
        &self.aliases
    }
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct LossRow {
    at_mhz: f64,
    db_per_100m: f64,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct Row {
    name: String,
    #[serde(default)]
    aliases: Vec<String>,
    shield_diameter_mm: f64,
    jacket_diameter_mm: f64,
    jacket_permittivity: f64,
    impedance_ohm: f64,
    velocity_factor: f64,
    loss: Vec<LossRow>,
    source: String,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    cable: Vec<Row>,
}

impl From<Row> for Cable {
    fn from(row: Row) -> Self {
        Cable {
            shield_diameter_m: row.shield_diameter_mm * 1e-3,
            jacket_permittivity: row.jacket_permittivity,
            jacket_thickness_m: (row.jacket_diameter_mm - row.shield_diameter_mm) * 0.5e-3,
            impedance_ohm: row.impedance_ohm,
            velocity_factor: row.velocity_factor,
            loss: row.loss.iter().map(|p| (p.at_mhz * 1e6, p.db_per_100m)).collect(),
            name: row.name,
            aliases: row.aliases,
            source: row.source,
        }
    }
}

fn rows() -> &'static [Cable] {
    static ROWS: OnceLock<Vec<Cable>> = OnceLock::new();
    ROWS.get_or_init(|| {
        let file: File = toml::from_str(include_str!("../../models/catalogue/cables.toml"))
            .expect("the embedded cable table is well formed, see the tests");
        file.cable.into_iter().map(Cable::from).collect()
    })
}

/// The cable of that name or alias.
#[must_use]
pub fn cable(name: &str) -> Option<&'static Cable> {
    find(rows(), name)
}

/// The names of the cables, in the order of the file, aliases left out.
#[must_use]
pub fn cable_names() -> Vec<&'static str> {
    rows().iter().map(|row| row.name.as_str()).collect()
}
