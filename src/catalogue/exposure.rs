//! Limits on exposure of people to radio-frequency fields and currents, as data.
//!
//! Not legal advice: national law and a measured survey decide whether a place is safe, not this program.

use serde::Deserialize;
use std::sync::OnceLock;

/// Who is exposed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum ExposedGroup {
    /// Trained people who know of the exposure ("controlled").
    Occupational,
    /// Everybody else ("uncontrolled").
    Public,
}

/// A limit that falls with frequency as `value / f^exponent`, f in MHz.
#[derive(Debug, Clone, Copy, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct PowerLaw {
    /// The limit at 1 MHz, V/m or A/m RMS.
    pub value: f64,
    /// Power of the frequency.
    pub exponent: f64,
}

impl PowerLaw {
    /// The limit at a frequency, V/m or A/m RMS.
    #[must_use]
    pub fn at(&self, frequency_hz: f64) -> f64 {
        self.value / (frequency_hz * 1e-6).powf(self.exponent)
    }
}

/// One row of a table of field limits.
#[derive(Debug, Clone, PartialEq)]
pub struct FieldLimit {
    /// The standard: "47 CFR 1.1310", "ICNIRP 2020 whole body".
    pub standard: String,
    /// For whom.
    pub group: ExposedGroup,
    /// Lowest frequency of the row, Hz.
    pub low_hz: f64,
    /// Highest frequency of the row, Hz.
    pub high_hz: f64,
    /// Electric field, V/m RMS.
    pub electric_v_per_m: PowerLaw,
    /// Magnetic field, A/m RMS.
    pub magnetic_a_per_m: PowerLaw,
    /// Averaging time, s.
    pub averaging_s: f64,
    /// Where the row comes from.
    pub source: String,
}

/// A limit on current through a person.
#[derive(Debug, Clone, PartialEq)]
pub struct CurrentLimit {
    /// The standard.
    pub standard: String,
    /// "contact" or "limb".
    pub kind: String,
    /// For whom.
    pub group: ExposedGroup,
    /// Lowest frequency, Hz.
    pub low_hz: f64,
    /// Highest frequency, Hz.
    pub high_hz: f64,
    /// Limit, A RMS.
    pub limit_a: f64,
    /// Where the row comes from.
    pub source: String,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct FieldRow {
    standard: String,
    group: ExposedGroup,
    from_mhz: f64,
    to_mhz: f64,
    electric: PowerLaw,
    magnetic: PowerLaw,
    averaging_min: f64,
    source: String,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct CurrentRow {
    standard: String,
    kind: String,
    group: ExposedGroup,
    from_mhz: f64,
    to_mhz: f64,
    limit_ma: f64,
    source: String,
}

#[derive(Debug, Deserialize)]
#[serde(deny_unknown_fields)]
struct File {
    field: Vec<FieldRow>,
    current: Vec<CurrentRow>,
}

struct Limits {
    field: Vec<FieldLimit>,
    current: Vec<CurrentLimit>,
}

fn limits() -> &'static Limits {
    static LIMITS: OnceLock<Limits> = OnceLock::new();
    LIMITS.get_or_init(|| {
        let file: File = toml::from_str(include_str!("../../models/catalogue/exposure.toml"))
            .expect("the embedded exposure table is well formed, see the tests");
        let field = file.field.into_iter().map(|row| FieldLimit {
            standard: row.standard,
            group: row.group,
            low_hz: row.from_mhz * 1e6,
            high_hz: row.to_mhz * 1e6,
            electric_v_per_m: row.electric,
            magnetic_a_per_m: row.magnetic,
            averaging_s: row.averaging_min * 60.0,
            source: row.source,
        });
        let current = file.current.into_iter().map(|row| CurrentLimit {
            standard: row.standard,
            kind: row.kind,
            group: row.group,
            low_hz: row.from_mhz * 1e6,
            high_hz: row.to_mhz * 1e6,
            limit_a: row.limit_ma * 1e-3,
            source: row.source,
        });
        Limits { field: field.collect(), current: current.collect() }
    })
}

/// Every row of the tables of field limits.
#[must_use]
pub fn field_limits() -> &'static [FieldLimit] {
    &limits().field
}

/// Every limit on contact and limb current.
#[must_use]
pub fn current_limits() -> &'static [CurrentLimit] {
    &limits().current
}

/// The names of the standards with field limits, each once.
#[must_use]
pub fn field_standards() -> Vec<&'static str> {
    let mut names: Vec<&'static str> = field_limits().iter().map(|row| row.standard.as_str()).collect();
    names.dedup();
    names
}

/// The row of a standard that holds at a frequency. At the frequency where two rows meet, the upper row.
///
/// `None` where the standard is unknown or has no limit at that frequency.
#[must_use]
pub fn field_limit_at(standard: &str, group: ExposedGroup, frequency_hz: f64) -> Option<&'static FieldLimit> {
    field_limits().iter().rev().find(|row| {
        row.standard == standard && row.group == group && (row.low_hz..=row.high_hz).contains(&frequency_hz)
    })
}
