//! Lengths to stay away from: where current, voltage or match peak because a conductor is near a resonance on this route.
//!
//! They are read off the computed curves, so route, jacket, soil and far end are all in them; no velocity factor is assumed.

use super::lengths::Axis;
use super::reading::Reading;
use super::scan::{Grid, Scan};
use crate::outcome::cut::LengthToAvoid;

/// A peak stands out by this factor over the lowest value between it and the next higher one (or the end of the range).
const PROMINENCE: f64 = 1.2;

/// Voltage at the radio below which no peak matters, V: the source voltage of IEC 61000-4-6 test level 2 (from memory).
const LEAST_VOLTAGE_V: f64 = 3.0;

/// A quantity that can peak, with the limit above which a peak matters.
struct Watched {
    name: &'static str,
    read: fn(&Reading) -> f64,
    limit: f64,
}

/// All peaks beyond their limits, along the first length, outside the window that is recommended; with two lengths, those no choice of
/// the second can mend.
pub(super) fn resonances(scan: &Scan, grid: &Grid, first: &Axis, window_m: Option<[f64; 2]>) -> Vec<LengthToAvoid> {
    let outside = |x: f64| window_m.is_none_or(|w| x < w[0] - 1e-9 || x > w[1] + 1e-9);
    let limits = scan.nominal().limits;
    let watched = [
        Watched { name: "entry_current_a", read: |r| r.entry_current_a, limit: limits.entry_current_a },
        Watched { name: "end_voltage_v", read: |r| r.end_voltage_v.unwrap_or(0.0), limit: LEAST_VOLTAGE_V },
        Watched { name: "swr", read: |r| r.swr, limit: limits.swr },
    ];
    let mut out = Vec::new();
    for (v, variant) in scan.variants().iter().enumerate() {
        for (f, &frequency_hz) in scan.frequencies_hz.iter().enumerate() {
            for w in &watched {
                let least =
                    |l: usize| (0..grid.seconds).map(|s| (w.read)(grid.at(v, f, l, s))).fold(f64::INFINITY, f64::min);
                let curve: Vec<f64> = (0..grid.lengths).map(least).collect();
                out.extend(peaks(&first.lengths_m, &curve).into_iter().filter(|p| p.1 > w.limit && outside(p.0)).map(
                    |(length_m, value)| LengthToAvoid {
                        frequency_hz,
                        variant: variant.clone(),
                        length_m,
                        quantity: w.name.to_owned(),
                        value,
                    },
                ));
            }
        }
    }
    out
}

/// Places and heights of the peaks inside a curve that stand out, by the parabola through the three highest points.
fn peaks(x: &[f64], y: &[f64]) -> Vec<(f64, f64)> {
    let mut out = Vec::new();
    for n in 1..y.len().saturating_sub(1) {
        if y[n] <= 0.0 || y[n] < y[n - 1] || y[n] <= y[n + 1] {
            continue;
        }
        let lowest =
            |side: &mut dyn Iterator<Item = &f64>| side.take_while(|v| **v <= y[n]).fold(y[n], |low, v| low.min(*v));
        let floor = lowest(&mut y[..n].iter().rev()).max(lowest(&mut y[n + 1..].iter()));
        if y[n] >= PROMINENCE * floor {
            out.push(vertex(&x[n - 1..=n + 1], &y[n - 1..=n + 1]));
        }
    }
    out
}

/// Highest point of the parabola through three points.
fn vertex(x: &[f64], y: &[f64]) -> (f64, f64) {
    let (d0, d1) = ((y[1] - y[0]) / (x[1] - x[0]), (y[2] - y[1]) / (x[2] - x[1]));
    let bend = (d1 - d0) / (x[2] - x[0]);
    if bend >= 0.0 {
        return (x[1], y[1]);
    }
    // slope at x1 is the distance-weighted mean of the two
    let slope = d0 + bend * (x[1] - x[0]);
    let step = (-0.5 * slope / bend).clamp(x[0] - x[1], x[2] - x[1]);
    (x[1] + step, y[1] + step * (slope + bend * step))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn peaks_are_found_between_the_steps_and_ripples_are_not() {
        let x: Vec<f64> = (0..60).map(|n| 4.0 + 0.5 * f64::from(n)).collect();
        let bump = |x: f64, at: f64, high: f64| high / (1.0 + (x - at).powi(2));
        let y: Vec<f64> = x.iter().map(|&x| 1.0 + bump(x, 12.3, 5.0) + bump(x, 24.9, 3.0)).collect();
        let found = peaks(&x, &y);
        assert_eq!(found.len(), 2, "{found:?}");
        assert!((found[0].0 - 12.3).abs() < 0.05 && (found[1].0 - 24.9).abs() < 0.05, "{found:?}");
        let ripple: Vec<f64> = x.iter().map(|&x| 1.0 + 0.01 * (5.0 * x).sin()).collect();
        assert!(peaks(&x, &ripple).is_empty());
        let rising: Vec<f64> = x.iter().map(|x| x * x).collect();
        assert!(peaks(&x, &rising).is_empty(), "the end of a range is no resonance");
    }
}
