//! The key beside the site drawing: what weights, hatching, patterns and symbols mean, scale bars, the test points.

use super::axes::round_step;
use super::drawing::{Anchor, Area, Drawing, EM, SMALL, Words, fitted};
use super::site_wires::{HATCH, Kind, Measure, THICK, THIN};
use super::symbols;
use crate::outcome::{FrequencyOutcome, PointOutcome};
use crate::output::figures::{self, FEET_PER_METRE};

/// A numbered place along the coax.
#[derive(Debug, Clone)]
pub(super) struct TestPoint {
    pub(super) number: usize,
    pub(super) point: PointOutcome,
}

/// Height of a row of the key.
const ROW: f64 = 24.0;

/// Writes the key into a box; `scale` is picture units per metre.
pub(super) fn draw(
    drawing: &mut Drawing,
    area: Area,
    frequency: &FrequencyOutcome,
    points: &[TestPoint],
    (measure, scale): (Measure, f64),
) {
    let left = area.left + 14.0;
    drawing.line(&[[area.left, area.top], [area.left, area.bottom - 14.0]], 0.8, 0.5);
    let mut y = area.top + 14.0;
    y = weights(drawing, left, y, measure);
    y = kinds(drawing, left, y, frequency);
    y = marks(drawing, left, y, frequency);
    y = bars(drawing, left, y, scale, area.right - left);
    table(drawing, Area::new(left, y, area.right, area.bottom), points);
}

fn text(drawing: &mut Drawing, x: f64, y: f64, said: &str, room: f64) {
    drawing.words(Words::centred([x, y], SMALL, Anchor::Start, fitted(said, SMALL, room)));
}

fn weights(drawing: &mut Drawing, left: f64, top: f64, measure: Measure) -> f64 {
    let mut y = top;
    for part in [1.0, 0.5, 0.0] {
        let half = 0.5 * (THIN + THICK * part);
        drawing.rectangle(Area::new(left, y - half, left + 60.0, y + half), 0.0);
        let said = if part > 0.0 {
            format!("current {}", figures::amperes(part * measure.largest_a))
        } else {
            "no current".into()
        };
        text(drawing, left + 72.0, y, &said, 200.0);
        y += ROW;
    }
    let base = y + 0.5 * HATCH + 2.0;
    for step in 0..10 {
        let x = left + 6.0 * f64::from(step);
        drawing.line(&[[x, base], [x + HATCH * 0.577, base - HATCH]], 0.9, 0.55);
    }
    drawing.line(&[[left, base], [left + 60.0, base]], THIN, 0.0);
    text(drawing, left + 84.0, y + 6.0, &format!("voltage {}", figures::volts(measure.largest_v)), 200.0);
    base + 20.0
}

fn kinds(drawing: &mut Drawing, left: f64, top: f64, frequency: &FrequencyOutcome) -> f64 {
    let mut y = top + 4.0;
    let below = frequency.conductors.iter().any(|c| c.points.iter().any(|p| p.position_m[2] < -1e-6));
    for kind in [Kind::Wire, Kind::Shield, Kind::Below] {
        let shown = match kind {
            Kind::Wire => true,
            Kind::Shield => frequency.shield.is_some(),
            Kind::Below => below,
        };
        if shown {
            drawing.patterned(&[[left, y], [left + 60.0, y]], 4.0, 0.0, kind.pattern());
            text(drawing, left + 72.0, y, kind.name(), 200.0);
            y += ROW - 2.0;
        }
    }
    y
}

fn marks(drawing: &mut Drawing, left: f64, top: f64, frequency: &FrequencyOutcome) -> f64 {
    let x = left + 30.0;
    let mut y = top + 4.0;
    let mut row = |drawing: &mut Drawing, said: &str, height: f64, mark: &dyn Fn(&mut Drawing, f64)| {
        mark(drawing, y);
        text(drawing, left + 72.0, y, said, 200.0);
        y += height;
    };
    if frequency.shield.is_some() {
        row(drawing, "feed point", ROW + 3.0, &|d, y| {
            symbols::terminal(d, [x, y]);
        });
        row(drawing, "entry to the shack", ROW + 4.0, &|d, y| {
            symbols::entry(d, [x, y], [1.0, 0.0]);
        });
        row(drawing, "radio", ROW, &|d, y| {
            symbols::radio(d, [x, y]);
        });
    }
    if !frequency.power.chokes.is_empty() {
        row(drawing, "choke", ROW, &|d, y| {
            symbols::choke(d, [x, y + 4.0], [1.0, 0.0]);
        });
    }
    if !frequency.power.inline.is_empty() {
        row(drawing, "inline part", ROW, &|d, y| {
            symbols::part(d, [x, y], [1.0, 0.0]);
        });
    }
    if frequency.conductors.iter().any(|c| c.points.iter().any(|p| p.position_m[2] < -1e-6)) {
        row(drawing, "conductor into the earth", ROW + 3.0, &|d, y| {
            symbols::earth(d, [x, y - 10.0]);
        });
    }
    y
}

/// Scale bars in metres and feet.
fn bars(drawing: &mut Drawing, left: f64, top: f64, scale: f64, room: f64) -> f64 {
    let mut y = top + 10.0;
    for (unit, per_unit) in [("m", scale), ("ft", scale / FEET_PER_METRE)] {
        let mut length = round_step(0.3 * room / per_unit);
        if length * per_unit > room - 80.0 {
            length *= 0.5;
        }
        let wide = length * per_unit;
        drawing.outline(Area::new(left, y - 4.0, left + wide, y + 4.0), 1.2, 0.0);
        drawing.rectangle(Area::new(left, y - 4.0, left + 0.5 * wide, y + 4.0), 0.0);
        text(
            drawing,
            left + wide + 10.0,
            y,
            &format!("{} {unit}", figures::three(length).trim_end_matches(".00").trim_end_matches(".0")),
            90.0,
        );
        y += ROW - 2.0;
    }
    y
}

fn table(drawing: &mut Drawing, area: Area, points: &[TestPoint]) {
    if points.is_empty() {
        return;
    }
    let columns = [26.0, 86.0, 138.0, 206.0, 272.0].map(|x| area.left + x);
    let mut y = area.top + 18.0;
    drawing.write([area.left, y], EM, Anchor::Start, "test points along the coax");
    y += 22.0;
    for (x, head) in columns.into_iter().zip(["no.", "m", "ft", "mA", "V"]) {
        drawing.write([x, y], SMALL, Anchor::End, head);
    }
    drawing.line(&[[area.left, y + 6.0], [area.right - 4.0, y + 6.0]], 0.8, 0.3);
    let step = ((area.bottom - y - 26.0) / points.len() as f64).min(20.0);
    for test in points {
        y += step;
        let point = &test.point;
        let cells = [
            test.number.to_string(),
            format!("{:.2}", point.distance_m),
            format!("{:.1}", point.distance_m * FEET_PER_METRE),
            figures::three(1e3 * point.current_a.norm()),
            point.voltage_v.map_or(figures::MISSING.to_string(), figures::three),
        ];
        for (x, cell) in columns.into_iter().zip(cells) {
            drawing.write([x, y + 3.0], SMALL, Anchor::End, cell);
        }
    }
}
