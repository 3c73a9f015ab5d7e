//! Maps of what a choke does at every place on every frequency: current, volts, watts; nominal and worst.

use super::axes::{Frame, Scale, tick_text};
use super::drawing::{Anchor, Area, Drawing, EM, SMALL, Words, fitted};
use super::map::{self, Grid, Levels};
use super::place_choice::reachable_bar;
use crate::outcome::place::{OverPlace, PlaceOutcome, PlacePick};
use crate::output::OutputError;
use crate::output::bands::{self, Group};
use crate::output::figures::{self, FEET_PER_METRE};

/// Left and right edge of the maps.
const EDGES: [f64; 2] = [126.0, 1164.0];
/// Height of one map at most.
const TALLEST: f64 = 440.0;
/// Height of a band, of a single frequency, and of what separates them.
const ROWS: [f64; 3] = [66.0, 30.0, 7.0];
/// Above every map: its title, and under that its marks.
const ABOVE: f64 = 76.0;

/// Values over `[frequency][place]`.
type Plane = Vec<Vec<Option<f64>>>;

/// One map of a picture.
struct Panel {
    title: String,
    values: Plane,
}

/// How values are said and where they end.
struct Say<'a> {
    value: &'a dyn Fn(f64) -> String,
    limit: Option<f64>,
    key: &'a str,
}

/// Current going on into the shack with one choke, nominal and worst over the variants.
///
/// # Errors
/// All three: [`OutputError::Misfit`] when an array does not fit its axes.
pub(super) fn current(place: &PlaceOutcome, choke: usize) -> Result<Drawing, OutputError> {
    let values = &optional(&place.entry_current_a);
    let below = format!(
        "Current on the outside of the coax going on into the shack, RMS, with {} at each place",
        choke_name(place, choke)
    );
    let say = Say {
        value: &|v| figures::round(&figures::amperes(v)),
        limit: Some(place.limits.entry_current_a),
        key: "current",
    };
    picture(place, choke, &below, nominal_and_worst(place, values, choke, ""), &say)
}

/// Volts of the shield at the radio and across the choke, each nominal and worst over the variants.
pub(super) fn volts(place: &PlaceOutcome, choke: usize) -> Result<Drawing, OutputError> {
    let below = format!("Voltage, RMS, with {} at each place", choke_name(place, choke));
    let mut panels = nominal_and_worst(place, &place.end_voltage_v, choke, "outside of the coax at the radio, ");
    panels.extend(nominal_and_worst(place, &optional(&place.choke_v), choke, "across the choke, "));
    picture(
        place,
        choke,
        &below,
        panels,
        &Say { value: &|v| figures::round(&figures::volts(v)), limit: None, key: "voltage" },
    )
}

/// Watts the choke turns into heat, nominal and worst over the variants.
pub(super) fn watts(place: &PlaceOutcome, choke: usize) -> Result<Drawing, OutputError> {
    let below = format!(
        "Heat in {} at each place, of {} into the line",
        choke_name(place, choke),
        figures::watts(place.power_w)
    );
    let panels = nominal_and_worst(place, &optional(&place.choke_w), choke, "");
    picture(
        place,
        choke,
        &below,
        panels,
        &Say { value: &|v| figures::round(&figures::watts(v)), limit: None, key: "heat" },
    )
}

fn choke_name(place: &PlaceOutcome, choke: usize) -> String {
    place.chokes.get(choke).map_or("the choke".into(), |c| format!("choke \"{}\"", c.name))
}

fn optional(values: &OverPlace<f64>) -> OverPlace<Option<f64>> {
    let row = |places: &Vec<f64>| places.iter().copied().map(Some).collect();
    let plane = |f: &Vec<Vec<f64>>| f.iter().map(row).collect();
    values.iter().map(|chokes| chokes.iter().map(plane).collect()).collect()
}

