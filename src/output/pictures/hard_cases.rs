//! Stations that are legal but make drawing hard: every picture must stay clear of overlaps, gaps and what is no number.

#![allow(clippy::unwrap_used)]

use super::{along, checks, curve, site};
use crate::outcome::Prediction;
use crate::outcome::curve::CurveOutcome;
use crate::output::{References, Units, sample, table};
use num_complex::Complex64;

/// Draws what can be drawn and reads the table.
fn look(prediction: &Prediction) {
    checks::texts_are_clear(&site::drawing(prediction, Units::Feet).unwrap());
    if prediction.frequencies.iter().any(|f| f.shield.is_some()) {
        checks::texts_are_clear(&along::drawing(prediction).unwrap());
    }
    checks::texts_are_clear(&curve::drawing(&CurveOutcome::of(prediction, 50.0, Some(2.0))).unwrap());
    let text = table::prediction(prediction, &References::default(), Units::Metres);
    assert!(!text.contains("NaN") && !text.contains("inf "), "{text}");
}

#[test]
fn one_vertical_wire_without_coax_in_free_space() {
    let mut prediction = sample::prediction();
    prediction.earth.kind = "none".into();
    prediction.variants.clear();
    prediction.frequencies.truncate(1);
    let frequency = &mut prediction.frequencies[0];
    (frequency.shield, frequency.band, frequency.edge) = (None, None, None);
    frequency.power.chokes.clear();
    frequency.joints.clear();
    frequency.conductors.truncate(1);
    for point in &mut frequency.conductors[0].points {
        point.position_m = [0.0, 0.0, point.distance_m];
    }
    look(&prediction);
}

#[test]
fn no_current_no_voltage_and_an_endless_standing_wave_ratio() {
    let mut prediction = sample::prediction();
    for frequency in &mut prediction.frequencies {
        frequency.radio.swr = f64::INFINITY;
        frequency.feed.reactance_ohm = f64::NAN;
        for point in frequency.conductors.iter_mut().flat_map(|c| &mut c.points) {
            (point.current_a, point.voltage_v) = (Complex64::new(0.0, 0.0), None);
        }
        let shield = frequency.shield.as_mut().unwrap();
        (shield.entry_voltage_v, shield.largest_current_a) = (None, 0.0);
    }
    look(&prediction);
}

#[test]
fn long_names_and_many_parts() {
    let mut prediction = sample::prediction();
    let long = "the one that hangs over the weir between the two old alders and the pump house";
    prediction.station = long.repeat(3);
    for frequency in &mut prediction.frequencies {
        frequency.conductors[0].name = long.into();
        let choke = frequency.power.chokes[0].clone();
        frequency.power.chokes = (0..12)
            .map(|k| crate::outcome::PartOutcome {
                name: format!("{long} {k}"),
                at_m: 0.9 * f64::from(k),
                ..choke.clone()
            })
            .collect();
        let joint = frequency.joints[0].clone();
        frequency.joints = (0..8)
            .map(|k| crate::outcome::JointOutcome { conductor: format!("radials {k}"), ..joint.clone() })
            .collect();
    }
    look(&prediction);
}

#[test]
fn a_very_large_and_a_very_small_station() {
    for scale in [40.0, 0.02] {
        let mut prediction = sample::prediction();
        for frequency in &mut prediction.frequencies {
            for point in frequency.conductors.iter_mut().flat_map(|c| &mut c.points) {
                point.distance_m *= scale;
                point.position_m = point.position_m.map(|v| v * scale);
            }
            frequency.shield.as_mut().unwrap().entry_at_m *= scale;
            frequency.power.chokes[0].at_m *= scale;
            frequency.joints[0].at_m *= scale;
        }
        look(&prediction);
    }
}

#[test]
fn ten_bands_and_a_run_of_many_frequencies() {
    let mut prediction = sample::prediction();
    for (index, frequency) in prediction.frequencies.iter_mut().enumerate() {
        frequency.band = Some(format!("{} m", 160 - 10 * (index / 2)));
    }
    look(&prediction);
    for (index, frequency) in prediction.frequencies.iter_mut().enumerate() {
        (frequency.band, frequency.edge) = (None, None);
        frequency.frequency_hz = 3e6 + 1e5 * index as f64;
    }
    look(&prediction);
}
