//! The choice of choke and place in one picture: every candidate's worst case against place, and the picks in order.

use super::axes::{Frame, Scale};
use super::drawing::{Anchor, Area, Drawing, EM, PATTERNS, SMALL, Words, fitted, wrapped};
use super::map;
use crate::outcome::place::{OverPlace, PlaceOutcome, PlacePick};
use crate::output::figures;
use crate::output::place_text::worst_words;
use crate::output::{OutputError, Units};

/// Left and right edge of the boxes.
const EDGES: [f64; 2] = [104.0, 1164.0];
/// Top and bottom of the boxes: current, standing-wave ratio, heat.
const BOXES: [[f64; 2]; 3] = [[176.0, 366.0], [404.0, 564.0], [602.0, 762.0]];
/// Rows of the list of picks at most.
const PICKS: usize = 5;
/// Where the columns of the list begin, and the room of each.
const COLUMNS: [(f64, f64); 5] = [(0.0, 30.0), (34.0, 136.0), (174.0, 150.0), (328.0, 280.0), (614.0, 446.0)];
/// Between two lines of the list.
const LINE: f64 = 22.0;

/// The worst over variants and frequencies at each place, for one choke.
pub(super) fn worst_line(values: &OverPlace<f64>, choke: usize, places: usize) -> Vec<f64> {
    let mut most = vec![0.0_f64; places];
    for plane in values.iter().filter_map(|v| v.get(choke)) {
        for row in plane {
            for (largest, value) in most.iter_mut().zip(row) {
                *largest = largest.max(*value);
            }
        }
    }
    most
}

/// The picture.
///
/// # Errors
/// [`OutputError::Nothing`] for a study without candidates or places.
pub(super) fn drawing(place: &PlaceOutcome) -> Result<Drawing, OutputError> {
    if place.chokes.is_empty() || place.places_m.is_empty() {
        return Err(OutputError::Nothing {
            what: "the picture of the choice".into(),
            needs: "candidates and places".into(),
        });
    }
    let rows: Vec<[Vec<String>; 5]> = place.picks.iter().take(PICKS).enumerate().map(row).collect();
    let lines = rows.iter().map(lines_of).sum::<usize>();
    let mut drawing = Drawing::new(898.0 + LINE * lines as f64, &place.station, &place.why);
    let x = Scale::linear([0.0, place.coax_length_m], EDGES[0], EDGES[1]);
    let lines = |values: &OverPlace<f64>| -> Vec<Vec<f64>> {
        (0..place.chokes.len().min(PATTERNS.len())).map(|c| worst_line(values, c, place.places_m.len())).collect()
    };
    key(&mut drawing, place);
    let without = |values: &Vec<Vec<f64>>| values.iter().flatten().copied().fold(0.0, f64::max);

    let current: Vec<Vec<f64>> =
        lines(&place.entry_current_a).iter().map(|l| l.iter().map(|v| 1e3 * v).collect()).collect();
    let bare = 1e3 * without(&place.without.entry_current_a);
    let limit = 1e3 * place.limits.entry_current_a;
    let y =
        Scale::logarithmic(decades(current.iter().flatten().copied().chain([bare, limit])), BOXES[0][1], BOXES[0][0]);
    panel(&mut drawing, place, Frame { x, y }, "into the shack, mA", (&current, Some(bare), Some(limit)));

    let swr = lines(&place.swr);
    let bare = without(&place.without.swr).min(100.0);
    let most = swr.iter().flatten().copied().filter(|s| s.is_finite()).fold(place.limits.swr, f64::max);
    let top = [2.0, 3.0, 5.0, 10.0, 20.0, 50.0].into_iter().find(|t| *t > most).unwrap_or(100.0);
    let y = Scale::logarithmic([1.0, top], BOXES[1][1], BOXES[1][0]);
    panel(&mut drawing, place, Frame { x, y }, "SWR", (&swr, Some(bare), Some(place.limits.swr)));

    let heat = lines(&place.choke_w);
    let y = Scale::linear(super::axes::run_of(heat.iter().flatten().copied(), true), BOXES[2][1], BOXES[2][0]);
    panel(&mut drawing, place, Frame { x, y }, "heat, W", (&heat, None, None));

    let last = Frame { x, y };
    last.below(&mut drawing, "place of the choke: distance along the coax from the feed point, m", 12, true);
    Frame { x, y: Scale::linear([0.0, 1.0], BOXES[0][1], BOXES[0][0]) }.feet_above(&mut drawing, "feet", 12);
    list(&mut drawing, &rows, BOXES[2][1] + 80.0);
    Ok(drawing)
}