/// Two maps of a quantity, or one where there is one variant; `what` stands before "nominal" and "worst of ...".
fn nominal_and_worst(place: &PlaceOutcome, values: &OverPlace<Option<f64>>, choke: usize, what: &str) -> Vec<Panel> {
    let nominal = values.first().and_then(|v| v.get(choke)).cloned().unwrap_or_default();
    let mut panels = vec![Panel { title: format!("{what}nominal"), values: nominal }];
    if place.variants.len() > 1 {
        let title = format!("{what}worst of {}", place.variants.join(", "));
        panels.push(Panel { title, values: worst(values, choke) });
    }
    panels
}

/// Largest over the variants.
fn worst(values: &OverPlace<Option<f64>>, choke: usize) -> Plane {
    let mut planes = values.iter().filter_map(|v| v.get(choke));
    let mut most = planes.next().cloned().unwrap_or_default();
    for plane in planes {
        for (row, other) in most.iter_mut().zip(plane) {
            for (value, more) in row.iter_mut().zip(other) {
                *value = match (*value, *more) {
                    (Some(a), Some(b)) => Some(a.max(b)),
                    (a, b) => a.or(b),
                };
            }
        }
    }
    most
}

fn picture(
    place: &PlaceOutcome,
    choke: usize,
    below: &str,
    panels: Vec<Panel>,
    say: &Say,
) -> Result<Drawing, OutputError> {
    for panel in &panels {
        let fits = panel.values.len() == place.frequencies_hz.len()
            && panel.values.iter().all(|row| row.len() == place.places_m.len());
        if !fits || place.places_m.len() < 2 {
            let reason = "the array has not one value for every frequency and at least two places".into();
            return Err(OutputError::Misfit { what: format!("the map of {}", say.key), reason });
        }
    }
    let groups = bands::of_axes(&place.frequencies_hz, &place.bands);
    let high = heights(&groups);
    let tall = high.iter().sum::<f64>() + ROWS[2] * (groups.len().saturating_sub(1)) as f64;
    let step = tall + ABOVE;
    let height = 92.0 + step * panels.len() as f64 + 150.0;
    let mut drawing = Drawing::new(height, &place.station, below);
    let x = Scale::linear([0.0, place.coax_length_m], EDGES[0], EDGES[1]);
    let all = panels.iter().flat_map(|p| p.values.iter().flatten().flatten().copied());
    let levels = Levels::new(all, say.limit);
    let pick = place.picks.iter().find(|p| place.chokes.get(choke).is_some_and(|c| c.name == p.choke));
    let mut bottom = 0.0;
    for (index, panel) in panels.iter().enumerate() {
        let top = 140.0 + step * index as f64;
        bottom = top + tall;
        let area = Area::new(EDGES[0], top, EDGES[1], bottom);
        blocks(&mut drawing, place, (&groups, &high), panel, (x, area, &levels, say));
        marks(&mut drawing, place, x, area, (&panel.title, pick));
    }
    axes(&mut drawing, x, bottom);
    map::key(&mut drawing, [EDGES[0], bottom + 118.0], &levels, say.value, say.key);
    if gaps(place, &panels, x) {
        map::key_of_gaps(&mut drawing, [EDGES[1], bottom + 118.0], "beyond the shortest coax of all cases");
    }
    Ok(drawing)
}

/// Whether any map has places without values, which are hatched.
fn gaps(place: &PlaceOutcome, panels: &[Panel], x: Scale) -> bool {
    let frame = Frame { x, y: Scale::linear([0.0, 1.0], 1.0, 0.0) };
    let grid = |p: &Panel| Grid::new(place.places_m.clone(), place.frequencies_hz.clone(), p.values.clone());
    panels.iter().any(|panel| map::has_gaps(&frame, &grid(panel)))
}

fn heights(groups: &[Group]) -> Vec<f64> {
    let wanted: Vec<f64> = groups.iter().map(|g| if g.members.len() > 1 { ROWS[0] } else { ROWS[1] }).collect();
    let all = wanted.iter().sum::<f64>() + ROWS[2] * groups.len() as f64;
    let squeeze = (TALLEST / all).min(1.0);
    wanted.into_iter().map(|h| (h * squeeze).max(14.0)).collect()
}

