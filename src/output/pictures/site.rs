//! The site drawing: plan and elevation to scale at one frequency, with numbered test points along the coax.

use super::drawing::{Anchor, Area, Drawing, EM, SMALL, Spot};
use super::placer::Placer;
use super::site_key::{self, TestPoint};
use super::site_view::{self, Look, View};
use super::site_wires::{self, Measure};
use super::symbols;
use crate::outcome::{ConductorOutcome, FrequencyOutcome, PointOutcome, Prediction};
use crate::output::figures::FEET_PER_METRE;
use crate::output::{OutputError, Units, bands, figures};

/// Height of the picture, with its width near the proportions of a sheet of paper.
const HEIGHT: f64 = 1080.0;
/// Least distance of two test points on the paper.
const APART: f64 = 36.0;
/// Test points at most, so that their table fits beside the drawing.
const TEST_POINTS: usize = 14;

/// The picture at the frequency with the largest current on the shield (without coax: the largest anywhere).
///
/// # Errors
/// [`OutputError::Nothing`] for a prediction without frequencies or conductors.
pub(super) fn drawing(prediction: &Prediction, units: Units) -> Result<Drawing, OutputError> {
    let nothing =
        || OutputError::Nothing { what: "the site drawing".into(), needs: "a frequency with conductors".into() };
    let frequency = prediction.frequencies.iter().max_by(|a, b| rank(a).total_cmp(&rank(b))).ok_or_else(nothing)?;
    if frequency.conductors.iter().all(|c| c.points.is_empty()) {
        return Err(nothing());
    }
    let below = format!(
        "Plan and elevation to one scale at {} ({} MHz), where the current on the outside of the coax is largest; RMS at {}",
        bands::short(frequency),
        figures::megahertz(frequency.frequency_hz),
        figures::watts(frequency.power.input_w),
    );
    let mut drawing = Drawing::new(HEIGHT, &prediction.station, &below);
    let room = Area::new(20.0, 76.0, 872.0, HEIGHT - 10.0);
    let views = site_view::lay(frequency, room);
    let measure = measure(frequency);
    let points = test_points(frequency, units, views[0].scale);
    for view in &views {
        draw_view(&mut drawing, prediction, frequency, view, (measure, &points));
    }
    site_key::draw(
        &mut drawing,
        Area::new(886.0, 90.0, 1180.0, HEIGHT - 10.0),
        frequency,
        &points,
        (measure, views[0].scale),
    );
    Ok(drawing)
}

fn rank(frequency: &FrequencyOutcome) -> f64 {
    match &frequency.shield {
        Some(shield) => shield.largest_current_a,
        None => measure(frequency).largest_a,
    }
}

fn measure(frequency: &FrequencyOutcome) -> Measure {
    let points = || frequency.conductors.iter().flat_map(|c| &c.points);
    Measure {
        largest_a: points().map(|p| p.current_a.norm()).fold(0.0, f64::max),
        largest_v: points().filter_map(|p| p.voltage_v).fold(0.0, f64::max),
    }
}

/// The coax, where there is one.
pub(super) fn coax(frequency: &FrequencyOutcome) -> Option<&ConductorOutcome> {
    frequency.conductors.iter().find(|c| c.name == "coax" && c.points.len() > 1)
}

/// Current, voltage and position at a distance along a conductor, linear between its points. At a join the side towards the
/// conductor's end counts, where a meter for the radio side would be clamped.
pub(super) fn at(conductor: &ConductorOutcome, distance_m: f64) -> Option<PointOutcome> {
    let after = conductor.points.iter().rposition(|p| p.distance_m <= distance_m + 1e-9)?;
    let first = &conductor.points[after];
    let Some(second) = conductor.points.get(after + 1) else {
        return Some(first.clone());
    };
    let t = ((distance_m - first.distance_m) / (second.distance_m - first.distance_m).max(1e-12)).clamp(0.0, 1.0);
    let mut point = first.clone();
    point.distance_m = distance_m;
    point.current_a += (second.current_a - first.current_a) * t;
    point.voltage_v = first.voltage_v.zip(second.voltage_v).map(|(a, b)| a + t * (b - a));
    point.position_m = [0, 1, 2].map(|i| first.position_m[i] + t * (second.position_m[i] - first.position_m[i]));
    Some(point)
}

/// Evenly spaced points along the coax in round metres or feet, far enough apart to be numbered, and its end.
fn test_points(frequency: &FrequencyOutcome, units: Units, scale: f64) -> Vec<TestPoint> {
    let Some(coax) = coax(frequency) else {
        return Vec::new();
    };
    let length_m = coax.points.last().map_or(0.0, |p| p.distance_m);
    let unit_m = if units == Units::Feet { 1.0 / FEET_PER_METRE } else { 1.0 };
    let step_m = [1.0, 2.0, 5.0, 10.0, 20.0, 50.0, 100.0]
        .map(|s| s * unit_m)
        .into_iter()
        .find(|s| length_m / s <= (TEST_POINTS - 2) as f64 && s * scale >= APART)
        .unwrap_or(length_m / 10.0);
    let mut distances: Vec<f64> =
        (0..).map(|k| f64::from(k) * step_m).take_while(|d| *d < length_m - 0.3 * step_m).collect();
    distances.push(length_m);
    let point = |(index, d): (usize, f64)| at(coax, d).map(|point| TestPoint { number: index + 1, point });
    distances.into_iter().enumerate().filter_map(point).collect()
}

