//! Metals of wires by their conductivity at 20 °C.

use super::name::{Named, find};
use serde::Deserialize;
use std::sync::OnceLock;

/// A metal.
#[derive(Debug, Clone, PartialEq)]
pub struct Metal {
    /// Name as in the catalogue.
    pub name: String,
    /// Further names it answers to.
    pub aliases: Vec<String>,
    /// Conductivity, S/m. For clad, plated and magnetic conductors the figure that gives the right surface
    /// resistance at 1.8 to 30 MHz.
    pub conductivity_s_per_m: f64,
    /// Where the figure comes from.
    pub source: String,
}

impl Named for Metal {
    fn name(&self) -> &str {
        &self.name
    }
    fn aliases(&self) -> &[String] {
        &self.aliases
    }
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct Row {
    name: String,
    #[serde(default)]
    aliases: Vec<String>,
    conductivity_megasiemens_per_m: f64,
    source: String,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    metal: Vec<Row>,
}

fn rows() -> &'static [Metal] {
    static ROWS: OnceLock<Vec<Metal>> = OnceLock::new();
    ROWS.get_or_init(|| {
        let file: File = toml::from_str(include_str!("../../models/catalogue/metals.toml"))
            .expect("the embedded metal table is well formed, see the tests");
        file.metal
            .into_iter()
            .map(|row| Metal {
                name: row.name,
                aliases: row.aliases,
                conductivity_s_per_m: row.conductivity_megasiemens_per_m * 1e6,
                source: row.source,
            })
            .collect()
    })
}

/// The metal of that name or alias.
#[must_use]
pub fn metal(name: &str) -> Option<&'static Metal> {
    find(rows(), name)
}

/// The names of the metals, in the order of the file, aliases left out.
#[must_use]
pub fn metal_names() -> Vec<&'static str> {
    rows().iter().map(|row| row.name.as_str()).collect()
}
