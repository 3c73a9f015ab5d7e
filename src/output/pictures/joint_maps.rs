//! Maps over two things chosen together: two lengths, or the length of the coax and the place of a choke.

use super::axes::{Frame, Scale, tick_text};
use super::drawing::{Anchor, Area, Drawing, EM, SMALL, Spot, Words};
use super::map::{self, Grid, Levels};
use crate::outcome::cut::{CutOutcome, OverLength};
use crate::outcome::joint::OverLengthAndPlace;
use crate::outcome::place::PlaceOutcome;
use crate::output::OutputError;
use crate::output::figures::{self, FEET_PER_METRE};

/// Left and right edge of the maps; feet of the upright axis stand on the right.
const EDGES: [f64; 2] = [104.0, 1096.0];
/// Top and bottom of the two maps: current, standing-wave ratio.
const BOXES: [[f64; 2]; 2] = [[158.0, 508.0], [596.0, 946.0]];

/// Values over `[first][second]`.
type Plane = Vec<Vec<Option<f64>>>;

/// Title of a map, title of its key, and how its values are said.
type Said<'a> = (&'a str, &'a str, &'a dyn Fn(f64) -> String);

/// What both maps share.
struct Joint<'a> {
    station: &'a str,
    below: String,
    titles: [String; 2],
    across_m: &'a [f64],
    upright_m: &'a [f64],
    /// Where to put rings, best first.
    picks: Vec<[f64; 2]>,
    /// Current in A and its limit, standing-wave ratio and its limit.
    maps: [(Plane, f64); 2],
}

/// Two lengths: worst over frequencies and variants.
///
/// # Errors
/// [`OutputError::Nothing`] where one length was scanned.
pub(super) fn lengths(cut: &CutOutcome) -> Result<Drawing, OutputError> {
    let nothing =
        || OutputError::Nothing { what: "the map of two lengths".into(), needs: "two scanned lengths".into() };
    let (Some(second), Some(second_m)) = (&cut.second_conductor, &cut.second_lengths_m) else {
        return Err(nothing());
    };
    if cut.lengths_m.len() < 2 || second_m.len() < 2 {
        return Err(nothing());
    }
    let worst = |values: &OverLength<f64>| -> Plane {
        let cases = || (0..cut.variants.len()).flat_map(|v| (0..cut.frequencies_hz.len()).map(move |f| (v, f)));
        let most = |l: usize, s: usize| cases().filter_map(|(v, f)| values.get(v, f, l, s)).copied().reduce(f64::max);
        (0..cut.lengths_m.len()).map(|l| (0..second_m.len()).map(|s| most(l, s)).collect()).collect()
    };
    Ok(drawing(&Joint {
        station: &cut.station,
        below: cut.why.clone(),
        titles: [format!("length of {}", cut.conductor), format!("length of {second}")],
        across_m: &cut.lengths_m,
        upright_m: second_m,
        picks: cut.picks.iter().filter_map(|p| Some([p.length_m, p.second_length_m?])).collect(),
        maps: [(worst(&cut.entry_current_a), cut.limits.entry_current_a), (worst(&cut.swr), cut.limits.swr)],
    }))
}