fn draw_view(
    drawing: &mut Drawing,
    prediction: &Prediction,
    frequency: &FrequencyOutcome,
    view: &View,
    (measure, points): (Measure, &[TestPoint]),
) {
    let mut placer = Placer::new(view.area);
    head(drawing, view);
    if view.look != Look::Down && prediction.earth.kind != "none" {
        surface(drawing, view, &mut placer);
    }
    for conductor in &frequency.conductors {
        site_wires::hatch(drawing, conductor, view, measure);
    }
    for conductor in &frequency.conductors {
        site_wires::conductor(drawing, conductor, view, measure);
        let spots: Vec<Spot> = conductor.points.iter().map(|p| view.spot(p.position_m)).collect();
        placer.take_line(&thinned(&spots), 6.0);
    }
    ticks(drawing, frequency, view);
    marks(drawing, frequency, view, &mut placer);
    for test in points {
        let spot = view.spot(test.point.position_m);
        placer.numbered(drawing, spot, lower(frequency, test.point.distance_m, view), test.number);
    }
    names(drawing, frequency, view, &mut placer);
}

fn head(drawing: &mut Drawing, view: &View) {
    let [x, y] = [view.area.left + 10.0, view.area.top - 2.0];
    match view.look {
        Look::Down => {
            drawing.write([x, y], EM, Anchor::Start, "Plan, north up");
        }
        Look::Level(right) => {
            let bearing = site_view::seen_from_deg(right).round() % 360.0;
            let text = format!("Elevation, seen from {bearing:.0}° ({})", compass(bearing));
            drawing.write([x, y], EM, Anchor::Start, text);
        }
    }
}

/// One of eight winds.
fn compass(bearing_deg: f64) -> &'static str {
    const WINDS: [&str; 8] = ["north", "north-east", "east", "south-east", "south", "south-west", "west", "north-west"];
    WINDS[(bearing_deg / 45.0).round() as usize % WINDS.len()]
}

/// The earth's surface in the elevation, hatched below.
fn surface(drawing: &mut Drawing, view: &View, placer: &mut Placer) {
    let y = view.spot([0.0, 0.0, 0.0])[1];
    let (left, right) = (view.area.left + 12.0, view.area.right - 12.0);
    drawing.line(&[[left, y], [right, y]], 1.0, 0.3);
    let mut x = left + 8.0;
    while x < right {
        drawing.line(&[[x, y], [x - 7.0, y + 7.0]], 0.8, 0.6);
        x += 14.0;
    }
    placer.take(Area::new(left, y - 2.0, right, y + 8.0));
}

/// A short stroke across the coax every metre.
fn ticks(drawing: &mut Drawing, frequency: &FrequencyOutcome, view: &View) {
    let Some(coax) = coax(frequency) else {
        return;
    };
    let length_m = coax.points.last().map_or(0.0, |p| p.distance_m);
    let step_m = if length_m > 40.0 { 5.0 } else { 1.0 };
    let mut distance_m = 0.0;
    while distance_m <= length_m {
        if let (Some(point), Some(along)) = (at(coax, distance_m), direction(coax, distance_m, view)) {
            let [x, y] = view.spot(point.position_m);
            let across = symbols::upper(along).map(|v| -v);
            drawing.line(
                &[[x + 4.0 * across[0], y + 4.0 * across[1]], [x + 11.0 * across[0], y + 11.0 * across[1]]],
                1.2,
                0.0,
            );
        }
        distance_m += step_m;
    }
}

/// The side of the coax on which its ticks and numbers stand: away from the hatching.
fn lower(frequency: &FrequencyOutcome, distance_m: f64, view: &View) -> Spot {
    let along = coax(frequency).and_then(|c| direction(c, distance_m, view));
    along.map_or([0.0, 1.0], |along| symbols::upper(along).map(|v| -v))
}

/// Direction of a conductor in the picture; `None` where it is seen end on.
fn direction(conductor: &ConductorOutcome, distance_m: f64, view: &View) -> Option<Spot> {
    let ends = [distance_m - 0.05, distance_m + 0.05].map(|d| at(conductor, d.max(0.0)));
    let [Some(a), Some(b)] = ends else {
        return None;
    };
    let (a, b) = (view.spot(a.position_m), view.spot(b.position_m));
    let long = (b[0] - a[0]).hypot(b[1] - a[1]);
    (long > 0.02 * view.scale).then(|| [(b[0] - a[0]) / long, (b[1] - a[1]) / long])
}

