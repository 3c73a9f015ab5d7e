//! Length of the coax and place of a choke taken together, the plain data behind their joint map.

use super::place::LimitsOutcome;
use serde::{Deserialize, Serialize};

/// Worst over the variants, for one choke, over `[frequency][length][place]`; `None` where the place lies beyond the
/// length. Currents are RMS magnitudes at the operating power.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct LengthByPlaceOutcome {
    /// Title of the station.
    pub station: String,
    /// What a choice must keep.
    pub limits: LimitsOutcome,
    /// Name of the choke.
    pub choke: String,
    /// Hz.
    pub frequencies_hz: Vec<f64>,
    /// Lengths of the coax, m, ascending.
    pub lengths_m: Vec<f64>,
    /// Places along the coax from the feed point, m, ascending.
    pub places_m: Vec<f64>,
    /// Current on the shield going on into the shack, A.
    pub entry_current_a: Vec<Vec<Vec<Option<f64>>>>,
    /// Standing-wave ratio at the radio.
    pub swr: Vec<Vec<Vec<Option<f64>>>>,
}
