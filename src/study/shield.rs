//! What the outside of the coax carries, read off the currents along the conductors.

use crate::layout::{Coax, Layout};
use crate::outcome::{ConductorOutcome, JointOutcome, PointOutcome, ShieldEnd, ShieldOutcome, Side};
use num_complex::Complex64;

/// Currents and voltages of the shield; `None` without a coax.
pub(super) fn outcome(layout: &Layout, conductors: &[ConductorOutcome]) -> Option<ShieldOutcome> {
    let coax = layout.coax.as_ref()?;
    let points = &conductors[coax.conductor].points;
    let last = points.last()?;
    let entry = entry(layout, coax, conductors);
    let end = end_kind(layout, coax);
    let largest = points.iter().max_by(|a, b| a.current_a.norm().total_cmp(&b.current_a.norm()))?;
    let highest =
        points.iter().filter_map(|p| p.voltage_v.map(|v| (v, p.distance_m))).max_by(|a, b| a.0.total_cmp(&b.0));
    let from_m = last.distance_m - 1.0;
    let near_end = points.iter().filter(|p| p.distance_m >= from_m).map(|p| p.current_a.norm());
    Some(ShieldOutcome {
        entry_at_m: coax.entry_m,
        entry_current_a: entry.0,
        entry_voltage_v: entry.1,
        end,
        end_current_a: if end == ShieldEnd::Open { 0.0 } else { last.current_a.norm() },
        end_voltage_v: last.voltage_v,
        last_metre_current_a: near_end.fold(current_at(points, from_m), f64::max),
        largest_current_a: largest.current_a.norm(),
        largest_at_m: largest.distance_m,
        largest_voltage_v: highest.map(|h| h.0),
        largest_voltage_at_m: highest.map(|h| h.1),
    })
}

/// Magnitude of the current at a distance between two points, A; 0 before the first.
fn current_at(points: &[PointOutcome], at_m: f64) -> f64 {
    let beyond = points.iter().position(|p| p.distance_m >= at_m).unwrap_or(0);
    let Some(before) = beyond.checked_sub(1) else { return 0.0 };
    let (p, q) = (&points[before], &points[beyond]);
    let share = (at_m - p.distance_m) / (q.distance_m - p.distance_m).max(f64::MIN_POSITIVE);
    (p.current_a + (q.current_a - p.current_a) * share).norm()
}

/// Current and voltage going on into the shack: the radio side of everything joined at the entry.
fn entry(layout: &Layout, coax: &Coax, conductors: &[ConductorOutcome]) -> (f64, Option<f64>) {
    let points = &conductors[coax.conductor].points;
    let at_end = coax.length_m - coax.entry_m < 1e-6;
    if at_end {
        let voltage = points.last().and_then(|p| p.voltage_v);
        let body = layout.radio.body.and_then(|b| conductors[b].points.first());
        return (body.map_or(0.0, |p| p.current_a.norm()), voltage);
    }
    // the first point at or beyond the entry that is not on its feed side; between points the current is interpolated
    let beyond = points
        .iter()
        .position(|p| p.distance_m >= coax.entry_m - 1e-9 && p.side != Some(Side::Before))
        .unwrap_or(points.len() - 1);
    let (p, q) = (&points[beyond.saturating_sub(1)], &points[beyond]);
    if q.distance_m - coax.entry_m < 1e-9 || beyond == 0 {
        return (q.current_a.norm(), q.voltage_v);
    }
    let t = (coax.entry_m - p.distance_m) / (q.distance_m - p.distance_m);
    let current = p.current_a * (1.0 - t) + q.current_a * t;
    let voltage = p.voltage_v.zip(q.voltage_v).map(|(a, b)| a * (1.0 - t) + b * t);
    (current.norm(), voltage)
}

fn end_kind(layout: &Layout, coax: &Coax) -> ShieldEnd {
    let end = (coax.conductor, layout.conductors[coax.conductor].points.len() - 1);
    if layout.radio.body.is_some() {
        return ShieldEnd::Body;
    }
    let joined = layout.junctions.iter().any(|j| j.members.contains(&end) && (j.members.len() > 1 || j.to_earth));
    if joined { ShieldEnd::Joined } else { ShieldEnd::Open }
}

/// What leaves the shield at each join, towards each conductor joined there and the perfect earth.
pub(super) fn joints(layout: &Layout, conductors: &[ConductorOutcome]) -> Vec<JointOutcome> {
    let Some(coax) = &layout.coax else { return Vec::new() };
    let at = layout.conductors[coax.conductor].distances_m();
    let hot: Vec<usize> = layout.feed.hot.iter().map(|leg| leg.conductor).collect();
    let mut out = Vec::new();
    for junction in &layout.junctions {
        let Some(&(_, vertex)) = junction.members.iter().find(|m| m.0 == coax.conductor) else { continue };
        let mut voltage_v = None;
        let mut total = Complex64::ZERO;
        let mut leaving: Vec<(usize, Complex64)> = Vec::new();
        for &(conductor, v) in &junction.members {
            let place = layout.conductors[conductor].distances_m()[v];
            let (current, voltage) = outflow(&conductors[conductor].points, place);
            total += current;
            voltage_v = voltage_v.or(voltage);
            if conductor != coax.conductor {
                match leaving.iter_mut().find(|l| l.0 == conductor) {
                    Some(l) => l.1 += current,
                    None => leaving.push((conductor, current)),
                }
            }
        }
        let mut push = |name: &str, current: Complex64| {
            out.push(JointOutcome {
                at_m: at[vertex],
                on: "coax".to_string(),
                conductor: name.to_string(),
                current_a: current.norm(),
                voltage_v,
            });
        };
        for (conductor, current) in leaving.iter().filter(|l| !hot.contains(&l.0)) {
            push(&layout.conductors[*conductor].name, *current);
        }
        if junction.to_earth {
            push("earth", -total);
        }
    }
    out.sort_by(|a, b| a.at_m.total_cmp(&b.at_m));
    out
}

/// Current flowing out of a join into a conductor (both ways where it passes through), and the voltage there.
fn outflow(points: &[PointOutcome], place_m: f64) -> (Complex64, Option<f64>) {
    let mut sum = Complex64::ZERO;
    let mut voltage = None;
    for p in points.iter().filter(|p| (p.distance_m - place_m).abs() < 1e-9 * (1.0 + place_m)) {
        match p.side {
            Some(Side::Before) => sum -= p.current_a,
            Some(Side::After) => sum += p.current_a,
            None => {}
        }
        voltage = voltage.or(p.voltage_v);
    }
    (sum, voltage)
}
