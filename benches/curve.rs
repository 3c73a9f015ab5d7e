//! How many solves a curve over frequency takes, and how far it is from direct solves at other frequencies.
//!
//! The README's station and others from 3 to 30 MHz. Run with `cargo bench --bench curve`.

use braidwise::layout::{FrequencyPoint, Layout};
use braidwise::station::{Embedded, Station};
use braidwise::study::curve::{CurveOptions, PortCurve, spaced};
use braidwise::study::{Options, predict};
use std::time::Instant;

const MODELS: [(&str, &str); 4] = [
    ("gauge-hut (README)", include_str!("../models/gauge-hut.toml")),
    ("gauge-hut-choke-at-entry", include_str!("../models/gauge-hut-choke-at-entry.toml")),
    ("levee-slanted", include_str!("../models/levee-slanted.toml")),
    ("half-wave-alone", include_str!("../models/half-wave-alone.toml")),
];

/// Frequencies at which the curve is compared with direct solves; none falls on a Chebyshev point.
const COMPARED: usize = 60;

fn main() {
    println!("3 to 30 MHz, tolerance 0.1 %; errors at {COMPARED} frequencies against direct solves on the same mesh");
    println!(
        "{:<26} {:>6} {:>9} {:>10} {:>10} {:>10} {:>9} {:>11}",
        "station", "solves", "estimate", "worst Z", "median Z", "worst I", "seconds", "one direct"
    );
    for (name, text) in MODELS {
        let station = Station::read(text, name, &[], &Embedded).expect("models are legal");
        let layout = Layout::place(&station).expect("models can be placed");
        row(name, &layout);
    }
}

fn row(name: &str, layout: &Layout) {
    let started = Instant::now();
    let curve = PortCurve::new(layout, 3e6, 30e6, CurveOptions::default()).expect("can be solved");
    let seconds = started.elapsed().as_secs_f64();
    // the last one at 30 MHz, so that both meshes are the same
    let frequencies: Vec<f64> = spaced(3.123e6, 30e6, COMPARED);
    let interpolated = curve.outcome(&frequencies).expect("power flows");
    let point = |f: &f64| FrequencyPoint { frequency_hz: *f, band: None, edge: None };
    let options = Options { frequencies: Some(frequencies.iter().map(point).collect()), ..Options::default() };
    let started = Instant::now();
    let direct = predict(layout, &options).expect("can be solved");
    let one = started.elapsed().as_secs_f64() / COMPARED as f64;
    let mut feed = Vec::new();
    let mut entry: f64 = 0.0;
    for (k, (p, d)) in interpolated.curve.points.iter().zip(&direct.frequencies).enumerate() {
        let z = num_complex::Complex64::new(d.feed.resistance_ohm, d.feed.reactance_ohm);
        feed.push((p.feed_ohm - z).norm() / z.norm());
        if let Some((shield, direct)) = interpolated.shield.get(k).zip(d.shield.as_ref()) {
            entry = entry.max((shield.entry_current_a / direct.entry_current_a - 1.0).abs());
        }
    }
    feed.sort_by(f64::total_cmp);
    println!(
        "{name:<26} {:>6} {:>8.4}% {:>9.4}% {:>9.4}% {:>9.4}% {seconds:>9.2} {one:>11.3}",
        interpolated.solves,
        100.0 * interpolated.error_estimate,
        100.0 * feed[feed.len() - 1],
        100.0 * feed[feed.len() / 2],
        100.0 * entry,
    );
}
