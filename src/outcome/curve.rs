//! Impedance and match against frequency: what a curve is drawn and written from.

use super::Prediction;
use num_complex::Complex64;
use serde::{Deserialize, Serialize};

/// A curve over frequency.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct CurveOutcome {
    /// Title of the station.
    pub station: String,
    /// Reference of the standing-wave ratio, ohm.
    pub reference_ohm: f64,
    /// A ratio to mark.
    pub swr_limit: Option<f64>,
    /// Bands to shade, or to show beside each other where there is nothing between them.
    pub bands: Vec<CurveBand>,
    /// Ascending in frequency.
    pub points: Vec<CurvePoint>,
}

/// A band.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct CurveBand {
    /// "40 m".
    pub name: String,
    /// Hz.
    pub from_hz: f64,
    /// Hz.
    pub to_hz: f64,
}

/// One frequency of a curve.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct CurvePoint {
    /// Hz.
    pub frequency_hz: f64,
    /// Between hot and cold terminal, ohm.
    pub feed_ohm: Complex64,
    /// What the radio sees, ohm.
    pub radio_ohm: Complex64,
    /// Standing-wave ratio at the radio.
    pub swr: f64,
}

impl CurveOutcome {
    /// The frequencies of a prediction, nominal, as a curve; its bands are those the frequencies came from.
    #[must_use]
    pub fn of(prediction: &Prediction, reference_ohm: f64, swr_limit: Option<f64>) -> Self {
        let mut bands: Vec<CurveBand> = Vec::new();
        for frequency in &prediction.frequencies {
            let (Some(name), hz) = (&frequency.band, frequency.frequency_hz) else {
                continue;
            };
            match bands.iter_mut().find(|b| b.name == *name) {
                Some(band) => (band.from_hz, band.to_hz) = (band.from_hz.min(hz), band.to_hz.max(hz)),
                None => bands.push(CurveBand { name: name.clone(), from_hz: hz, to_hz: hz }),
            }
        }
        bands.sort_by(|a, b| a.from_hz.total_cmp(&b.from_hz));
        let point = |f: &super::FrequencyOutcome| CurvePoint {
            frequency_hz: f.frequency_hz,
            feed_ohm: Complex64::new(f.feed.resistance_ohm, f.feed.reactance_ohm),
            radio_ohm: Complex64::new(f.radio.resistance_ohm, f.radio.reactance_ohm),
            swr: f.radio.swr,
        };
        let mut points: Vec<CurvePoint> = prediction.frequencies.iter().map(point).collect();
        points.sort_by(|a, b| a.frequency_hz.total_cmp(&b.frequency_hz));
        points.dedup_by(|a, b| a.frequency_hz == b.frequency_hz);
        Self { station: prediction.station.clone(), reference_ohm, swr_limit, bands, points }
    }
}

/// A curve interpolated from a few solves, and what is known of its error.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct InterpolatedCurve {
    /// Feed point and radio.
    #[serde(flatten)]
    pub curve: CurveOutcome,
    /// The outside of the coax, one entry a point; empty without one.
    pub shield: Vec<ShieldCurvePoint>,
    /// Estimated largest relative error of the interpolated port model between the solves.
    pub error_estimate: f64,
    /// What the estimate was to come below.
    pub tolerance: f64,
    /// Whether it did, within the solves allowed.
    pub converged: bool,
    /// Solves spent.
    pub solves: usize,
}

/// The shield at one frequency of a curve; RMS magnitudes at the operating power.
#[derive(Debug, Clone, Copy, PartialEq, Serialize, Deserialize)]
pub struct ShieldCurvePoint {
    /// Hz.
    pub frequency_hz: f64,
    /// Going on into the shack, A.
    pub entry_current_a: f64,
    /// V; `None` below the surface.
    pub entry_voltage_v: Option<f64>,
    /// Where the shield meets the radio, A; 0 at an open end.
    pub end_current_a: f64,
    /// V; `None` below the surface.
    pub end_voltage_v: Option<f64>,
}
