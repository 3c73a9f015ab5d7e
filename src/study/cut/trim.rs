//! The trim rule: how far the frequency of the best match moves when the moving end is trimmed.

use super::CutFailure;
use super::lengths::Axis;
use super::scan::{Grid, Scan};
use crate::outcome::cut::TrimOutcome;
use num_complex::Complex64;

/// A second frequency beside a single one, as a share of it.
const SPREAD: f64 = 0.02;
/// A zero of the reactance further away than this share of the frequency says nothing about the band.
const REACH: f64 = 0.06;
/// Above this magnitude the susceptance is the straighter curve, below it the reactance (the wave impedance of space, rounded), ohm.
const HIGH_OHM: f64 = 377.0;

/// Reactance (or susceptance) of one frequency at the chosen length and its neighbours in the scan.
#[derive(Debug, Clone, Copy)]
struct Column {
    frequency_hz: f64,
    feed_ohm: [Complex64; 3],
}

/// One rule a band (or single frequency) that has its best match near by, for the nominal station at the chosen length.
///
/// With X(f, l) = 0 where the feed point is real, df/dl = −(∂X/∂l)/(∂X/∂f): ∂X/∂l from the lengths beside the chosen one, ∂X/∂f from the
/// frequencies of the band (or one more beside a single frequency).
///
/// # Errors
/// [`CutFailure`] when a solution fails.
pub(super) fn rule(
    scan: &Scan,
    grid: &Grid,
    (first, second): (&Axis, Option<&Axis>),
    (length_m, second_m): (f64, Option<f64>),
) -> Result<Vec<TrimOutcome>, CutFailure> {
    let place = |lengths: &[f64], m: f64| lengths.iter().position(|l| *l == m);
    let s = second.zip(second_m).map_or(Some(0), |(axis, m)| place(&axis.lengths_m, m));
    let (Some(l), Some(s)) = (place(&first.lengths_m, length_m), s) else { return Ok(Vec::new()) };
    let (before, after) = (l.saturating_sub(1), (l + 1).min(grid.lengths - 1));
    if before == after {
        return Ok(Vec::new());
    }
    let span_m = first.lengths_m[after] - first.lengths_m[before];
    let lengths: Vec<f64> = std::iter::once(length_m).chain(second_m).collect();
    let mut out = Vec::new();
    for band in bands(scan) {
        let mut columns: Vec<Column> = band
            .iter()
            .map(|&f| Column {
                frequency_hz: scan.frequencies_hz[f],
                feed_ohm: [before, l, after].map(|n| grid.at(0, f, n, s).feed_ohm),
            })
            .collect();
        if let [only] = columns[..] {
            let beside_hz = only.frequency_hz * (1.0 + SPREAD);
            let feed = scan.feeds(std::slice::from_ref(&lengths), &[beside_hz])?;
            columns.push(Column { frequency_hz: beside_hz, feed_ohm: [feed[0][0]; 3] });
        }
        out.extend(one(&columns, span_m));
    }
    Ok(out)
}

/// Frequencies of every band, and every single frequency.
fn bands(scan: &Scan) -> Vec<Vec<usize>> {
    let mut out: Vec<Vec<usize>> = Vec::new();
    let points = &scan.nominal().operation.frequencies;
    for (f, point) in points.iter().enumerate() {
        match out.last_mut() {
            Some(band) if point.band.is_some() && points[band[0]].band == point.band => band.push(f),
            _ => out.push(vec![f]),
        }
    }
    out
}

/// The rule from two or three frequencies; the derivative in length comes from the first ones that are not beside.
fn one(columns: &[Column], span_m: f64) -> Option<TrimOutcome> {
    let middle = columns.len() / 2 - (columns.len() + 1) % 2;
    let high = columns[middle].feed_ohm[1].norm() > HIGH_OHM;
    let value = |z: Complex64| if high { z.inv().im } else { z.im };
    let at: Vec<f64> = columns.iter().map(|c| c.frequency_hz).collect();
    let g: Vec<f64> = columns.iter().map(|c| value(c.feed_ohm[1])).collect();
    let by_length: Vec<f64> = columns.iter().map(|c| (value(c.feed_ohm[2]) - value(c.feed_ohm[0])) / span_m).collect();
    // from the middle: g = g1 + slope t + bend t²
    let (slope, bend) = match (&at[..], &g[..]) {
        ([f0, f1, f2], [g0, g1, g2]) => {
            let (d0, d1) = ((g1 - g0) / (f1 - f0), (g2 - g1) / (f2 - f1));
            let bend = (d1 - d0) / (f2 - f0);
            (d0 + bend * (f1 - f0), bend)
        }
        ([f0, f1], [g0, g1]) => ((g1 - g0) / (f1 - f0), 0.0),
        _ => return None,
    };
    let root = (slope * slope - 4.0 * bend * g[middle]).sqrt();
    let step_hz = -2.0 * g[middle] / (slope + root.copysign(slope));
    if step_hz.is_nan() || step_hz.abs() > REACH * at[middle] {
        return None;
    }
    let there = slope + 2.0 * bend * step_hz;
    // the derivative in length at the zero, by a straight line over the band
    let last = at.len() - 1;
    let by_length = if last == 2 {
        by_length[0] + (by_length[2] - by_length[0]) * (at[middle] + step_hz - at[0]) / (at[2] - at[0])
    } else {
        by_length[0]
    };
    Some(TrimOutcome { frequency_hz: at[middle] + step_hz, hz_per_m: -by_length / there })
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn a_half_wave_moves_by_its_frequency_over_its_length() {
        let (length, resonance) = (20.0, 7.06e6);
        for (resistance, is_high) in [(60.0, false), (3000.0, true)] {
            let feed = |f: f64, l: f64| {
                let detuning = 8.0 * (f * l / (resonance * length) - resonance * length / (f * l));
                let circuit = Complex64::new(1.0, detuning);
                if is_high { circuit.inv() * resistance } else { circuit * resistance }
            };
            let column = |f: f64| Column { frequency_hz: f, feed_ohm: [19.9, 20.0, 20.1].map(|l| feed(f, l)) };
            let three = one(&[column(7.0e6), column(7.1e6), column(7.2e6)], 0.2).unwrap();
            assert!((three.frequency_hz / resonance - 1.0).abs() < 1e-5, "{three:?}");
            assert!((three.hz_per_m * length / resonance + 1.0).abs() < 1e-3, "{three:?}");
            let beside = Column { frequency_hz: 7.242e6, feed_ohm: [feed(7.242e6, 20.0); 3] };
            let two = one(&[column(7.1e6), beside], 0.2).unwrap();
            assert!((two.hz_per_m * length / resonance + 1.0).abs() < 0.05, "{two:?}");
        }
        let far = [Complex64::new(60.0, -900.0); 3];
        let column = |f: f64| Column { frequency_hz: f, feed_ohm: far };
        assert!(one(&[column(7.0e6), column(7.1e6), column(7.2e6)], 0.2).is_none());
    }
}
