//! Where a clamp-on meter reads something worth comparing: near a maximum of the current, away from the choke.

use super::{Prepared, Solved};
use crate::outcome::place::{ClampOutcome, PlaceOutcome, PlaceVerdict};
use num_complex::Complex64;

/// Distance between places considered, m.
const STEP_M: f64 = 0.1;
/// A meter keeps this far from the choke and from the ends of the line, m.
const CLEAR_M: f64 = 0.3;
/// And this far from the feed point, where the voltage is, m.
const CLEAR_OF_FEED_M: f64 = 1.0;

/// One place for each frequency, for the first pick or, where none is needed, the station as it is.
///
/// Of the places a hand can reach, the one whose least current over the variants is largest: never a null in any of them.
pub(super) fn places(outcome: &PlaceOutcome, prepared: &[Prepared], solved: &[Vec<Solved>]) -> Vec<ClampOutcome> {
    let pick = if outcome.verdict == PlaceVerdict::NoneNeeded { None } else { outcome.picks.first() };
    let choke = pick.and_then(|p| outcome.chokes.iter().position(|c| c.name == p.choke));
    let place = pick.and_then(|p| outcome.places_m.iter().position(|x| *x == p.at_m));
    let end_m = outcome.places_m.last().copied().unwrap_or(0.0);
    let count = (end_m / STEP_M).floor() as usize;
    let reach = |x: f64| outcome.reachable_m.is_empty() || outcome.reachable_m.iter().any(|r| x >= r[0] && x <= r[1]);
    let at_m: Vec<f64> = (0..=count)
        .map(|n| (n as f64 * STEP_M * 1e3).round() / 1e3)
        .filter(|x| *x >= CLEAR_OF_FEED_M.min(0.5 * end_m) && *x <= end_m - CLEAR_M && reach(*x))
        .filter(|x| pick.is_none_or(|p| (p.at_m - x).abs() >= CLEAR_M))
        .collect();
    (0..outcome.frequencies_hz.len())
        .filter_map(|f| {
            let currents: Vec<Vec<f64>> = prepared
                .iter()
                .zip(solved)
                .map(|(variant, models)| {
                    let seat = choke.zip(place).map(|(c, p)| (&variant.seats[p], outcome.chokes[c].impedance_ohm[f]));
                    along(outcome, variant, &models[f], seat, outcome.frequencies_hz[f], &at_m)
                })
                .collect();
            let least = |n: usize| currents.iter().map(|c| c[n]).fold(f64::INFINITY, f64::min);
            let best = (0..at_m.len()).max_by(|a, b| least(*a).total_cmp(&least(*b)))?;
            let most = currents.iter().map(|c| c[best]).fold(0.0, f64::max);
            Some(ClampOutcome {
                frequency_hz: outcome.frequencies_hz[f],
                at_m: at_m[best],
                current_a: currents[0][best],
                range_a: [least(best), most],
            })
        })
        .collect()
}

/// RMS currents along the coax at the operating power.
fn along(
    outcome: &PlaceOutcome,
    variant: &Prepared,
    solved: &Solved,
    choke: Option<(&super::Seat, Complex64)>,
    frequency_hz: f64,
    at_m: &[f64],
) -> Vec<f64> {
    let feed_ohm = solved.model.feed(&variant.line, choke).inv();
    let state = variant.chain.at(frequency_hz).state(feed_ohm, outcome.power_w);
    let volts = state.map_or(0.0, |s| s.feed_voltage_v);
    solved.model.along(&variant.line, choke, at_m).into_iter().map(|a| a * volts).collect()
}