/// Whole decades, or halves of them, around all values; three decades at most, from the top.
fn decades(values: impl Iterator<Item = f64>) -> [f64; 2] {
    let (low, high) =
        values.filter(|v| v.is_finite() && *v > 0.0).fold((f64::INFINITY, 0.0_f64), |(l, h), v| (l.min(v), h.max(v)));
    if low > high {
        return [1.0, 10.0];
    }
    let step = |v: f64, up: bool| {
        let power = 10f64.powf(v.log10().floor());
        let part = v / power;
        let steps = [1.0, 2.0, 5.0, 10.0];
        let found = if up { steps.iter().find(|s| **s >= part) } else { steps.iter().rfind(|s| **s <= part) };
        power * found.copied().unwrap_or(1.0)
    };
    let top = step(high * 1.02, true);
    [step(low, false).max(top / 1000.0).min(top / 2.0), top]
}

fn key(drawing: &mut Drawing, place: &PlaceOutcome) {
    let room = (EDGES[1] - EDGES[0]) / (PATTERNS.len() + 1) as f64;
    let y = 92.0;
    let names = place.chokes.iter().take(PATTERNS.len()).map(|c| c.name.as_str());
    for (index, name) in names.enumerate() {
        let x = EDGES[0] + room * index as f64;
        drawing.patterned(&[[x, y], [x + 44.0, y]], 2.25, 0.0, PATTERNS[index]);
        drawing.words(Words::centred([x + 50.0, y], SMALL, Anchor::Start, fitted(name, SMALL, room - 58.0)));
    }
    let x = EDGES[0] + room * place.chokes.len().min(PATTERNS.len()) as f64;
    drawing.line(&[[x, y], [x + 44.0, y]], 3.0, 0.6);
    drawing.words(Words::centred([x + 50.0, y], SMALL, Anchor::Start, fitted("no choke", SMALL, room - 52.0)));
    let reachable = if place.reachable_m.is_empty() { "" } else { "; bar below a box: within reach" };
    let note = format!(
        "Worst over all frequencies and variants; grey: window of the pick, ring: the pick; bold: limit; dashed upright: entry{reachable}"
    );
    drawing.words(Words::centred(
        [EDGES[0], y + 22.0],
        SMALL,
        Anchor::Start,
        fitted(&note, SMALL, EDGES[1] - EDGES[0]),
    ));
}

fn panel(
    drawing: &mut Drawing,
    place: &PlaceOutcome,
    frame: Frame,
    title: &str,
    (lines, without, limit): (&[Vec<f64>], Option<f64>, Option<f64>),
) {
    let area = frame.area();
    if let Some(pick) = place.picks.first() {
        let [from, to] = pick.window_m.map(|m| frame.x.at(m).clamp(area.left, area.right));
        drawing.rectangle(Area::new(from, area.top, to.max(from + 2.0).min(area.right), area.bottom), 0.86);
    }
    frame.left(drawing, title, 4);
    let level = |drawing: &mut Drawing, value: f64, width: f64, grey: f64| {
        let y = frame.y.at(value);
        if (area.top..=area.bottom).contains(&y) {
            drawing.line(&[[area.left, y], [area.right, y]], width, grey);
        }
    };
    if let Some(value) = without {
        level(drawing, value, 3.0, 0.6);
    }
    if let Some(value) = limit {
        level(drawing, value, 3.0, 0.0);
    }
    map::upright(drawing, &frame, place.entry_at_m, 1.4);
    for (index, line) in lines.iter().enumerate() {
        let values: Vec<_> = place.places_m.iter().copied().zip(line.iter().copied().map(Some)).collect();
        for piece in frame.pieces(&values) {
            drawing.patterned(&piece, 2.0, 0.0, PATTERNS[index]);
        }
    }
    if let Some(pick) = place.picks.first() {
        let choke = place.chokes.iter().position(|c| c.name == pick.choke);
        if let Some(value) = choke.and_then(|c| lines.get(c)).and_then(|l| l.get(nearest(&place.places_m, pick.at_m))) {
            drawing.ring(frame.spot(pick.at_m, *value), 6.0, 2.0);
        }
    }
    frame.outline(drawing);
    reachable_bar(drawing, place, frame.x, area.bottom + 1.0);
}

/// The stretches of coax a person can get at as bars along it; nothing where all of it can be reached.
pub(super) fn reachable_bar(drawing: &mut Drawing, place: &PlaceOutcome, x: Scale, top: f64) {
    for stretch in &place.reachable_m {
        let [from, to] = stretch.map(|m| x.at(m).clamp(x.start, x.end));
        drawing.rectangle(Area::new(from, top, to.max(from + 1.0), top + 4.0), 0.45);
    }
}

