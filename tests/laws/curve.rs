//! An interpolated curve is what direct solves at its frequencies give, within the error it states.

use braidwise::layout::{FrequencyPoint, Layout};
use braidwise::outcome::Prediction;
use braidwise::outcome::curve::InterpolatedCurve;
use braidwise::station::{Embedded, Station};
use braidwise::study::curve::{CurveOptions, PortCurve, spaced};
use braidwise::study::{Options, predict};
use num_complex::Complex64;

fn placed(text: &str) -> Layout {
    let station = Station::read(text, "model", &[], &Embedded).unwrap();
    Layout::place(&station).unwrap()
}

/// Frequencies drawn evenly at random, the same every time, and the top of the range, so that both use one mesh.
fn drawn(low_hz: f64, high_hz: f64, count: usize) -> Vec<f64> {
    let mut state: u64 = 20_260_417;
    let mut out: Vec<f64> = (1..count)
        .map(|_| {
            state = state.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
            low_hz + (high_hz - low_hz) * (state >> 11) as f64 / (1_u64 << 53) as f64
        })
        .collect();
    out.push(high_hz);
    out.sort_by(f64::total_cmp);
    out
}

fn direct(layout: &Layout, frequencies: &[f64]) -> Prediction {
    let point = |f: &f64| FrequencyPoint { frequency_hz: *f, band: None, edge: None };
    predict(layout, &Options { frequencies: Some(frequencies.iter().map(point).collect()), ..Options::default() })
        .unwrap()
}

/// Largest relative errors of feed impedance and of the entry and end quantities.
fn errors(curve: &InterpolatedCurve, direct: &Prediction) -> [f64; 2] {
    let (mut feed, mut shield) = (0.0_f64, 0.0_f64);
    for (k, (point, exact)) in curve.curve.points.iter().zip(&direct.frequencies).enumerate() {
        let z = Complex64::new(exact.feed.resistance_ohm, exact.feed.reactance_ohm);
        feed = feed.max((point.feed_ohm - z).norm() / z.norm());
        if let Some((drawn, exact)) = curve.shield.get(k).zip(exact.shield.as_ref()) {
            shield = shield.max((drawn.entry_current_a / exact.entry_current_a - 1.0).abs());
            shield = shield.max((drawn.end_voltage_v.unwrap() / exact.end_voltage_v.unwrap() - 1.0).abs());
        }
    }
    [feed, shield]
}

#[test]
fn the_readme_station_from_3_to_30_mhz_takes_at_most_25_solves_for_a_thousandth() {
    let layout = placed(include_str!("../../models/gauge-hut.toml"));
    let curve = PortCurve::new(&layout, 3e6, 30e6, CurveOptions::default()).unwrap();
    assert!(curve.solved_at_hz().len() <= 25, "{} solves", curve.solved_at_hz().len());
    assert!(curve.error_estimate() < 1e-3);
    let frequencies = drawn(3e6, 30e6, 12);
    let [feed, shield] = errors(&curve.outcome(&frequencies).unwrap(), &direct(&layout, &frequencies));
    assert!(feed <= curve.error_estimate(), "feed {feed:.2e}, stated {:.2e}", curve.error_estimate());
    // Currents carry the error of their own curve and that of the feed's resistance, which sets the level.
    assert!(shield <= 3.0 * curve.error_estimate(), "shield {shield:.2e}, stated {:.2e}", curve.error_estimate());
}

#[test]
fn chokes_are_applied_after_interpolation_and_exactly() {
    let layout = placed(&crate_choke());
    let curve = PortCurve::new(&layout, 5e6, 16e6, CurveOptions::default()).unwrap();
    let frequencies = drawn(5e6, 16e6, 8);
    let [feed, shield] = errors(&curve.outcome(&frequencies).unwrap(), &direct(&layout, &frequencies));
    assert!(feed <= 3.0 * curve.error_estimate(), "feed {feed:.2e}, stated {:.2e}", curve.error_estimate());
    assert!(shield <= 5.0 * curve.error_estimate(), "shield {shield:.2e}, stated {:.2e}", curve.error_estimate());
}

/// In free space, with a sharply resonant choke that no rational function of few poles could follow with the rest.
fn crate_choke() -> String {
    include_str!("../../models/gauge-hut.toml")
        .replace("kind = \"soil\"\nsoil = \"wet meadow\"", "kind = \"none\"")
        .replace("\"on grass\"", "0.02")
        .split("[[variant]]")
        .next()
        .unwrap()
        .to_owned()
        + "[[choke]]\nname = \"trap\"\nat = 6\nresonant = { resistance = \"40 kohm\", inductance = \"12 uH\", capacitance = \"42 pF\" }\n"
}

#[test]
fn too_few_solves_are_confessed() {
    let layout = placed(&crate_choke());
    let options = CurveOptions { most_solves: 10, ..CurveOptions::default() };
    let curve = PortCurve::new(&layout, 3e6, 30e6, options).unwrap();
    let outcome = curve.outcome(&spaced(3e6, 30e6, 5)).unwrap();
    assert!(!outcome.converged && outcome.error_estimate > outcome.tolerance && outcome.solves <= 10);
    let frequencies = drawn(3e6, 30e6, 6);
    let [feed, _] = errors(&curve.outcome(&frequencies).unwrap(), &direct(&layout, &frequencies));
    assert!(feed > 1e-3, "ten solves cannot follow this station: {feed:.2e}");
}
