//! What a length does: feed point, standing-wave ratio and current into the shack against one scanned length.

use super::axes::{Frame, Scale, run_of};
use super::drawing::{Anchor, Area, Drawing, PATTERNS, SMALL, Words, fitted};
use crate::outcome::cut::{CutOutcome, OverLength};
use crate::output::OutputError;
use crate::output::bands::{self, Group};

/// Left and right edge of the boxes.
const EDGES: [f64; 2] = [104.0, 1164.0];
/// Top and bottom of the boxes: resistance, reactance, standing-wave ratio, current.
const BOXES: [[f64; 2]; 4] = [[176.0, 326.0], [352.0, 502.0], [528.0, 688.0], [714.0, 874.0]];

/// A quantity against length, m.
type Line = Vec<(f64, Option<f64>)>;

/// One picture for every six bands, in the order of the file.
///
/// # Errors
/// [`OutputError::Nothing`] for a study without lengths, or of two lengths (which is a map).
pub(super) fn drawings(cut: &CutOutcome) -> Result<Vec<Drawing>, OutputError> {
    if cut.lengths_m.len() < 2 || cut.second_lengths_m.is_some() {
        return Err(OutputError::Nothing {
            what: "the picture over length".into(),
            needs: "two lengths or more of one conductor".into(),
        });
    }
    let groups = bands::of_axes(&cut.frequencies_hz, &cut.bands);
    Ok(groups.chunks(PATTERNS.len()).map(|groups| drawing(cut, groups)).collect())
}

/// A quantity of a band against length: its worst over edges and variants.
fn worst(cut: &CutOutcome, group: &Group, values: &OverLength<f64>, scale: f64) -> Line {
    let cases = || (0..cut.variants.len()).flat_map(|v| group.members.iter().map(move |f| (v, *f)));
    let most = |l: usize| cases().filter_map(|(v, f)| values.get(v, f, l, 0)).copied().fold(0.0_f64, f64::max);
    cut.lengths_m.iter().enumerate().map(|(l, length_m)| (*length_m, Some(scale * most(l)))).collect()
}

/// The feed point in the middle of a band, nominal.
fn feed(cut: &CutOutcome, group: &Group, part: fn(num_complex::Complex64) -> f64) -> Line {
    let middle = group.members[group.members.len() / 2];
    let value = |l: usize| cut.feed_ohm.get(0, middle, l, 0).map(|z| part(*z));
    cut.lengths_m.iter().enumerate().map(|(l, length_m)| (*length_m, value(l))).collect()
}

fn drawing(cut: &CutOutcome, groups: &[Group]) -> Drawing {
    let mut drawing = Drawing::new(960.0, &cut.station, &cut.why);
    let ends = [cut.lengths_m[0], cut.lengths_m[cut.lengths_m.len() - 1]];
    let x = Scale::linear(ends, EDGES[0], EDGES[1]);
    key(&mut drawing, groups);
    let curves: Vec<[Line; 4]> = groups
        .iter()
        .map(|g| {
            let current = worst(cut, g, &cut.entry_current_a, 1e3);
            [feed(cut, g, |z| z.re), feed(cut, g, |z| z.im), worst(cut, g, &cut.swr, 1.0), current]
        })
        .collect();
    let limits = [None, None, Some(cut.limits.swr), Some(1e3 * cut.limits.entry_current_a)];
    let titles = ["feed R, ohm", "feed X, ohm", "SWR", "to the shack, mA"];
    for (index, [top, bottom]) in BOXES.into_iter().enumerate() {
        let values = || curves.iter().flat_map(|c| c[index].iter().filter_map(|v| v.1)).filter(|v| v.is_finite());
        let y = if index == 2 {
            let most = values().fold(cut.limits.swr, f64::max);
            let end = [2.0, 3.0, 5.0, 10.0, 20.0, 50.0].into_iter().find(|t| *t > most).unwrap_or(100.0);
            Scale::logarithmic([1.0, end], bottom, top)
        } else {
            Scale::linear(run_of(values().chain(limits[index]), true), bottom, top)
        };
        let lines: Vec<&Line> = curves.iter().map(|c| &c[index]).collect();
        panel(&mut drawing, cut, Frame { x, y }, titles[index], (&lines, limits[index], index == 3));
    }
    present(&mut drawing, cut, x);
    let first = Frame { x, y: Scale::linear([0.0, 1.0], BOXES[0][1], BOXES[0][0]) };
    first.feet_above(&mut drawing, "feet", 12);
    let last = Frame { x, y: Scale::linear([0.0, 1.0], BOXES[3][1], BOXES[3][0]) };
    last.below(&mut drawing, &format!("length of {}, m; {} moves", cut.conductor, cut.moving_end), 12, true);
    drawing
}

