//! Where the power goes in the sky: gain over angle.

use serde::{Deserialize, Serialize};

/// The radiation pattern at one frequency.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct PatternOutcome {
    /// Title of the station.
    pub station: String,
    /// Hz.
    pub frequency_hz: f64,
    /// Gain against elevation, one cut a bearing.
    pub elevation_cuts: Vec<ElevationCut>,
    /// Gain against bearing, one cut an elevation.
    pub azimuth_cuts: Vec<AzimuthCut>,
}

/// Gain from horizon over zenith to the opposite horizon.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct ElevationCut {
    /// Bearing of elevation 0 to 90 degrees, degrees from north; 90 to 180 is the opposite bearing.
    pub bearing_deg: f64,
    /// Degrees.
    pub elevation_deg: Vec<f64>,
    /// Of both polarisations together, dB over an isotropic radiator, input power as reference; `None` where nothing is
    /// radiated.
    pub gain_dbi: Vec<Option<f64>>,
}

/// Gain all around at one elevation.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct AzimuthCut {
    /// Degrees.
    pub elevation_deg: f64,
    /// Degrees from north.
    pub bearing_deg: Vec<f64>,
    /// As in [`ElevationCut`].
    pub gain_dbi: Vec<Option<f64>>,
}
