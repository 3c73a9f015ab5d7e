//! Maps over two things chosen together: two lengths, or the length of the coax and the place of a choke.

use super::axes::{Frame, Scale, tick_text};
use super::drawing::{Anchor, Area, Drawing, EM, SMALL, Words};
use super::map::{self, Grid, Levels};
use crate::outcome::cut::{CutOutcome, OverLength};
use crate::outcome::joint::LengthByPlaceOutcome;
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
/// [`OutputError::Nothing`] with fewer than two lengths or places.
pub(super) fn length_by_place(joint: &LengthByPlaceOutcome) -> Result<Drawing, OutputError> {
    if joint.lengths_m.len() < 2 || joint.places_m.len() < 2 {
        let needs = "two lengths and two places or more".into();
        return Err(OutputError::Nothing { what: "the map of length and place".into(), needs });
    }
    let worst = |values: &[Plane]| -> Plane {
        let at = |l: usize, p: usize| {
            let all: Option<Vec<f64>> = values.iter().map(|f| *f.get(l)?.get(p)?).collect();
            all.and_then(|v| v.into_iter().reduce(f64::max))
        };
        (0..joint.lengths_m.len()).map(|l| (0..joint.places_m.len()).map(|p| at(l, p)).collect()).collect()
    };
    Ok(drawing(&Joint {
        station: &joint.station,
        below: format!(
            "Choke \"{}\" along coax of every length; hatched: the place would lie beyond the end",
            joint.choke
        ),
        titles: ["length of the coax".into(), "place of the choke".into()],
        across_m: &joint.lengths_m,
        upright_m: &joint.places_m,
        picks: Vec::new(),
        maps: [(worst(&joint.entry_current_a), joint.limits.entry_current_a), (worst(&joint.swr), joint.limits.swr)],
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
        rings(&mut drawing, joint, frame, &mut taken);
        map::contours(&mut drawing, &frame, &grid, &levels, (&mut taken, say));
        frame.outline(&mut drawing);
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
    let most = values().filter(|v| v.is_finite()).fold(1.0, f64::max);
    let mut steps: Vec<f64> =
        [1.5, 2.0, 3.0, 5.0, 10.0].into_iter().filter(|s| *s < most && (*s - limit).abs() > 0.25).collect();
    steps.push(limit);
    steps.sort_by(f64::total_cmp);
    Levels { values: steps, limit: Some(limit) }
}

/// Rings at the picks, numbered.
fn rings(drawing: &mut Drawing, joint: &Joint, frame: Frame, taken: &mut Vec<Area>) {
    for (index, [across, upright]) in joint.picks.iter().enumerate().rev() {
        let spot = frame.spot(*across, *upright);
        let area = Area::new(spot[0] - 11.0, spot[1] - 11.0, spot[0] + 11.0, spot[1] + 11.0);
        if frame.area().holds(&area) && !taken.iter().any(|t| t.meets(&area)) {
            drawing.ring(spot, 10.5, 1.6);
            drawing.words(Words::centred(spot, 12.0, Anchor::Middle, (index + 1).to_string()));
            taken.push(area);
        }
    }
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
        checks::texts_are_clear(&length_by_place(&sample_studies::joint()).unwrap());
        assert!(lengths(&sample_studies::cut()).is_err());
    }

    #[test]
    fn the_limit_is_a_level_of_the_standing_wave_ratio() {
        let found = levels(&vec![vec![Some(1.1), Some(7.0)]], 2.2, true);
        assert_eq!(found.values, vec![1.5, 2.2, 3.0, 5.0]);
        assert_eq!(found.limit, Some(2.2));
    }
}
