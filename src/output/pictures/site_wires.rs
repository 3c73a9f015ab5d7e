//! Conductors of a site drawing: kind by line pattern, current as line weight, volts as hatching.

use super::drawing::{Drawing, Pattern, Spot};
use super::site_view::View;
use crate::outcome::ConductorOutcome;

/// Kinds told apart in the drawing.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Kind {
    Wire,
    Shield,
    Below,
}

impl Kind {
    pub(super) fn pattern(self) -> Pattern {
        match self {
            Self::Wire => &[],
            Self::Shield => &[16.0, 4.0],
            Self::Below => &[4.0, 4.0],
        }
    }

    pub(super) fn name(self) -> &'static str {
        match self {
            Self::Wire => "wire",
            Self::Shield => "outside of the coax",
            Self::Below => "below the surface",
        }
    }
}

/// Thinnest line, for no current.
pub(super) const THIN: f64 = 1.2;
/// Added for the largest current of the drawing.
pub(super) const THICK: f64 = 7.8;
/// Length of the hatching for the largest voltage.
pub(super) const HATCH: f64 = 30.0;
/// Distance between two hatching strokes.
const HATCH_STEP: f64 = 6.0;

/// What the weights and lengths stand for.
#[derive(Debug, Clone, Copy)]
pub(super) struct Measure {
    pub(super) largest_a: f64,
    pub(super) largest_v: f64,
}

/// A point of a conductor in the picture.
#[derive(Debug, Clone, Copy)]
struct Step {
    at: Spot,
    width: f64,
    volts: f64,
    below: bool,
}

/// A conductor as it appears in a view: points less than a hundredth of a unit apart are one.
fn steps(conductor: &ConductorOutcome, view: &View, measure: Measure) -> Vec<Step> {
    let ratio = |value: f64, largest: f64| if largest > 0.0 { (value / largest).clamp(0.0, 1.0) } else { 0.0 };
    let step = |p: &crate::outcome::PointOutcome| Step {
        at: view.spot(p.position_m),
        width: THIN + THICK * ratio(p.current_a.norm(), measure.largest_a),
        volts: ratio(p.voltage_v.unwrap_or(0.0), measure.largest_v),
        below: p.position_m[2] < -1e-6,
    };
    conductor.points.iter().map(step).collect()
}

/// The hatching of one conductor: oblique strokes on its upper side, as long as the voltage is high. Drawn under the conductors.
pub(super) fn hatch(drawing: &mut Drawing, conductor: &ConductorOutcome, view: &View, measure: Measure) {
    let steps = steps(conductor, view, measure);
    let side = upper_side(&steps);
    let mut next = 0.5 * HATCH_STEP;
    let mut done = 0.0;
    for pair in steps.windows(2) {
        let (dx, dy) = (pair[1].at[0] - pair[0].at[0], pair[1].at[1] - pair[0].at[1]);
        let long = dx.hypot(dy);
        while long > 1e-9 && next <= done + long {
            let t = (next - done) / long;
            let mix = |a: f64, b: f64| a + t * (b - a);
            let (along, volts) = ([dx / long, dy / long], mix(pair[0].volts, pair[1].volts));
            let start = [mix(pair[0].at[0], pair[1].at[0]), mix(pair[0].at[1], pair[1].at[1])];
            // 60 degrees to the conductor.
            let way = [0.5 * along[0] + 0.866 * side * along[1], 0.5 * along[1] - 0.866 * side * along[0]];
            if volts > 0.01 {
                let end = [start[0] + HATCH * volts * way[0] / 0.866, start[1] + HATCH * volts * way[1] / 0.866];
                drawing.line(&[start, end], 0.9, 0.55);
            }
            next += HATCH_STEP;
        }
        done += long;
    }
}

/// 1 where the left of most of a conductor is up the paper (or left of a vertical), else -1: one side for all of it.
fn upper_side(steps: &[Step]) -> f64 {
    let ends = |pair: &[Step]| [pair[1].at[0] - pair[0].at[0], pair[1].at[1] - pair[0].at[1]];
    let sum = steps.windows(2).map(ends).fold([0.0, 0.0], |s, d| [s[0] + d[0], s[1] + d[1]]);
    let up = sum[0] - 1e-3 * sum[1];
    if up >= 0.0 { 1.0 } else { -1.0 }
}

