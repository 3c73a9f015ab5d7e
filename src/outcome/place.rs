//! What `place` answers: every place of a choke × every candidate × every frequency × every variant, and the choice.
//!
//! Arrays are nested in the order their documentation names: `[variant][choke][frequency][place]` means
//! `values[variant][choke][frequency][place]`. `variants[0]` is always "nominal", the station as written.

use super::joint::LengthsOutcome;
use crate::layout::Warning;
use num_complex::Complex64;
use serde::{Deserialize, Serialize};

/// Values over `[variant][frequency]`.
pub type OverFrequency<T> = Vec<Vec<T>>;
/// Values over `[variant][choke][frequency][place]`.
pub type OverPlace<T> = Vec<Vec<Vec<Vec<T>>>>;

/// The answer of `place`. Currents and voltages are RMS magnitudes at the operating power.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct PlaceOutcome {
    /// Version of the program.
    pub braidwise: String,
    /// Title of the station.
    pub station: String,
    /// Net power into the line at the radio end, W.
    pub power_w: f64,
    /// What a place must keep.
    pub limits: LimitsOutcome,
    /// Place of the entry, m from the feed point.
    pub entry_at_m: f64,
    /// Whole length of the coax, m.
    pub coax_length_m: f64,
    /// Where other conductors are joined to the shield, m from the feed point.
    #[serde(default)]
    pub joins_m: Vec<f64>,
    /// Stretches of the coax a hand can reach, m; empty: all of it.
    #[serde(default)]
    pub reachable_m: Vec<[f64; 2]>,
    /// Names; the first is "nominal".
    pub variants: Vec<String>,
    /// The candidates.
    pub chokes: Vec<CandidateOutcome>,
    /// Hz.
    pub frequencies_hz: Vec<f64>,
    /// Band of each frequency, where it came from a band; empty or as long as `frequencies_hz`.
    #[serde(default)]
    pub bands: Vec<Option<String>>,
    /// Places along the coax from the feed point, m, ascending.
    pub places_m: Vec<f64>,
    /// The station with no choke (but those kept in).
    pub without: WithoutOutcome,
    /// Current on the shield going on into the shack, A, `[variant][choke][frequency][place]`.
    pub entry_current_a: OverPlace<f64>,
    /// Potential of the shield at the entry, V; `None` below the surface.
    pub entry_voltage_v: OverPlace<Option<f64>>,
    /// Potential of the shield where it meets the radio, V; `None` below the surface.
    pub end_voltage_v: OverPlace<Option<f64>>,
    /// Largest current within a metre of the radio end, A.
    pub last_metre_current_a: OverPlace<f64>,
    /// Impedance between hot and cold terminal, ohm.
    pub feed_ohm: OverPlace<Complex64>,
    /// Standing-wave ratio at the radio.
    pub swr: OverPlace<f64>,
    /// Power the choke turns into heat, W.
    pub choke_w: OverPlace<f64>,
    /// Voltage across the choke, V.
    pub choke_v: OverPlace<f64>,
    /// Current through the choke, A.
    pub choke_a: OverPlace<f64>,
    /// The answer in one word.
    pub verdict: PlaceVerdict,
    /// The reason in one sentence.
    pub why: String,
    /// Best first; the second is the runner-up.
    pub picks: Vec<PlacePick>,
    /// Where to clamp a current meter to verify the first pick (or, with none, the station as it is).
    #[serde(default)]
    pub clamp: Vec<ClampOutcome>,
    /// Everything doubtful.
    #[serde(default)]
    pub warnings: Vec<Warning>,
    /// The length of the coax chosen together with the place, where that was asked for.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub lengths: Option<LengthsOutcome>,
}

/// Limits a choice had to keep.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct LimitsOutcome {
    /// Largest current that may enter the shack on the shield, A RMS.
    pub entry_current_a: f64,
    /// Largest standing-wave ratio at the radio.
    pub swr: f64,
}

/// A choke that may be placed.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct CandidateOutcome {
    /// Name from the file, or its impedance as a person writes it.
    pub name: String,
    /// One a frequency, ohm.
    pub impedance_ohm: Vec<Complex64>,
}

/// The same quantities without a choke, `[variant][frequency]`.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct WithoutOutcome {
    /// A.
    pub entry_current_a: OverFrequency<f64>,
    /// V; `None` below the surface.
    pub entry_voltage_v: OverFrequency<Option<f64>>,
    /// V; `None` below the surface.
    pub end_voltage_v: OverFrequency<Option<f64>>,
    /// A.
    pub last_metre_current_a: OverFrequency<f64>,
    /// Ohm.
    pub feed_ohm: OverFrequency<Complex64>,
    /// Standing-wave ratio at the radio.
    pub swr: OverFrequency<f64>,
}

/// The answer of `place` in a word.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
pub enum PlaceVerdict {
    /// Limits are kept without any choke.
    #[serde(rename = "none needed")]
    NoneNeeded,
    /// The first pick keeps the limits.
    #[serde(rename = "place")]
    Place,
    /// Nothing does; picks are the least bad.
    #[serde(rename = "no place meets the limits")]
    NoPlace,
}

/// One choice of choke and place.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct PlacePick {
    /// Name of the candidate.
    pub choke: String,
    /// Distance from the feed point, m.
    pub at_m: f64,
    /// From where to where it may slide and still hold, m.
    pub window_m: [f64; 2],
    /// The worst case over frequencies and variants.
    pub worst: WorstCase,
    /// The reason in one sentence.
    pub why: String,
}

/// What comes closest to its limit, or furthest beyond it.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct WorstCase {
    /// Hz.
    pub frequency_hz: f64,
    /// Name of the variant.
    pub variant: String,
    /// Name of the quantity as in the arrays, with its unit ("entry_current_a", "swr").
    pub quantity: String,
    /// Its value.
    pub value: f64,
    /// Its limit.
    pub limit: f64,
}

/// Where a clamp-on meter reads something worth comparing.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct ClampOutcome {
    /// Hz.
    pub frequency_hz: f64,
    /// Along the coax from the feed point, m; never at a null.
    pub at_m: f64,
    /// Expected there, nominal station, A RMS.
    pub current_a: f64,
    /// Least and greatest over the variants, A RMS.
    pub range_a: [f64; 2],
}
