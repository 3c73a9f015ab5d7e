//! Amateur bands from 160 m to 10 m by ITU region.

use super::name::key;
use serde::Deserialize;
use std::sync::OnceLock;

/// A band in one region.
#[derive(Debug, Clone, PartialEq)]
pub struct Band {
    /// Name as in the catalogue: "40 m".
    pub name: String,
    /// Low edge, Hz.
    pub low_hz: f64,
    /// High edge, Hz.
    pub high_hz: f64,
    /// Where the edges come from.
    pub source: String,
}

/// A row of the data file: edges in kHz.
#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct Row {
    name: String,
    region_1: [f64; 2],
    region_2: [f64; 2],
    region_3: [f64; 2],
    source: String,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    band: Vec<Row>,
}

fn rows() -> &'static [Row] {
    static ROWS: OnceLock<Vec<Row>> = OnceLock::new();
    ROWS.get_or_init(|| {
        let file: File = toml::from_str(include_str!("../../models/catalogue/bands.toml"))
            .expect("the embedded band table is well formed, see the tests");
        file.band
    })
}

/// The band of that name in an ITU region (1, 2 or 3). "40 m", "40m", "40 metres" and "40" are one name.
///
/// `None` where the name or the region is unknown. The edges are those of the international allocation: a national
/// licence may give more or less.
#[must_use]
pub fn band(name: &str, region: u8) -> Option<Band> {
    let wanted = key(name);
    let metres = ["metres", "meters", "metre", "meter", "m", ""]
        .iter()
        .filter_map(|unit| wanted.strip_suffix(unit))
        .find(|number| !number.is_empty() && number.bytes().all(|b| b.is_ascii_digit()))?;
    let row = rows().iter().find(|row| key(&row.name).strip_suffix('m') == Some(metres))?;
    let [low_khz, high_khz] = match region {
        1 => row.region_1,
        2 => row.region_2,
        3 => row.region_3,
        _ => return None,
    };
    Some(Band { name: row.name.clone(), low_hz: low_khz * 1e3, high_hz: high_khz * 1e3, source: row.source.clone() })
}

/// The names of the bands, from the lowest to the highest.
#[must_use]
pub fn band_names() -> Vec<&'static str> {
    rows().iter().map(|row| row.name.as_str()).collect()
}