/// Feed, chokes and inline parts, entry, radio, and earth where a conductor goes below.
fn marks(drawing: &mut Drawing, frequency: &FrequencyOutcome, view: &View, placer: &mut Placer) {
    let mut labels: Vec<(Spot, String)> = Vec::new();
    let level = |c: &ConductorOutcome, d: f64| direction(c, d, view).unwrap_or([1.0, 0.0]);
    for conductor in &frequency.conductors {
        let crossing = conductor.points.windows(2).find(|p| (p[0].position_m[2] >= 0.0) != (p[1].position_m[2] >= 0.0));
        if let Some(pair) = crossing {
            let spot = view.spot(pair[0].position_m);
            let beside = [spot[0] + 18.0, spot[1]];
            drawing.line(&[spot, beside], 1.6, 0.0);
            placer.take(symbols::earth(drawing, beside));
        }
    }
    if let (Some(coax), Some(shield)) = (coax(frequency), &frequency.shield) {
        if let Some(point) = at(coax, shield.entry_at_m) {
            let spot = view.spot(point.position_m);
            placer.take(symbols::entry(drawing, spot, level(coax, shield.entry_at_m)));
            labels.push((spot, "entry".into()));
        }
        if let Some(end) = coax.points.last() {
            let spot = view.spot(end.position_m);
            placer.take(symbols::radio(drawing, spot));
            labels.push((spot, "radio".into()));
        }
        let spot = view.spot(coax.points[0].position_m);
        placer.take(symbols::terminal(drawing, spot));
        labels.push((spot, "feed".into()));
    }
    let chokes = frequency.power.chokes.iter().map(|c| (c, true));
    for (part, is_choke) in chokes.chain(frequency.power.inline.iter().map(|c| (c, false))) {
        let Some(on) = frequency.conductors.iter().find(|c| c.name == part.on) else {
            continue;
        };
        if let Some(point) = at(on, part.at_m) {
            let spot = view.spot(point.position_m);
            let area = if is_choke {
                symbols::choke(drawing, spot, level(on, part.at_m))
            } else {
                symbols::part(drawing, spot, level(on, part.at_m))
            };
            placer.take(area);
            labels.push((spot, part.name.clone()));
        }
    }
    for (spot, text) in labels {
        placer.label(drawing, spot, [-0.3, -1.0], (EM, &text));
    }
}

/// Conductor names beside their longest visible stretch. The coax is known by its test points, the radio by its box.
fn names(drawing: &mut Drawing, frequency: &FrequencyOutcome, view: &View, placer: &mut Placer) {
    for conductor in &frequency.conductors {
        let spots: Vec<Spot> = conductor.points.iter().map(|p| view.spot(p.position_m)).collect();
        let (Some(first), Some(last)) = (spots.first(), spots.last()) else {
            continue;
        };
        if conductor.name == "coax" || conductor.name == "radio" {
            continue;
        }
        let reach = spots.iter().map(|s| (s[0] - first[0]).hypot(s[1] - first[1])).fold(0.0, f64::max);
        let spot = if reach < 12.0 { *last } else { spots[spots.len() / 2] };
        placer.label(drawing, spot, [1.0, 0.6], (SMALL, &conductor.name));
    }
}

/// Fewer points of a polyline for the placer.
fn thinned(spots: &[Spot]) -> Vec<Spot> {
    let mut out: Vec<Spot> = Vec::new();
    for (index, spot) in spots.iter().enumerate() {
        let far = out.last().is_none_or(|last| (spot[0] - last[0]).hypot(spot[1] - last[1]) > 3.0);
        if far || index + 1 == spots.len() {
            out.push(*spot);
        }
    }
    out
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::super::checks;
    use super::*;
    use crate::output::sample;

    #[test]
    fn nothing_overlaps_and_every_mark_is_named_in_both_views() {
        for units in [Units::Metres, Units::Feet] {
            let drawing = drawing(&sample::prediction(), units).unwrap();
            checks::texts_are_clear(&drawing);
            let count = |name: &str| drawing.texts().iter().filter(|(text, _)| *text == name).count();
            for name in ["feed", "entry", "radio", "entry choke", "radiator", "entry rod"] {
                assert!(count(name) >= 2, "{name}");
            }
        }
    }

    #[test]
    fn values_between_points_are_linear_and_beyond_the_end_are_the_end() {
        let prediction = sample::prediction();
        let coax = coax(&prediction.frequencies[0]).unwrap();
        let (a, b) = (&coax.points[10], &coax.points[11]);
        let middle = at(coax, 0.5 * (a.distance_m + b.distance_m)).unwrap();
        assert!((middle.current_a - 0.5 * (a.current_a + b.current_a)).norm() < 1e-12);
        assert_eq!(at(coax, 1e6).unwrap().distance_m, coax.points.last().unwrap().distance_m);
        assert!(at(coax, -1.0).is_none());
    }
}
