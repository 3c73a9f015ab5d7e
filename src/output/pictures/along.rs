//! Current and voltage along the outside of the coax, several bands in one picture.

use super::axes::{Frame, Scale, run_of};
use super::drawing::{Anchor, Area, Drawing, EM, PATTERNS, Pattern, SMALL, Words, fitted};
use crate::outcome::{ConductorOutcome, FrequencyOutcome, PointOutcome, Prediction, ShieldOutcome};
use crate::output::{OutputError, bands, figures};

/// Lines in one picture at most: as many as there are patterns.
const LINES: usize = PATTERNS.len();

/// One frequency that is drawn.
struct Curve<'a> {
    frequency: &'a FrequencyOutcome,
    coax: &'a ConductorOutcome,
    shield: &'a ShieldOutcome,
    pattern: Pattern,
}

/// The picture: for each band the frequency with the largest current on the shield.
///
/// # Errors
/// [`OutputError::Nothing`] for a station without coax.
pub(super) fn drawing(prediction: &Prediction) -> Result<Drawing, OutputError> {
    let curves = curves(prediction);
    let Some(first) = curves.first() else {
        return Err(OutputError::Nothing { what: "the picture along the coax".into(), needs: "a coax".into() });
    };
    let length_m = first.coax.points.last().map_or(1.0, |p| p.distance_m);
    let below = "Current and voltage on the outside of the coax, RMS, at the frequency of each band where the current is largest";
    let mut drawing = Drawing::new(900.0, &prediction.station, below);
    key(&mut drawing, &curves);
    let across = Scale::linear([0.0, length_m], 100.0, 1090.0);
    let amperes = run_of(curves.iter().flat_map(|c| c.coax.points.iter().map(|p| 1e3 * p.current_a.norm())), true);
    let volts = run_of(curves.iter().flat_map(|c| c.coax.points.iter().filter_map(|p| p.voltage_v)), true);
    let current = Frame { x: across, y: Scale::linear(amperes, 470.0, 190.0) };
    let voltage = Frame { x: across, y: Scale::linear(volts, 830.0, 550.0) };
    current.left(&mut drawing, "current, mA RMS", 6);
    voltage.left(&mut drawing, "voltage, V RMS", 6);
    places(&mut drawing, first, &[current, voltage]);
    for curve in &curves {
        let points = &curve.coax.points;
        let milliamperes: Vec<_> = points.iter().map(|p| (p.distance_m, Some(1e3 * p.current_a.norm()))).collect();
        let volts: Vec<_> = points.iter().map(|p| (p.distance_m, p.voltage_v)).collect();
        for (frame, values) in [(current, milliamperes), (voltage, volts)] {
            for piece in frame.pieces(&values) {
                drawing.patterned(&piece, 2.25, 0.0, curve.pattern);
            }
        }
    }
    current.outline(&mut drawing);
    voltage.outline(&mut drawing);
    current.feet_above(&mut drawing, "distance from the feed point, feet", 12);
    current.below(&mut drawing, "", 12, false);
    voltage.below(&mut drawing, "distance from the feed point, m", 12, true);
    end_labels(&mut drawing, &curves, current, |p| Some(1e3 * p.current_a.norm()));
    end_labels(&mut drawing, &curves, voltage, |p| p.voltage_v);
    Ok(drawing)
}

fn curves(prediction: &Prediction) -> Vec<Curve<'_>> {
    let mut chosen: Vec<&FrequencyOutcome> = Vec::new();
    for group in bands::of_outcomes(&prediction.frequencies) {
        let members = group.members.iter().map(|i| &prediction.frequencies[*i]);
        let largest = |f: &&FrequencyOutcome| f.shield.as_ref().map_or(0.0, |s| s.largest_current_a);
        chosen.extend(members.max_by(|a, b| largest(a).total_cmp(&largest(b))));
    }
    if chosen.len() > LINES {
        // The bands with most current on the shield, in the order of the file.
        let mut sizes: Vec<f64> =
            chosen.iter().map(|f| f.shield.as_ref().map_or(0.0, |s| s.largest_current_a)).collect();
        sizes.sort_by(|a, b| b.total_cmp(a));
        chosen.retain(|f| f.shield.as_ref().map_or(0.0, |s| s.largest_current_a) >= sizes[LINES - 1]);
        chosen.truncate(LINES);
    }
    chosen
        .into_iter()
        .filter_map(|frequency| {
            let coax = frequency.conductors.iter().find(|c| c.name == "coax" && !c.points.is_empty())?;
            Some((frequency, coax, frequency.shield.as_ref()?))
        })
        .enumerate()
        .map(|(index, (frequency, coax, shield))| Curve { frequency, coax, shield, pattern: PATTERNS[index] })
        .collect()
}

/// What each line pattern stands for, in rows above the picture.
fn key(drawing: &mut Drawing, curves: &[Curve]) {
    const ACROSS: usize = 3;
    let room = 1060.0 / ACROSS as f64;
    for (index, curve) in curves.iter().enumerate() {
        let (column, row) = (index % ACROSS, index / ACROSS);
        let (x, y) = (100.0 + room * column as f64, 92.0 + 22.0 * row as f64);
        drawing.patterned(&[[x, y], [x + 62.0, y]], 2.25, 0.0, curve.pattern);
        let place = figures::amperes(curve.shield.largest_current_a);
        let said = match curve.frequency.edge {
            Some(_) => format!(
                "{} ({} MHz), largest {place}",
                bands::short(curve.frequency),
                figures::megahertz(curve.frequency.frequency_hz)
            ),
            None => format!("{}, largest {place}", bands::short(curve.frequency)),
        };
        drawing.words(Words::centred([x + 70.0, y], SMALL, Anchor::Start, fitted(&said, SMALL, room - 84.0)));
    }
}