/// Length of the coax and place of a choke: worst over frequencies and variants.
///
/// # Errors
/// [`OutputError::Nothing`] where only one length was asked for, or with fewer than two lengths or places;
/// [`OutputError::Misfit`] for a choke that is not there.
pub(super) fn length_by_place(place: &PlaceOutcome, choke: usize) -> Result<Drawing, OutputError> {
    let found = place.lengths.as_ref().filter(|l| l.lengths_m.len() > 1 && l.places_m.len() > 1);
    let Some(joint) = found else {
        let needs = "two lengths and two places or more".into();
        return Err(OutputError::Nothing { what: "the map of length and place".into(), needs });
    };
    let misfit = || OutputError::Misfit {
        what: "the map of length and place".into(),
        reason: format!("there is no choke number {}", choke + 1),
    };
    let worst = |values: &OverLengthAndPlace| -> Result<Plane, OutputError> {
        let of_choke = values.get(choke).ok_or_else(misfit)?;
        let at = |l: usize, p: usize| {
            let all: Option<Vec<f64>> = of_choke.iter().map(|f| *f.get(l)?.get(p)?).collect();
            all.and_then(|v| v.into_iter().reduce(f64::max))
        };
        Ok((0..joint.lengths_m.len()).map(|l| (0..joint.places_m.len()).map(|p| at(l, p)).collect()).collect())
    };
    let name = joint.chokes.get(choke).ok_or_else(misfit)?;
    let picks: Vec<_> = joint.picks.iter().filter(|p| p.choke == *name).collect();
    let rings = match picks.len() {
        0 => "",
        1 => "; ring: its best pair",
        _ => "; rings: its best pairs",
    };
    Ok(drawing(&Joint {
        station: &place.station,
        below: format!("Choke \"{name}\" on every length of coax; hatched: the place would lie beyond the end{rings}"),
        titles: ["length of the coax".into(), "place of the choke".into()],
        across_m: &joint.lengths_m,
        upright_m: &joint.places_m,
        picks: picks.iter().map(|p| [p.length_m, p.at_m]).collect(),
        maps: [(worst(&joint.entry_current_a)?, place.limits.entry_current_a), (worst(&joint.swr)?, place.limits.swr)],
    }))
}

fn drawing(joint: &Joint) -> Drawing {
    let mut drawing = Drawing::new(1104.0, joint.station, &joint.below);
    let amperes = |v: f64| figures::round(&figures::amperes(v));
    let ratio = |v: f64| figures::swr(v);
    let says: [Said; 2] = [
        ("Current going on into the shack, RMS, worst of all frequencies and variants", "current", &amperes),
        ("Standing-wave ratio at the radio, worst of all frequencies and variants", "SWR", &ratio),
    ];
    let run = |values: &[f64]| [values[0], values[values.len() - 1]];
    let x = Scale::linear(run(joint.across_m), EDGES[0], EDGES[1]);
    for (index, [top, bottom]) in BOXES.into_iter().enumerate() {
        let (plane, limit) = &joint.maps[index];
        let (title, key, say) = says[index];
        let frame = Frame { x, y: Scale::linear(run(joint.upright_m), bottom, top) };
        let levels = levels(plane, *limit, index == 1);
        let rows = (0..joint.upright_m.len()).map(|s| plane.iter().map(|row| row[s]).collect()).collect();
        let grid = Grid::new(joint.across_m.to_vec(), joint.upright_m.to_vec(), rows);
        map::shade(&mut drawing, &frame, &grid, &levels);
        let mut taken: Vec<Area> = Vec::new();
        let rings = rings(joint, frame, &mut taken);
        map::contours(&mut drawing, &frame, &grid, &levels, (&mut taken, say));
        frame.outline(&mut drawing);
        rings.iter().for_each(|ring| draw_ring(&mut drawing, ring));
        upright_axes(&mut drawing, frame, &joint.titles[1]);
        let words = Words::centred([EDGES[0], top - if index == 0 { 60.0 } else { 16.0 }], EM, Anchor::Start, title);
        drawing.words(words);
        map::key(&mut drawing, [EDGES[0], bottom + if index == 0 { 24.0 } else { 82.0 }], &levels, say, key);
        if index == 0 {
            frame.feet_above(&mut drawing, "", 12);
        } else {
            frame.below(&mut drawing, &format!("{}, m (feet above)", joint.titles[0]), 12, true);
        }
    }
    drawing
}

/// Multiples of the limit for currents, round ratios for the standing-wave ratio.
fn levels(plane: &Plane, limit: f64, ratio: bool) -> Levels {
    let values = || plane.iter().flatten().flatten().copied();
    if !ratio {
        return Levels::new(values(), Some(limit));
    }
    let finite = || values().filter(|v| v.is_finite());
    let (least, most) = (finite().fold(f64::INFINITY, f64::min), finite().fold(1.0, f64::max));
    let reached = |s: &f64| *s > least && *s < most && (*s - limit).abs() > 0.25;
    let mut steps: Vec<f64> = [1.5, 2.0, 3.0, 5.0, 10.0].into_iter().filter(reached).collect();
    steps.push(limit);
    steps.sort_by(f64::total_cmp);
    Levels { values: steps, limit: Some(limit) }
}

