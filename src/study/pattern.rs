//! Gain over elevation and bearing at one frequency.

use super::predict::{Failure, solve_one};
use crate::field::FarField;
use crate::layout::Layout;
use crate::outcome::pattern::{AzimuthCut, ElevationCut, PatternOutcome};

/// Elevations of the azimuth cuts, degrees.
const AZIMUTH_CUTS_DEG: [f64; 3] = [10.0, 30.0, 60.0];

/// The radiation pattern: an elevation cut through the bearing of the largest gain and one across it, and azimuth cuts.
///
/// Gain refers to the power into the feed point, losses of earth, metal and parts included.
///
/// # Errors
/// [`Failure`] as for a prediction.
pub fn pattern(layout: &Layout, frequency_hz: f64) -> Result<PatternOutcome, Failure> {
    let solved = solve_one(layout, frequency_hz)?;
    let earth = layout.earth.at(frequency_hz);
    let far = FarField::new(&solved.mesh, &solved.solution, frequency_hz, earth);
    let gain = |elevation: f64, bearing: f64| {
        let dbi = far.gain(elevation, bearing, solved.feed_w).total_dbi;
        (dbi > -100.0).then_some(dbi)
    };
    let bearings: Vec<f64> = (0..=72).map(|n| 5.0 * f64::from(n)).collect();
    let best = bearings
        .iter()
        .copied()
        .max_by(|a, b| gain(30.0, *a).unwrap_or(-200.0).total_cmp(&gain(30.0, *b).unwrap_or(-200.0)))
        .unwrap_or(0.0);
    let elevations: Vec<f64> = (0..=90).map(|n| 2.0 * f64::from(n)).collect();
    let elevation_cut = |bearing: f64| ElevationCut {
        bearing_deg: bearing,
        elevation_deg: elevations.clone(),
        gain_dbi: elevations
            .iter()
            .map(|&e| if e <= 90.0 { gain(e, bearing) } else { gain(180.0 - e, bearing + 180.0) })
            .collect(),
    };
    let azimuth_cut = |elevation: f64| AzimuthCut {
        elevation_deg: elevation,
        bearing_deg: bearings.clone(),
        gain_dbi: bearings.iter().map(|&b| gain(elevation, b)).collect(),
    };
    Ok(PatternOutcome {
        station: layout.title.clone(),
        frequency_hz,
        elevation_cuts: vec![elevation_cut(best), elevation_cut((best + 90.0) % 360.0)],
        azimuth_cuts: AZIMUTH_CUTS_DEG.into_iter().map(azimuth_cut).collect(),
    })
}