/// Entry, joins, chokes and the radio's end: hair lines through both boxes, named between them.
fn places(drawing: &mut Drawing, curve: &Curve, frames: &[Frame; 2]) {
    let mut marks: Vec<(f64, String)> = vec![(curve.shield.entry_at_m, "entry to the shack".to_string())];
    for joint in &curve.frequency.joints {
        marks.push((joint.at_m, format!("{} joined", joint.conductor)));
    }
    for choke in curve.frequency.power.chokes.iter().filter(|c| c.on == "coax") {
        marks.push((choke.at_m, choke.name.clone()));
    }
    marks.sort_by(|a, b| a.0.total_cmp(&b.0));
    let mut merged: Vec<(f64, String)> = Vec::new();
    for (at_m, name) in marks {
        match merged.last_mut() {
            Some((last_m, names)) if (at_m - *last_m).abs() < 0.02 => {
                names.push_str(", ");
                names.push_str(&name);
            }
            _ => merged.push((at_m, name)),
        }
    }
    let mut taken: Vec<Area> = Vec::new();
    for (at_m, name) in merged {
        let x = frames[0].x.at(at_m);
        for frame in frames {
            drawing.patterned(&[[x, frame.y.start], [x, frame.y.end]], 1.0, 0.35, PATTERNS[4]);
        }
        let (anchor, side, room) =
            if x > 900.0 { (Anchor::End, -6.0, 500.0) } else { (Anchor::Start, 6.0, 1180.0 - x) };
        let name = fitted(&name, EM, room.min(500.0));
        let rows = [492.0, 511.0, 530.0].map(|y| Words::new([x + side, y], EM, anchor, name.as_str()));
        if let Some(free) = rows.into_iter().find(|w| !taken.iter().any(|t| t.meets(&w.extent().grown(4.0)))) {
            taken.push(free.extent());
            drawing.words(free);
        }
        drawing.patterned(&[[x, frames[0].y.start], [x, frames[1].y.end]], 1.0, 0.35, PATTERNS[4]);
    }
}

/// The band beside the end of its line, moved apart where lines end together.
fn end_labels(drawing: &mut Drawing, curves: &[Curve], frame: Frame, value: impl Fn(&PointOutcome) -> Option<f64>) {
    let mut labels: Vec<(f64, f64, String)> = Vec::new();
    for curve in curves {
        if let Some(end) = curve.coax.points.last().and_then(&value) {
            let y = frame.y.at(end);
            let name = curve.frequency.band.clone();
            labels.push((y, y, name.unwrap_or_else(|| figures::megahertz(curve.frequency.frequency_hz))));
        }
    }
    labels.sort_by(|a, b| a.0.total_cmp(&b.0));
    spread(&mut labels, frame.area(), 17.0);
    for (from, to, name) in labels {
        drawing.line(&[[frame.x.end, from], [frame.x.end + 14.0, to]], 0.8, 0.35);
        drawing.words(Words::centred([frame.x.end + 18.0, to], SMALL, Anchor::Start, fitted(&name, SMALL, 85.0)));
    }
}

/// Moves sorted labels apart to `gap`, and back into the box from its lower edge.
fn spread(labels: &mut [(f64, f64, String)], area: Area, gap: f64) {
    let mut least = f64::NEG_INFINITY;
    for (_, y, _) in labels.iter_mut() {
        *y = y.max(least);
        least = *y + gap;
    }
    let mut most = area.bottom;
    for (_, y, _) in labels.iter_mut().rev() {
        *y = y.min(most);
        most = *y - gap;
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::super::checks;
    use super::*;
    use crate::output::sample;

    #[test]
    fn nothing_overlaps_and_every_band_is_named() {
        let drawing = drawing(&sample::prediction()).unwrap();
        checks::texts_are_clear(&drawing);
        for band in ["80 m", "40 m", "20 m", "15 m", "10 m"] {
            assert!(drawing.texts().iter().any(|(text, _)| *text == band), "{band}");
        }
        assert!(drawing.texts().iter().any(|(text, _)| text.contains("entry to the shack, entry rod joined")));
    }

    #[test]
    fn a_frequency_of_its_own_is_said_once() {
        let mut prediction = sample::prediction();
        for frequency in &mut prediction.frequencies {
            (frequency.band, frequency.edge) = (None, None);
        }
        let drawing = drawing(&prediction).unwrap();
        let legend: Vec<&str> = drawing.texts().iter().map(|(t, _)| *t).filter(|t| t.contains("largest ")).collect();
        assert!(
            legend.iter().any(|t| t.contains(" MHz, largest")) && !legend.iter().any(|t| t.contains('(')),
            "{legend:?}"
        );
    }

    #[test]
    fn a_station_without_coax_says_so() {
        let mut prediction = sample::prediction();
        for frequency in &mut prediction.frequencies {
            frequency.shield = None;
        }
        assert!(drawing(&prediction).unwrap_err().to_string().contains("needs a coax"));
    }
}