fn key(drawing: &mut Drawing, groups: &[Group]) {
    let room = (EDGES[1] - EDGES[0]) / PATTERNS.len() as f64;
    let y = 90.0;
    for (index, group) in groups.iter().enumerate() {
        let x = EDGES[0] + room * index as f64;
        drawing.patterned(&[[x, y], [x + 48.0, y]], 2.25, 0.0, PATTERNS[index]);
        drawing.words(Words::centred([x + 55.0, y], SMALL, Anchor::Start, fitted(&group.name, SMALL, room - 62.0)));
    }
    let note = "Feed point nominal in mid-band; SWR and current worst of edges and variants. Grey: window of the pick; bold: limit; \
                triangles: lengths to avoid";
    drawing.words(Words::centred([EDGES[0], y + 22.0], SMALL, Anchor::Start, fitted(note, SMALL, EDGES[1] - EDGES[0])));
}

fn panel(
    drawing: &mut Drawing,
    cut: &CutOutcome,
    frame: Frame,
    title: &str,
    (lines, limit, avoid): (&[&Line], Option<f64>, bool),
) {
    let area = frame.area();
    if let Some(pick) = cut.picks.first() {
        let [from, to] = pick.window_m.map(|m| frame.x.at(m).clamp(area.left, area.right));
        drawing.rectangle(Area::new(from, area.top, to.max(from + 2.0).min(area.right), area.bottom), 0.86);
    }
    frame.left(drawing, title, 4);
    if frame.y.from < 0.0 {
        let y = frame.y.at(0.0);
        drawing.line(&[[area.left, y], [area.right, y]], 1.0, 0.4);
    }
    if let Some(limit) = limit {
        let y = frame.y.at(limit);
        if (area.top..=area.bottom).contains(&y) {
            drawing.line(&[[area.left, y], [area.right, y]], 3.0, 0.0);
        }
    }
    for (index, line) in lines.iter().enumerate() {
        for piece in frame.pieces(line) {
            drawing.patterned(&piece, 2.0, 0.0, PATTERNS[index]);
        }
    }
    if avoid {
        for length in &cut.lengths_to_avoid {
            let x = frame.x.at(length.length_m);
            if (area.left..=area.right).contains(&x) {
                drawing.fill(
                    vec![[x, area.bottom - 2.0], [x - 6.0, area.bottom - 13.0], [x + 6.0, area.bottom - 13.0]],
                    0.0,
                );
            }
        }
    }
    frame.outline(drawing);
}

/// The length the file has, between the first two boxes.
fn present(drawing: &mut Drawing, cut: &CutOutcome, x: Scale) {
    let across = x.at(cut.present_length_m);
    let [from, to] = [BOXES[0][1], BOXES[1][0]];
    if (x.start..=x.end).contains(&across) {
        drawing.line(&[[across, from], [across, to]], 2.4, 0.0);
        let (side, anchor) = if across > 1000.0 { (-7.0, Anchor::End) } else { (7.0, Anchor::Start) };
        drawing.words(Words::centred([across + side, 0.5 * (from + to)], SMALL, anchor, "length now"));
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::super::checks;
    use super::*;
    use crate::output::sample_studies;

    #[test]
    fn the_picture_is_clear_and_two_lengths_are_refused() {
        let drawings = drawings(&sample_studies::cut()).unwrap();
        assert_eq!(drawings.len(), 1);
        checks::texts_are_clear(&drawings[0]);
        assert!(super::drawings(&sample_studies::cut_two()).is_err());
    }

    #[test]
    fn more_bands_than_patterns_go_to_a_second_picture() {
        let mut cut = sample_studies::cut();
        for (index, band) in cut.bands.iter_mut().enumerate() {
            *band = Some(format!("band {index}"));
        }
        assert_eq!(drawings(&cut).unwrap().len(), 3);
    }

    #[test]
    fn the_worst_of_a_band_is_over_edges_and_variants() {
        let cut = sample_studies::cut();
        let group = &bands::of_axes(&cut.frequencies_hz, &cut.bands)[1];
        let expected = (0..2)
            .flat_map(|v| (3..6).map(move |f| (v, f)))
            .filter_map(|(v, f)| cut.swr.get(v, f, 7, 0))
            .fold(0.0_f64, |m, s| m.max(*s));
        assert_eq!(worst(&cut, group, &cut.swr, 1.0)[7].1, Some(expected));
    }
}