/// The bands of one map, each a block with its frequencies upwards.
fn blocks(
    drawing: &mut Drawing,
    place: &PlaceOutcome,
    (groups, high): (&[Group], &[f64]),
    panel: &Panel,
    (x, area, levels, say): (Scale, Area, &Levels, &Say),
) {
    let mut top = area.top;
    for (group, high) in groups.iter().zip(high) {
        let mut rows: Vec<(f64, Vec<Option<f64>>)> = group
            .members
            .iter()
            .filter_map(|i| Some((place.frequencies_hz[*i], panel.values.get(*i)?.clone())))
            .collect();
        rows.sort_by(|a, b| a.0.total_cmp(&b.0));
        if let [only] = rows.as_slice() {
            rows.push((only.0 * 1.001, only.1.clone()));
        }
        let (Some(first), Some(last)) = (rows.first().map(|r| r.0), rows.last().map(|r| r.0)) else {
            continue;
        };
        let frame = Frame { x, y: Scale::linear([first, last], top + high, top) };
        let (y, values): (Vec<f64>, Plane) = rows.into_iter().unzip();
        let grid = Grid::new(place.places_m.clone(), y, values);
        map::shade(drawing, &frame, &grid, levels);
        map::contours(drawing, &frame, &grid, levels, (&mut Vec::new(), say.value));
        frame.outline(drawing);
        name(drawing, group, place, frame.area());
        top += high + ROWS[2];
    }
}

fn name(drawing: &mut Drawing, group: &Group, place: &PlaceOutcome, area: Area) {
    let x = EDGES[0] - 8.0;
    let middle = 0.5 * (area.top + area.bottom);
    drawing.words(Words::centred([x, middle], SMALL, Anchor::End, group.name.as_str()));
    if group.members.len() > 1 && area.height() > 44.0 {
        let all = || group.members.iter().map(|i| place.frequencies_hz[*i]);
        let (low, high) = (all().fold(f64::INFINITY, f64::min), all().fold(0.0, f64::max));
        for (hz, y) in [(high, area.top + 7.0), (low, area.bottom - 7.0)] {
            let text = figures::megahertz(hz);
            drawing.words(Words::centred([x, y], SMALL - 2.0, Anchor::End, text));
        }
    }
}

/// Title, entry and joins, the reachable stretches and the window of the pick above a map.
fn marks(drawing: &mut Drawing, place: &PlaceOutcome, x: Scale, area: Area, (title, pick): (&str, Option<&PlacePick>)) {
    drawing.write([EDGES[0], area.top - 36.0], EM, Anchor::Start, fitted(title, EM, EDGES[1] - EDGES[0]));
    let mut taken: Vec<Area> = Vec::new();
    reachable_bar(drawing, place, x, area.top - 7.0);
    if let Some(pick) = pick {
        let [from, to] = pick.window_m.map(|m| x.at(m));
        drawing.rectangle(Area::new(from, area.top - 8.0, to.max(from + 2.0), area.top - 3.0), 0.0);
        let words = Words::new([x.at(pick.at_m), area.top - 14.0], SMALL, Anchor::Middle, "window of the pick");
        taken.push(words.extent());
        drawing.words(words);
    }
    let mut mark = |drawing: &mut Drawing, at_m: f64, said: &str| {
        let words = Words::new([x.at(at_m), area.top - 14.0], SMALL, Anchor::Middle, said);
        if !taken.iter().any(|t| t.meets(&words.extent().grown(4.0))) {
            taken.push(words.extent());
            drawing.words(words);
        }
    };
    let frame = Frame { x, y: Scale::linear([0.0, 1.0], area.bottom, area.top) };
    let joins = place.joins_m.iter().filter(|j| (**j - place.entry_at_m).abs() > 0.02).map(|j| (*j, "join"));
    for (at_m, said) in std::iter::once((place.entry_at_m, "entry")).chain(joins) {
        map::upright(drawing, &frame, at_m, 1.6);
        mark(drawing, at_m, said);
    }
    for [from, to] in &place.reachable_m {
        mark(drawing, 0.5 * (from + to), "reachable");
    }
}

