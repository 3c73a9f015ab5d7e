//! Resistance, reactance and standing-wave ratio against frequency.
//!
//! Frequencies that run on are drawn on one axis with the bands in grey. Frequencies that lie only within bands are
//! drawn band beside band, each on its own stretch of the axis, because one axis would squeeze every band to a line.

use super::axes::{Frame, Scale, run_of, tick_text};
use super::drawing::{Anchor, Area, Drawing, EM, PATTERNS, Pattern, SMALL, Words};
use crate::outcome::curve::{CurveBand, CurveOutcome, CurvePoint};
use crate::output::{OutputError, figures};

/// Left and right edge of the boxes.
const EDGES: [f64; 2] = [104.0, 1160.0];
/// Between two bands drawn beside each other.
const GUTTER: f64 = 16.0;
/// Top and bottom of the boxes: feed point, radio, standing-wave ratio.
const BOXES: [[f64; 2]; 3] = [[136.0, 356.0], [416.0, 636.0], [696.0, 916.0]];
/// A stretch narrower than this has its numbers in smaller text.
const NARROW: f64 = 90.0;
/// Fewer points than this in a stretch are marked one by one.
const MARKED_BELOW: usize = 8;

/// A run of frequencies with its share of the axis.
struct Stretch<'a> {
    x: Scale,
    points: Vec<&'a CurvePoint>,
}

/// The picture of three boxes.
///
/// # Errors
/// [`OutputError::Nothing`] for a curve without points.
pub(super) fn drawing(curve: &CurveOutcome) -> Result<Drawing, OutputError> {
    if curve.points.is_empty() {
        return Err(OutputError::Nothing {
            what: "the picture of the match".into(),
            needs: "at least one frequency".into(),
        });
    }
    let below = format!("Feed point, what the radio sees, and standing-wave ratio against {} ohm", curve.reference_ohm);
    let mut drawing = Drawing::new(980.0, &curve.station, &below);
    let stretches = stretches(curve);
    let heads = ["at the feed point, ohm", "at the radio, ohm"];
    let values: [fn(&CurvePoint) -> num_complex::Complex64; 2] = [|p| p.feed_ohm, |p| p.radio_ohm];
    for ((head, value), [top, bottom]) in heads.into_iter().zip(values).zip(BOXES) {
        let both = curve.points.iter().flat_map(|p| [value(p).re, value(p).im]);
        let y = Scale::linear(run_of(both, true), bottom, top);
        boxes(&mut drawing, curve, &stretches, y, head);
        draw_line(&mut drawing, &stretches, y, &|p| value(p).re, PATTERNS[0]);
        draw_line(&mut drawing, &stretches, y, &|p| value(p).im, PATTERNS[4]);
        zero(&mut drawing, &stretches, y);
        key(&mut drawing, top - 12.0);
    }
    let [top, bottom] = BOXES[2];
    let most = curve.points.iter().map(|p| p.swr).filter(|s| s.is_finite()).fold(1.0, f64::max);
    // above the limit as well: a line on the frame would not be seen
    let limit = curve.swr_limit.unwrap_or(1.0);
    let most = [2.0, 3.0, 5.0, 10.0, 20.0, 50.0].into_iter().find(|m| *m >= most && *m > limit).unwrap_or(100.0);
    let y = Scale::logarithmic([1.0, most], bottom, top);
    boxes(&mut drawing, curve, &stretches, y, "standing-wave ratio");
    draw_line(&mut drawing, &stretches, y, &|p| p.swr.min(1e6), PATTERNS[0]);
    if let Some(limit) = curve.swr_limit.filter(|l| *l < most && *l > 1.0) {
        let height = y.at(limit);
        for stretch in &stretches {
            drawing.patterned(&[[stretch.x.start, height], [stretch.x.end, height]], 1.5, 0.0, PATTERNS[2]);
        }
        drawing.write([EDGES[1], top - 8.0], SMALL, Anchor::End, format!("dotted: limit {}", figures::swr(limit)));
    }
    below_axis(&mut drawing, curve, &stretches, bottom);
    Ok(drawing)
}

