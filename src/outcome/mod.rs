//! Plain results with units in the field names: what pictures, tables, files and sheets read.
//!
//! Currents and voltages are RMS phasors at the operating power, the phase of the feed-gap voltage as reference.
//! A complex number is serialised as `[re, im]`.

pub mod curve;
pub mod cut;
pub mod joint;
pub mod pattern;
pub mod place;
pub mod vary;

use crate::layout::{BandEdge, Warning};
use num_complex::Complex64;
use serde::{Deserialize, Serialize};

/// The answer of `predict`.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct Prediction {
    /// Version of the program.
    pub braidwise: String,
    /// Title of the station.
    pub station: String,
    /// The earth as written.
    pub earth: EarthOutcome,
    /// Width of the feed gap, m.
    pub gap_m: f64,
    /// Unknowns of the mesh.
    pub unknowns: usize,
    /// Everything doubtful.
    pub warnings: Vec<Warning>,
    /// Nominal station, one entry a frequency.
    pub frequencies: Vec<FrequencyOutcome>,
    /// Where the file has variants.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub variants: Vec<VariantOutcome>,
    /// Radiation patterns, where they were asked for.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub patterns: Vec<pattern::PatternOutcome>,
}

/// One variant's results.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct VariantOutcome {
    /// Name of the variant.
    pub name: String,
    /// One entry a frequency.
    pub frequencies: Vec<FrequencyOutcome>,
}

/// The earth as the file has it.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct EarthOutcome {
    /// "none", "perfect" or "soil".
    pub kind: String,
    /// Relative permittivity, for soil given by constants.
    pub permittivity: Option<f64>,
    /// Conductivity, S/m, for soil.
    pub conductivity_s_per_m: Option<f64>,
}

/// Soil constants used at a frequency.
#[derive(Debug, Clone, Copy, Serialize, Deserialize)]
pub struct SoilOutcome {
    /// Relative permittivity.
    pub permittivity: f64,
    /// Conductivity, S/m.
    pub conductivity_s_per_m: f64,
}

/// Everything at one frequency.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct FrequencyOutcome {
    /// Hz.
    pub frequency_hz: f64,
    /// Band name, where it came from a band.
    pub band: Option<String>,
    /// Where in the band.
    pub edge: Option<BandEdge>,
    /// Soil constants at this frequency.
    pub earth: Option<SoilOutcome>,
    /// Between hot and cold terminal.
    pub feed: FeedOutcome,
    /// What the radio sees.
    pub radio: RadioOutcome,
    /// The outside of the coax.
    pub shield: Option<ShieldOutcome>,
    /// Current and voltage along every conductor.
    pub conductors: Vec<ConductorOutcome>,
    /// What leaves the shield at each join.
    pub joints: Vec<JointOutcome>,
    /// Where the power goes.
    pub power: PowerOutcome,
    /// Estimated error of the feed impedance.
    pub discretisation: DiscretisationOutcome,
}

/// The feed point.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct FeedOutcome {
    /// Ohm.
    pub resistance_ohm: f64,
    /// Ohm.
    pub reactance_ohm: f64,
    /// RMS phasor, V.
    pub voltage_v: Complex64,
    /// RMS phasor, A, out of the hot terminal.
    pub current_a: Complex64,
}

/// The radio end.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct RadioOutcome {
    /// Ohm.
    pub resistance_ohm: f64,
    /// Ohm.
    pub reactance_ohm: f64,
    /// Standing-wave ratio against the radio's impedance, at least 1.
    pub swr: f64,
}

/// How the shield ends.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum ShieldEnd {
    /// In the air.
    Open,
    /// On the radio's case.
    Body,
    /// On another conductor or the earth.
    Joined,
}

/// The outside of the shield.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct ShieldOutcome {
    /// Place of the entry, m from the feed point.
    pub entry_at_m: f64,
    /// RMS magnitude, A.
    pub entry_current_a: f64,
    /// RMS magnitude, V; `None` below the surface.
    pub entry_voltage_v: Option<f64>,
    /// How the shield ends.
    pub end: ShieldEnd,
    /// RMS magnitude, A.
    pub end_current_a: f64,
    /// RMS magnitude, V.
    pub end_voltage_v: Option<f64>,
    /// Largest within a metre of the radio end, A.
    pub last_metre_current_a: f64,
    /// Largest anywhere on the shield, A.
    pub largest_current_a: f64,
    /// Where, m.
    pub largest_at_m: f64,
    /// Largest anywhere, V.
    pub largest_voltage_v: Option<f64>,
    /// Where, m.
    pub largest_voltage_at_m: Option<f64>,
}

/// One conductor's current and voltage.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct ConductorOutcome {
    /// Name.
    pub name: String,
    /// Points from first to last.
    pub points: Vec<PointOutcome>,
}

/// Which side of a join or gap a point is on.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Side {
    /// Towards the first point of the path.
    Before,
    /// Towards the last point.
    After,
}

/// Current and voltage at a point of a conductor.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct PointOutcome {
    /// Along the conductor, m.
    pub distance_m: f64,
    /// At a join or gap.
    pub side: Option<Side>,
    /// East, north, up, m.
    pub position_m: [f64; 3],
    /// RMS phasor, A, positive from first to last point.
    pub current_a: Complex64,
    /// RMS magnitude of the scalar potential, V; `None` below the surface.
    pub voltage_v: Option<f64>,
}

/// What leaves the shield at a join.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct JointOutcome {
    /// Along the coax, m.
    pub at_m: f64,
    /// Always "coax".
    pub on: String,
    /// The conductor joined there.
    pub conductor: String,
    /// RMS magnitude flowing into that conductor, A.
    pub current_a: f64,
    /// RMS magnitude, V.
    pub voltage_v: Option<f64>,
}

/// Where the power goes.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct PowerOutcome {
    /// Net power in, W.
    pub input_w: f64,
    /// Into the far field, W.
    pub radiated_w: f64,
    /// Down through the surface, W.
    pub earth_w: f64,
    /// In the metal, shield and rods included, W.
    pub metal_w: f64,
    /// Inside the line, W.
    pub line_w: f64,
    /// In the transformer, W.
    pub transformer_w: f64,
    /// In each choke.
    pub chokes: Vec<PartOutcome>,
    /// In each inline part.
    pub inline: Vec<PartOutcome>,
    /// Input less everything else, W; `None` where earth_w is the remainder.
    pub unaccounted_w: Option<f64>,
}

/// What a lumped part carries.
#[derive(Debug, Clone, Serialize, Deserialize)]
pub struct PartOutcome {
    /// Name.
    pub name: String,
    /// Conductor.
    pub on: String,
    /// Place, m.
    pub at_m: f64,
    /// W.
    pub dissipated_w: f64,
    /// RMS magnitude, A.
    pub current_a: f64,
    /// RMS magnitude, V.
    pub voltage_v: f64,
}

/// Magnitudes of the estimated discretisation error of the feed impedance.
#[derive(Debug, Clone, Copy, Serialize, Deserialize)]
pub struct DiscretisationOutcome {
    /// Ohm.
    pub resistance_ohm: f64,
    /// Ohm.
    pub reactance_ohm: f64,
}
