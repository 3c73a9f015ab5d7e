//! Soils by what a person sees, with handbook classes and ITU-R categories as further names.

use super::name::{Named, find};
use serde::Deserialize;
use std::sync::OnceLock;

/// A soil, water or other cover of the earth, with constants for 1.8 to 30 MHz.
#[derive(Debug, Clone, PartialEq)]
pub struct Soil {
    /// Name as in the catalogue.
    pub name: String,
    /// Further names it answers to.
    pub aliases: Vec<String>,
    /// Relative permittivity.
    pub permittivity: f64,
    /// Conductivity, S/m.
    pub conductivity_s_per_m: f64,
    /// Where the figures come from.
    pub source: String,
}

impl Named for Soil {
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
    permittivity: f64,
    conductivity_millisiemens_per_m: f64,
    source: String,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    soil: Vec<Row>,
}

fn rows() -> &'static [Soil] {
    static ROWS: OnceLock<Vec<Soil>> = OnceLock::new();
    ROWS.get_or_init(|| {
        let file: File = toml::from_str(include_str!("../../models/catalogue/soils.toml"))
            .expect("the embedded soil table is well formed, see the tests");
        file.soil
            .into_iter()
            .map(|row| Soil {
                name: row.name,
                aliases: row.aliases,
                permittivity: row.permittivity,
                conductivity_s_per_m: row.conductivity_millisiemens_per_m * 1e-3,
                source: row.source,
            })
            .collect()
    })
}

/// The soil of that name or alias.
#[must_use]
pub fn soil(name: &str) -> Option<&'static Soil> {
    find(rows(), name)
}

/// The names of the soils by what is seen, in the order of the file, aliases left out.
#[must_use]
pub fn soil_names() -> Vec<&'static str> {
    rows().iter().map(|row| row.name.as_str()).collect()
}

/// Every name a soil answers to: for offering the nearest one to a misspelt name.
#[must_use]
pub fn soil_names_and_aliases() -> Vec<&'static str> {
    rows()
        .iter()
        .flat_map(|row| std::iter::once(row.name.as_str()).chain(row.aliases.iter().map(String::as_str)))
        .collect()
}