/// Band beside band where all points lie in bands and the bands leave most of the run empty; else one stretch.
fn stretches(curve: &CurveOutcome) -> Vec<Stretch<'_>> {
    let (first, last) = (curve.points[0].frequency_hz, curve.points[curve.points.len() - 1].frequency_hz);
    let in_band = |p: &CurvePoint| curve.bands.iter().position(|b| (b.from_hz..=b.to_hz).contains(&p.frequency_hz));
    let covered: f64 = curve.bands.iter().map(|b| b.to_hz - b.from_hz).sum();
    let apart =
        curve.bands.len() > 1 && curve.points.iter().all(|p| in_band(p).is_some()) && covered < 0.5 * (last - first);
    if !apart {
        let spare = if last > first { 0.0 } else { 0.005 * first };
        let x = Scale::linear([(first - spare) / 1e6, (last + spare) / 1e6], EDGES[0], EDGES[1]);
        return vec![Stretch { x, points: curve.points.iter().collect() }];
    }
    let wide = (EDGES[1] - EDGES[0] + GUTTER) / curve.bands.len() as f64;
    let stretch = |(index, band): (usize, &CurveBand)| {
        let start = EDGES[0] + wide * index as f64;
        let spare = if band.to_hz > band.from_hz { 0.0 } else { 0.005 * band.from_hz };
        let run = [(band.from_hz - spare) / 1e6, (band.to_hz + spare) / 1e6];
        let points = curve.points.iter().filter(|p| in_band(p) == Some(index)).collect();
        Stretch { x: Scale::linear(run, start, start + wide - GUTTER), points }
    };
    curve.bands.iter().enumerate().map(stretch).collect()
}

fn boxes(drawing: &mut Drawing, curve: &CurveOutcome, stretches: &[Stretch], y: Scale, title: &str) {
    for (index, stretch) in stretches.iter().enumerate() {
        let frame = Frame { x: stretch.x, y };
        if stretches.len() == 1 {
            for band in &curve.bands {
                let [left, right] = [band.from_hz, band.to_hz].map(|f| stretch.x.at(f / 1e6).clamp(EDGES[0], EDGES[1]));
                if right > left {
                    drawing.rectangle(Area::new(left, y.end, right, y.start), 0.9);
                }
            }
        }
        if index == 0 {
            frame.left(drawing, title, 5);
        } else {
            for tick in y.ticks(5) {
                drawing.line(&[[stretch.x.start, y.at(tick)], [stretch.x.end, y.at(tick)]], 0.7, 0.86);
            }
        }
        for tick in ticks(stretch, stretches.len()) {
            let x = frame.x.at(tick);
            drawing.line(&[[x, y.start], [x, y.start + 6.0]], 1.25, 0.0);
        }
        frame.outline(drawing);
    }
}

fn draw_line(
    drawing: &mut Drawing,
    stretches: &[Stretch],
    y: Scale,
    value: &dyn Fn(&CurvePoint) -> f64,
    pattern: Pattern,
) {
    for stretch in stretches {
        let frame = Frame { x: stretch.x, y };
        let values: Vec<_> = stretch.points.iter().map(|p| (p.frequency_hz / 1e6, Some(value(p)))).collect();
        for piece in frame.pieces(&values) {
            drawing.patterned(&piece, 2.0, 0.0, pattern);
        }
        if values.len() < MARKED_BELOW {
            for (x, height) in &values {
                let spot = frame.spot(*x, height.unwrap_or(f64::NAN));
                if frame.area().grown(0.5).holds(&Area::new(spot[0], spot[1], spot[0], spot[1])) {
                    drawing.disc(spot, 3.6, 0.0);
                    if !pattern.is_empty() {
                        drawing.disc(spot, 2.2, 1.0);
                    }
                }
            }
        }
    }
}

fn zero(drawing: &mut Drawing, stretches: &[Stretch], y: Scale) {
    if y.from < 0.0 && y.to > 0.0 {
        for stretch in stretches {
            drawing.line(&[[stretch.x.start, y.at(0.0)], [stretch.x.end, y.at(0.0)]], 1.0, 0.4);
        }
    }
}