/// A pick in the map: its spot, whether a ring with the number in it fits there, and where the number stands.
struct Ring {
    number: usize,
    spot: Spot,
    fits: bool,
    beside: Spot,
}

/// Rings at the picks that have room, the best last. At an edge the ring is small and its number stands beside it, inside.
fn rings(joint: &Joint, frame: Frame, taken: &mut Vec<Area>) -> Vec<Ring> {
    let around = |[x, y]: Spot| Area::new(x - 11.0, y - 11.0, x + 11.0, y + 11.0);
    let area = frame.area();
    let inward = |at: f64, low: f64, high: f64| {
        if at - low < 11.0 {
            17.0
        } else if high - at < 11.0 {
            -17.0
        } else {
            0.0
        }
    };
    let mut out = Vec::new();
    for (index, [across, upright]) in joint.picks.iter().enumerate() {
        let spot = frame.spot(*across, *upright);
        let [x, y] = spot;
        let beside = [x + inward(x, area.left, area.right), y + inward(y, area.top, area.bottom)];
        if !taken.iter().any(|t| t.meets(&around(beside))) {
            taken.push(around(beside));
            out.push(Ring { number: index + 1, spot, fits: beside == spot, beside });
        }
    }
    out.reverse();
    out
}

fn draw_ring(drawing: &mut Drawing, ring: &Ring) {
    let (radius, width) = if ring.fits { (10.5, 1.6) } else { (4.0, 2.2) };
    drawing.ring(ring.spot, radius, width);
    let number = Words::centred(ring.beside, 12.0, Anchor::Middle, ring.number.to_string());
    drawing.words(if ring.fits { number } else { number.grounded() });
}

/// Metres on the left, feet on the right.
fn upright_axes(drawing: &mut Drawing, frame: Frame, title: &str) {
    let feet = Scale::linear([frame.y.from * FEET_PER_METRE, frame.y.to * FEET_PER_METRE], frame.y.start, frame.y.end);
    let sides = [(frame.y, frame.x.start, -1.0, Anchor::End, "m"), (feet, frame.x.end, 1.0, Anchor::Start, "feet")];
    for (scale, x, side, anchor, unit) in sides {
        let ticks = scale.ticks(7);
        for tick in &ticks {
            let y = scale.at(*tick);
            drawing.line(&[[x, y], [x + 6.0 * side, y]], 1.25, 0.0);
            drawing.words(Words::centred([x + 10.0 * side, y], SMALL, anchor, tick_text(*tick, &ticks)));
        }
        let middle = [x + 60.0 * side, 0.5 * (scale.start + scale.end)];
        let said = if unit == "m" { format!("{title}, m") } else { unit.to_string() };
        drawing.words(Words::new(middle, EM, Anchor::Middle, said).upwards());
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::super::checks;
    use super::*;
    use crate::output::sample_studies;

    #[test]
    fn both_maps_are_clear() {
        checks::texts_are_clear(&lengths(&sample_studies::cut_two()).unwrap());
        for choke in 0..3 {
            checks::texts_are_clear(&length_by_place(&sample_studies::joint(), choke).unwrap());
        }
        assert!(length_by_place(&sample_studies::joint(), 3).is_err());
        assert!(length_by_place(&sample_studies::place(), 0).is_err());
        assert!(lengths(&sample_studies::cut()).is_err());
    }

    #[test]
    fn the_limit_is_a_level_of_the_standing_wave_ratio() {
        let found = levels(&vec![vec![Some(1.1), Some(7.0)]], 2.2, true);
        assert_eq!(found.values, vec![1.5, 2.2, 3.0, 5.0]);
        assert_eq!(found.limit, Some(2.2));
    }
}
