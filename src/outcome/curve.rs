//! A curve over frequency, interpolated from a few solves.

use num_complex::Complex64;
use serde::{Deserialize, Serialize};

/// Feed point, radio and shield against frequency; every array as long as `frequencies_hz`. Currents and voltages are RMS
/// magnitudes at the operating power.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct CurveOutcome {
    /// Band, where the curve is that of a band.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub band: Option<String>,
    /// Hz, rising.
    pub frequencies_hz: Vec<f64>,
    /// Between hot and cold terminal, ohm.
    pub feed_ohm: Vec<Complex64>,
    /// What the radio sees, ohm.
    pub radio_ohm: Vec<Complex64>,
    /// Standing-wave ratio at the radio.
    pub radio_swr: Vec<f64>,
    /// The outside of the coax; `None` without one.
    pub shield: Option<ShieldCurve>,
    /// Estimated largest relative error of the interpolated port model.
    pub error_estimate: f64,
    /// Whether the estimate came below `tolerance` within the solves allowed.
    pub converged: bool,
    /// What the estimate was to come below.
    pub tolerance: f64,
    /// Solves spent on the interpolation this curve is taken from.
    pub solves: usize,
}

/// The shield against frequency.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct ShieldCurve {
    /// Place of the entry, m from the feed point.
    pub entry_at_m: f64,
    /// Going on into the shack, A.
    pub entry_current_a: Vec<f64>,
    /// V; `None` below the surface.
    pub entry_voltage_v: Vec<Option<f64>>,
    /// Where the shield meets the radio, A; 0 at an open end.
    pub end_current_a: Vec<f64>,
    /// V; `None` below the surface.
    pub end_voltage_v: Vec<Option<f64>>,
}