fn key(drawing: &mut Drawing, y: f64) {
    for (x, pattern, said) in [(860.0, PATTERNS[0], "resistance"), (1012.0, PATTERNS[4], "reactance")] {
        drawing.patterned(&[[x, y], [x + 46.0, y]], 2.0, 0.0, pattern);
        drawing.words(Words::centred([x + 54.0, y], SMALL, Anchor::Start, said));
    }
}

/// Ticks of a stretch: round frequencies on one axis; the edges where bands stand beside each other, and the frequency itself
/// where there is only one.
fn ticks(stretch: &Stretch, stretches: usize) -> Vec<f64> {
    match stretch.points.as_slice() {
        _ if stretches == 1 => stretch.x.ticks(12),
        [only] => vec![only.frequency_hz / 1e6],
        _ => vec![stretch.x.from, stretch.x.to],
    }
}

fn below_axis(drawing: &mut Drawing, curve: &CurveOutcome, stretches: &[Stretch], bottom: f64) {
    for stretch in stretches {
        let ticks = ticks(stretch, stretches.len());
        for (index, tick) in ticks.iter().enumerate() {
            let (anchor, text) = match (stretches.len(), index) {
                (1, _) => (Anchor::Middle, tick_text(*tick, &ticks)),
                _ if ticks.len() == 1 => (Anchor::Middle, figures::megahertz(1e6 * tick)),
                (_, 0) => (Anchor::Start, figures::megahertz(1e6 * tick)),
                _ => (Anchor::End, figures::megahertz(1e6 * tick)),
            };
            let em = if stretch.x.end - stretch.x.start < NARROW { SMALL - 2.0 } else { SMALL };
            drawing.write([stretch.x.at(*tick), bottom + 21.0], em, anchor, text);
        }
    }
    drawing.write([0.5 * (EDGES[0] + EDGES[1]), bottom + 44.0], EM, Anchor::Middle, "frequency, MHz");
    band_names(drawing, curve, stretches);
}

/// Above the first box: each band over its stretch or its grey, where there is room.
fn band_names(drawing: &mut Drawing, curve: &CurveOutcome, stretches: &[Stretch]) {
    let y = BOXES[0][0] - 34.0;
    let mut end = f64::NEG_INFINITY;
    for (index, band) in curve.bands.iter().enumerate() {
        let x = match stretches {
            [one] => 0.5 * (one.x.at(band.from_hz / 1e6) + one.x.at(band.to_hz / 1e6)),
            many => 0.5 * (many[index].x.start + many[index].x.end),
        };
        let words = Words::new([x, y], EM, Anchor::Middle, band.name.as_str());
        let area = words.extent();
        if (EDGES[0]..=EDGES[1]).contains(&x) && area.left > end + 4.0 && area.right < 1195.0 {
            end = area.right;
            drawing.words(words);
        }
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::super::checks;
    use super::*;
    use crate::output::sample;

    #[test]
    fn bands_stand_beside_each_other_and_a_whole_run_on_one_axis() {
        let bands = CurveOutcome::of(&sample::prediction(), 50.0, Some(2.0));
        assert_eq!(stretches(&bands).len(), 5);
        checks::texts_are_clear(&drawing(&bands).unwrap());
        let whole = sample::curve();
        assert_eq!(stretches(&whole).len(), 1);
        checks::texts_are_clear(&drawing(&whole).unwrap());
        let single = CurveOutcome { points: whole.points[..1].to_vec(), bands: vec![], ..whole };
        checks::texts_are_clear(&drawing(&single).unwrap());
    }

    #[test]
    fn the_limit_is_seen_where_the_axis_would_end_on_it() {
        let mut curve = sample::curve();
        curve.points.iter_mut().for_each(|p| p.swr = 1.9);
        for limit in [2.0, 3.0, 5.0] {
            curve.swr_limit = Some(limit);
            let said = format!("dotted: limit {}", figures::swr(limit));
            let drawing = drawing(&curve).unwrap();
            assert!(drawing.texts().iter().any(|(text, _)| *text == said), "{said}");
        }
    }

    #[test]
    fn no_points_are_said() {
        let empty = CurveOutcome { points: vec![], ..sample::curve() };
        assert!(drawing(&empty).is_err());
    }
}
