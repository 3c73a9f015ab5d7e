//! The radiation pattern in rectangular axes: gain against elevation, gain against bearing.

use super::axes::{Frame, Scale};
use super::drawing::{Anchor, Drawing, PATTERNS, SMALL, Words, fitted};
use crate::outcome::pattern::PatternOutcome;
use crate::output::{OutputError, figures};

/// What is shown below the largest gain.
const DEPTH_DB: f64 = 40.0;

/// The cuts of one box: a name and gain over angle each.
type Cuts<'a> = Vec<(String, &'a [f64], &'a [Option<f64>])>;

/// Two boxes, one above the other.
///
/// # Errors
/// [`OutputError::Nothing`] for a pattern without cuts.
pub(super) fn drawing(pattern: &PatternOutcome) -> Result<Drawing, OutputError> {
    let elevation: Cuts = pattern
        .elevation_cuts
        .iter()
        .map(|c| (format!("towards {:.0}°", c.bearing_deg), c.elevation_deg.as_slice(), c.gain_dbi.as_slice()))
        .collect();
    let azimuth: Cuts = pattern
        .azimuth_cuts
        .iter()
        .map(|c| (format!("at elevation {:.0}°", c.elevation_deg), c.bearing_deg.as_slice(), c.gain_dbi.as_slice()))
        .collect();
    let gains =
        || elevation.iter().chain(&azimuth).flat_map(|c| c.2.iter().flatten().copied()).filter(|g| g.is_finite());
    let most = gains().fold(f64::NEG_INFINITY, f64::max);
    if !most.is_finite() {
        return Err(OutputError::Nothing { what: "the radiation pattern".into(), needs: "a cut with gain".into() });
    }
    let least = gains().fold(f64::INFINITY, f64::min);
    let top = (most / 5.0).ceil() * 5.0;
    let run = [((least / 5.0).floor() * 5.0).clamp(top - DEPTH_DB, top - 10.0), top];
    let below = format!(
        "Gain at {} MHz, both polarisations, losses included; largest {} dBi",
        figures::megahertz(pattern.frequency_hz),
        figures::three(most).replace('-', "−")
    );
    let mut drawing = Drawing::new(900.0, &pattern.station, &below);
    let boxes = [
        (elevation, [0.0, 180.0], "elevation, degrees; beyond 90 the opposite bearing", [120.0, 400.0]),
        (azimuth, [0.0, 360.0], "bearing, degrees from north", [546.0, 826.0]),
    ];
    for (cuts, angles, title, [high, low]) in boxes {
        let to = cuts.iter().flat_map(|c| c.1.last().copied()).fold(0.0, f64::max);
        let angles = if to <= 0.5 * angles[1] + 1e-9 && to > 0.0 { [0.0, 0.5 * angles[1]] } else { angles };
        let frame = Frame { x: Scale::linear(angles, 104.0, 1160.0), y: Scale::linear(run, low, high) };
        frame.left(&mut drawing, "gain, dBi", 6);
        angle_axis(&mut drawing, frame, title);
        for (index, (name, angle, gain)) in cuts.iter().take(PATTERNS.len()).enumerate() {
            let values: Vec<_> = angle.iter().copied().zip(gain.iter().copied()).collect();
            for piece in frame.pieces(&values) {
                drawing.patterned(&piece, 2.25, 0.0, PATTERNS[index]);
            }
            let x = 104.0 + 180.0 * index as f64;
            drawing.patterned(&[[x, high - 18.0], [x + 46.0, high - 18.0]], 2.25, 0.0, PATTERNS[index]);
            let name = fitted(name, SMALL, 118.0);
            drawing.words(Words::centred([x + 53.0, high - 18.0], SMALL, Anchor::Start, name));
        }
        frame.outline(&mut drawing);
    }
    Ok(drawing)
}

/// Ticks at every 30 degrees (10 in a quarter): angles are not counted in fives and tens of tens.
fn angle_axis(drawing: &mut Drawing, frame: Frame, title: &str) {
    let step = if frame.x.to <= 90.0 { 10.0 } else { 30.0 };
    let mut angle = 0.0;
    while angle <= frame.x.to + 1e-9 {
        let x = frame.x.at(angle);
        drawing.line(&[[x, frame.y.end], [x, frame.y.start]], 0.7, 0.86);
        drawing.line(&[[x, frame.y.start], [x, frame.y.start + 6.0]], 1.25, 0.0);
        drawing.write([x, frame.y.start + 21.0], SMALL, Anchor::Middle, format!("{angle:.0}"));
        angle += step;
    }
    let middle = 0.5 * (frame.x.start + frame.x.end);
    drawing.write([middle, frame.y.start + 43.0], super::drawing::EM, Anchor::Middle, title);
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::super::checks;
    use super::*;
    use crate::output::sample;

    #[test]
    fn both_boxes_are_clear_and_name_their_cuts() {
        let drawing = drawing(&sample::pattern()).unwrap();
        checks::texts_are_clear(&drawing);
        for name in ["towards 20°", "at elevation 30°"] {
            assert!(drawing.texts().iter().any(|(text, _)| *text == name), "{name}");
        }
    }

    #[test]
    fn a_pattern_of_nothing_is_said() {
        let mut nothing = sample::pattern();
        nothing.azimuth_cuts.clear();
        for cut in &mut nothing.elevation_cuts {
            cut.gain_dbi.fill(None);
        }
        assert!(drawing(&nothing).is_err());
    }
}