/// Metres below the last map and feet below them.
fn axes(drawing: &mut Drawing, x: Scale, bottom: f64) {
    let feet = Scale::linear([x.from * FEET_PER_METRE, x.to * FEET_PER_METRE], x.start, x.end);
    for (scale, y, unit) in [(x, bottom, "m"), (feet, bottom + 40.0, "ft")] {
        if unit == "ft" {
            drawing.line(&[[x.start, y], [x.end, y]], 1.25, 0.0);
        }
        let ticks = scale.ticks(12);
        for tick in &ticks {
            let across = scale.at(*tick);
            drawing.line(&[[across, y], [across, y + 6.0]], 1.25, 0.0);
            drawing.write([across, y + 21.0], SMALL, Anchor::Middle, tick_text(*tick, &ticks));
        }
        drawing.words(Words::centred([EDGES[0] - 14.0, y + 15.0], SMALL, Anchor::End, unit));
    }
    let middle = 0.5 * (EDGES[0] + EDGES[1]);
    drawing.write(
        [middle, bottom + 84.0],
        EM,
        Anchor::Middle,
        "place of the choke: distance along the coax from the feed point",
    );
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::super::checks;
    use super::*;
    use crate::output::sample_studies;

    #[test]
    fn every_map_is_clear_and_names_its_bands() {
        let place = sample_studies::place();
        for drawing in [current(&place, 2), volts(&place, 0), watts(&place, 1)] {
            let drawing = drawing.unwrap();
            checks::texts_are_clear(&drawing);
            for said in ["80 m", "40 m", "30 m", "entry", "join"] {
                assert!(drawing.texts().iter().filter(|(text, _)| *text == said).count() >= 2, "{said}");
            }
        }
    }

    #[test]
    fn an_array_that_does_not_fit_is_refused_not_drawn() {
        let mut place = sample_studies::place();
        place.entry_current_a[0][1][3].pop();
        assert!(current(&place, 1).is_err());
        assert!(current(&place, 0).is_ok());
        assert!(current(&place, 9).is_err());
    }

    #[test]
    fn the_worst_is_over_variants_and_one_variant_has_one_map() {
        let mut place = sample_studies::place();
        let values = optional(&place.entry_current_a);
        let most = worst(&values, 1)[3][100];
        assert_eq!(most, Some(place.entry_current_a[0][1][3][100].max(place.entry_current_a[1][1][3][100])));
        place.variants.truncate(1);
        assert_eq!(nominal_and_worst(&place, &values, 1, "").len(), 1);
    }

    #[test]
    fn volts_and_watts_are_shown_nominal_and_worst() {
        let place = sample_studies::place();
        for (drawing, heads) in [
            (volts(&place, 0).unwrap(), vec!["outside of the coax at the radio, ", "across the choke, "]),
            (watts(&place, 0).unwrap(), vec![""]),
        ] {
            for head in heads {
                for kind in ["nominal", "worst of nominal, wet"] {
                    let title = format!("{head}{kind}");
                    assert!(drawing.texts().iter().any(|(text, _)| *text == title), "{title}");
                }
            }
        }
    }

    #[test]
    fn places_beyond_the_shortest_coax_are_hatched_and_reachable_stretches_named() {
        let mut place = sample_studies::place();
        let says = |drawing: &Drawing, said: &str| drawing.texts().iter().any(|(text, _)| text.contains(said));
        let whole = current(&place, 0).unwrap();
        assert!(!says(&whole, "shortest coax") && !says(&whole, "reachable"));
        place.coax_length_m += 0.54;
        place.reachable_m = vec![[0.0, 2.0], [10.0, 11.5]];
        for drawing in [current(&place, 0), volts(&place, 0), watts(&place, 0)] {
            let drawing = drawing.unwrap();
            checks::texts_are_clear(&drawing);
            assert!(says(&drawing, "beyond the shortest coax") && says(&drawing, "reachable"));
        }
    }
}
