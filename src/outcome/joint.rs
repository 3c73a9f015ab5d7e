//! What `place` answers when the length of the coax is free too: every length × every place × every choke × every frequency.
//!
//! Values are the worst over the variants, `[choke][frequency][length][place]`; `None` where a place lies beyond the end or has
//! no room. Chokes, frequencies, limits and variants are those of the [`super::place::PlaceOutcome`] it belongs to.

use super::place::{PlaceVerdict, WorstCase};
use crate::layout::Warning;
use serde::{Deserialize, Serialize};

/// Values over `[choke][frequency][length][place]`.
pub type OverLengthAndPlace = Vec<Vec<Vec<Vec<Option<f64>>>>>;
/// Values over `[frequency][length]`.
pub type OverFrequencyAndLength = Vec<Vec<Option<f64>>>;

/// Length of the coax and place of a choke chosen together. Currents and voltages are RMS magnitudes at the operating power.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct LengthsOutcome {
    /// Which end moves, in words.
    pub moving_end: String,
    /// Length in the file, m.
    pub present_length_m: f64,
    /// Lengths of the coax that can be built, m, ascending.
    pub lengths_m: Vec<f64>,
    /// Places along the coax from the feed point, m, ascending, of all lengths.
    pub places_m: Vec<f64>,
    /// Names of the chokes.
    pub chokes: Vec<String>,
    /// The station with no choke (but those kept in).
    pub without: LengthsWithoutOutcome,
    /// Voltage of the shield at the radio that a choke may not exceed, V, one a length.
    pub end_voltage_limit_v: Vec<f64>,
    /// Current on the shield going on into the shack, A.
    pub entry_current_a: OverLengthAndPlace,
    /// Largest current within a metre of the radio end, A.
    pub last_metre_current_a: OverLengthAndPlace,
    /// Potential of the shield where it meets the radio, V; `None` below the surface too.
    pub end_voltage_v: OverLengthAndPlace,
    /// Standing-wave ratio at the radio.
    pub swr: OverLengthAndPlace,
    /// Power the choke turns into heat, W.
    pub choke_w: OverLengthAndPlace,
    /// Lengths that keep the limits without a choke, m.
    pub none_needed_at_m: Vec<f64>,
    /// The answer in one word.
    pub verdict: PlaceVerdict,
    /// The reason in one sentence.
    pub why: String,
    /// Best first; the second is the runner-up.
    pub picks: Vec<LengthPick>,
    /// Everything doubtful about the lengths.
    #[serde(default)]
    pub warnings: Vec<Warning>,
}

/// The same quantities without a choke, worst over the variants, `[frequency][length]`.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct LengthsWithoutOutcome {
    /// A.
    pub entry_current_a: OverFrequencyAndLength,
    /// A.
    pub last_metre_current_a: OverFrequencyAndLength,
    /// V; `None` below the surface.
    pub end_voltage_v: OverFrequencyAndLength,
    /// Standing-wave ratio at the radio.
    pub swr: OverFrequencyAndLength,
}

/// One choice of choke, length of the coax and place.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct LengthPick {
    /// Name of the candidate.
    pub choke: String,
    /// Of the coax, m.
    pub length_m: f64,
    /// From which to which length it holds with the choke at this place, m.
    pub length_window_m: [f64; 2],
    /// Distance of the choke from the feed point, m.
    pub at_m: f64,
    /// From where to where the choke may slide at this length and still hold, m.
    pub window_m: [f64; 2],
    /// The worst case over frequencies and variants.
    pub worst: WorstCase,
    /// The reason in one sentence.
    pub why: String,
}