/// Index of the place nearest to a distance.
pub(super) fn nearest(places_m: &[f64], at_m: f64) -> usize {
    let away = |p: &f64| (p - at_m).abs();
    let found = places_m.iter().enumerate().min_by(|a, b| away(a.1).total_cmp(&away(b.1)));
    found.map_or(0, |(index, _)| index)
}

/// The cells of a pick, each in as many lines as its column needs.
fn row((index, pick): (usize, &PlacePick)) -> [Vec<String>; 5] {
    let [from, to] = pick.window_m;
    let both = |say: &dyn Fn(Units) -> String| format!("{} ({})", say(Units::Metres), say(Units::Feet));
    let cells = [
        format!("{}", index + 1),
        pick.choke.clone(),
        both(&|units| figures::distance(pick.at_m, units)),
        both(&|units| figures::distances(from, to, units)),
        worst_words(&pick.worst),
    ];
    let mut rooms = COLUMNS.iter().map(|c| c.1);
    cells.map(|cell| wrapped(&cell, EM, rooms.next().unwrap_or(EM), 4))
}

fn lines_of(row: &[Vec<String>; 5]) -> usize {
    row.iter().map(Vec::len).max().unwrap_or(1)
}

/// The picks in order, with their windows and what comes closest to its limit.
fn list(drawing: &mut Drawing, rows: &[[Vec<String>; 5]], top: f64) {
    let heads = ["", "choke", "at", "window", "nearest to its limit, or furthest beyond it"];
    for ((x, _), head) in COLUMNS.into_iter().zip(heads) {
        drawing.write([EDGES[0] + x, top], SMALL, Anchor::Start, head);
    }
    drawing.line(&[[EDGES[0], top + 7.0], [EDGES[1], top + 7.0]], 0.8, 0.3);
    let mut y = top + 28.0;
    for row in rows {
        for ((x, _), cell) in COLUMNS.into_iter().zip(row) {
            for (index, line) in cell.iter().enumerate() {
                drawing.write([EDGES[0] + x, y + LINE * index as f64], EM, Anchor::Start, line.as_str());
            }
        }
        y += LINE * lines_of(row) as f64;
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::super::checks;
    use super::*;
    use crate::output::sample_studies;

    #[test]
    fn the_choice_is_clear_and_lists_its_picks() {
        let drawing = drawing(&sample_studies::place()).unwrap();
        checks::texts_are_clear(&drawing);
        assert!(
            drawing
                .texts()
                .iter()
                .any(|(text, _)| text.starts_with("current into the shack 82 mA of 100 mA at 7 MHz, wet"))
        );
    }

    #[test]
    fn nothing_is_cut_off_and_windows_are_in_metres_and_feet() {
        let mut place = sample_studies::place();
        place.why = format!("{}; and this is only the first half of a long reason", place.why).repeat(2);
        place.picks[1].worst.variant = "the line on the fence and the river up to the hut".into();
        let bars = |drawing: &Drawing| {
            let bar = |mark: &super::super::drawing::Mark| matches!(mark, super::super::drawing::Mark::Fill { grey, .. } if *grey == 0.45);
            drawing.marks.iter().filter(|m| bar(m)).count()
        };
        assert_eq!(bars(&super::drawing(&place).unwrap()), 0);
        place.reachable_m = vec![[0.0, 2.0], [4.0, 6.5]];
        let drawing = super::drawing(&place).unwrap();
        checks::texts_are_clear(&drawing);
        assert!(!drawing.texts().iter().any(|(text, _)| text.contains('…')), "{:?}", drawing.texts());
        assert!(drawing.texts().iter().any(|(text, _)| *text == "5.40 to 6.10 m (17.7 to 20.0 ft)"));
        assert_eq!(bars(&drawing), 3 * 2, "a bar a stretch below every box");
    }

    #[test]
    fn the_worst_line_is_the_largest_over_everything() {
        let place = sample_studies::place();
        let line = worst_line(&place.swr, 2, place.places_m.len());
        let largest = place.swr.iter().flat_map(|v| v[2].iter().map(|f| f[40])).fold(0.0, f64::max);
        assert_eq!(line[40], largest);
    }

    #[test]
    fn axes_of_ratios_end_on_round_values() {
        assert_eq!(decades([12.0, 310.0].into_iter()), [10.0, 500.0]);
        assert_eq!(decades([1e-9, 310.0].into_iter()), [0.5, 500.0]);
        assert_eq!(decades(std::iter::empty()), [1.0, 10.0]);
    }
}
