//! The trim rule: how far the frequency of the best match moves when the moving end is trimmed.

use super::CutFailure;
use super::lengths::Axis;
use super::scan::Scan;
use crate::layout::BandEdge;
use crate::outcome::cut::TrimOutcome;
use num_complex::Complex64;

/// Length tried either side of the chosen one, as a share of it.
const SHARE: f64 = 0.005;
/// Frequencies tried either side of a band's middle, as a share of it.
const SPREAD: f64 = 0.03;
/// A zero of the reactance further away than this share of the frequency says nothing about the band.
const REACH: f64 = 0.06;
/// Above this magnitude the susceptance is the straighter curve, below it the reactance (the wave impedance of space, rounded), ohm.
const HIGH_OHM: f64 = 377.0;

/// Lengths just beyond the range that the rule may look at, m: the soil's tables must cover them.
pub(super) fn neighbours(axis: &Axis) -> [f64; 2] {
    [axis.lengths_m[0] * (1.0 - SHARE), axis.anchor_m() * (1.0 + SHARE)]
}

/// One rule a band (or single frequency) that has its best match near by, for the nominal station at the chosen length.
///
/// With X(f, l) = 0 the reactance at the feed point's zero, df/dl by central difference in the length.
///
/// # Errors
/// [`CutFailure`] when a solution fails.
pub(super) fn rule(
    scan: &Scan,
    first: &Axis,
    (length_m, second_m): (f64, Option<f64>),
) -> Result<Vec<TrimOutcome>, CutFailure> {
    let combination = |l: f64| std::iter::once(l).chain(second_m).collect::<Vec<f64>>();
    let fits = |l: &f64| scan.place(&scan.list[0], &combination(*l)).is_ok();
    let [low, high] = [length_m * (1.0 - SHARE), length_m * (1.0 + SHARE)].map(|l| if fits(&l) { l } else { length_m });
    if !(fits(&low) && fits(&high)) || high - low < 1e-9 || first.lengths_m.is_empty() {
        return Ok(Vec::new());
    }
    let middles = middles(scan);
    let at_hz: Vec<f64> = middles.iter().flat_map(|f| [-1.0, 0.0, 1.0].map(|s| f * (1.0 + s * SPREAD))).collect();
    let feeds = scan.feeds(&[combination(low), combination(length_m), combination(high)], &at_hz)?;
    let rule = |n: usize| {
        let zero = |k: usize| zero(middles[n], &feeds[k][3 * n..3 * n + 3]);
        Some(TrimOutcome { frequency_hz: zero(1)?, hz_per_m: (zero(2)? - zero(0)?) / (high - low) })
    };
    Ok((0..middles.len()).filter_map(rule).collect())
}

/// The middle of every band, and every single frequency, Hz.
fn middles(scan: &Scan) -> Vec<f64> {
    let points = &scan.nominal().operation.frequencies;
    let wanted = points.iter().filter(|p| matches!(p.edge, None | Some(BandEdge::Middle)));
    wanted.map(|p| p.frequency_hz).collect()
}

/// The frequency near the middle at which the feed point is real, by the parabola through three, Hz.
fn zero(middle_hz: f64, feeds: &[Complex64]) -> Option<f64> {
    let high = feeds[1].norm() > HIGH_OHM;
    let g: Vec<f64> = feeds.iter().map(|z| if high { z.inv().im } else { z.im }).collect();
    // in units of the spread: g = g1 + slope t + bend t²
    let (slope, bend) = (0.5 * (g[2] - g[0]), 0.5 * (g[2] + g[0]) - g[1]);
    let root = (slope * slope - 4.0 * bend * g[1]).sqrt();
    let t = -2.0 * g[1] / (slope + root.copysign(slope));
    (t.abs() * SPREAD <= REACH).then_some(middle_hz * (1.0 + t * SPREAD))
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn the_zero_of_a_resonance_is_found_from_either_side() {
        for (resistance, is_high) in [(60.0, false), (3000.0, true)] {
            for at in [6.9e6, 7.1e6, 7.3e6] {
                let z = |f: f64| {
                    let detuning = 2.0 * (f / at - 1.0);
                    let one = Complex64::new(1.0, if is_high { -8.0 } else { 8.0 } * detuning);
                    if is_high {
                        Complex64::from(resistance) / Complex64::new(1.0, 8.0 * detuning)
                    } else {
                        one * resistance
                    }
                };
                let f = 7.1e6;
                let feeds = [f * (1.0 - SPREAD), f, f * (1.0 + SPREAD)].map(z);
                let found = zero(f, &feeds).unwrap();
                assert!((found / at - 1.0).abs() < 1e-6, "{found} for {at}");
            }
        }
        let far = [Complex64::new(60.0, -900.0), Complex64::new(60.0, -880.0), Complex64::new(60.0, -860.0)];
        assert_eq!(zero(7.1e6, &far), None);
    }
}