/// The conductor itself, in strokes of its pattern whose width follows the current.
pub(super) fn conductor(drawing: &mut Drawing, conductor: &ConductorOutcome, view: &View, measure: Measure) {
    let steps = steps(conductor, view, measure);
    let above = if conductor.name == "coax" { Kind::Shield } else { Kind::Wire };
    let mut part: Vec<Step> = Vec::new();
    for step in steps {
        if let Some(last) = part.last().copied().filter(|last| last.below != step.below) {
            // A conductor through the surface changes its pattern at its last point above.
            let kind = if last.below { Kind::Below } else { above };
            if last.below {
                part.push(step);
            }
            draw(drawing, &part, kind.pattern());
            part = if last.below { Vec::new() } else { vec![last] };
        }
        part.push(step);
    }
    let kind = if part.iter().skip(1).any(|s| s.below) { Kind::Below } else { above };
    draw(drawing, &part, kind.pattern());
}

fn draw(drawing: &mut Drawing, steps: &[Step], pattern: Pattern) {
    let lengths: &[f64] = if pattern.is_empty() { &[48.0] } else { pattern };
    let (mut phase, mut left) = (0, lengths[0]);
    let mut stroke: Vec<Step> = Vec::new();
    for pair in steps.windows(2) {
        let long = (pair[1].at[0] - pair[0].at[0]).hypot(pair[1].at[1] - pair[0].at[1]);
        let mix = |t: f64| Step {
            at: [0, 1].map(|i| pair[0].at[i] + t * (pair[1].at[i] - pair[0].at[i])),
            width: pair[0].width + t * (pair[1].width - pair[0].width),
            ..pair[0]
        };
        let on = |phase: usize| phase.is_multiple_of(2);
        if on(phase) && stroke.is_empty() {
            stroke.push(pair[0]);
        }
        let mut done = 0.0;
        while long - done > left {
            done += left;
            let here = mix(done / long);
            if on(phase) {
                stroke.push(here);
                band(drawing, &std::mem::take(&mut stroke));
            }
            phase = (phase + 1) % if pattern.is_empty() { 1 } else { lengths.len() };
            left = lengths[phase];
            if on(phase) {
                stroke = vec![here];
            }
        }
        left -= long - done;
        if on(phase) {
            stroke.push(pair[1]);
        }
    }
    band(drawing, &stroke);
}

/// A stroke of varying width: each straight leg a quadrilateral, bends rounded.
fn band(drawing: &mut Drawing, stroke: &[Step]) {
    let mut legs: Vec<(Step, Step)> = Vec::new();
    for pair in stroke.windows(2) {
        let (dx, dy) = (pair[1].at[0] - pair[0].at[0], pair[1].at[1] - pair[0].at[1]);
        if dx.hypot(dy) < 0.01 {
            continue;
        }
        match legs.last_mut() {
            Some((start, end)) if straight(start.at, end.at, pair[1].at) => *end = pair[1],
            _ => legs.push((pair[0], pair[1])),
        }
    }
    for (index, (a, b)) in legs.iter().enumerate() {
        let (dx, dy) = (b.at[0] - a.at[0], b.at[1] - a.at[1]);
        let long = dx.hypot(dy);
        let (x, y) = (-dy / long, dx / long);
        let side = |s: &Step, sign: f64| [s.at[0] + sign * 0.5 * s.width * x, s.at[1] + sign * 0.5 * s.width * y];
        drawing.fill(vec![side(a, 1.0), side(b, 1.0), side(b, -1.0), side(a, -1.0)], 0.0);
        if index > 0 {
            drawing.disc(a.at, 0.5 * a.width, 0.0);
        }
    }
}

/// True when a point lies on the straight line on from two others, within a degree.
fn straight(a: Spot, b: Spot, c: Spot) -> bool {
    let (first, second) = ([b[0] - a[0], b[1] - a[1]], [c[0] - b[0], c[1] - b[1]]);
    let cross = first[0] * second[1] - first[1] * second[0];
    let dot = first[0] * second[0] + first[1] * second[1];
    dot > 0.0 && cross.abs() < 0.0175 * dot
}
