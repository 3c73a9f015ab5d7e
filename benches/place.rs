//! Placing a choke against solving: ratios taken in one run on this machine.
//!
//! `cargo bench --bench place`. A solve is a direct fill, one factorisation and one right side on one thread, on the study's own mesh.

use braidwise::layout::{BandEdge, Earth, Layout, Soil};
use braidwise::station::{Document, Embedded};
use braidwise::study::{Candidate, Options, PlaceOptions, place, predict, timing};
use std::time::Instant;

fn main() {
    let file = format!("{}/models/gauge-hut.toml", env!("CARGO_MANIFEST_DIR"));
    let text = std::fs::read_to_string(file).expect("the model is there");
    let layout = match Document::parse(&text, "gauge-hut.toml").and_then(|d| d.station(&Embedded)) {
        Ok(station) => Layout::place(&station).expect("the model can be placed"),
        Err(refused) => panic!("{}", refused.show(false)),
    };
    let ohm = [300.0, 500.0, 800.0, 1e3, 1.5e3, 2e3, 3e3, 5e3, 8e3, 10e3];
    let candidates: Vec<Candidate> = ohm.iter().map(|r| Candidate::resistance(*r)).collect();
    let options = PlaceOptions { candidates, step_m: 0.012, ..PlaceOptions::default() };

    let mut one = layout.clone();
    one.operation.frequencies.retain(|f| f.frequency_hz > 28e6);
    one.operation.frequencies.truncate(1);
    let t = timing::one_frequency(&one, &options).expect("solves");
    println!("one frequency, {} unknowns, {} ports, {} places x {} chokes", t.unknowns, t.ports, t.places, t.chokes);
    println!("  solve (fill, factor, one right side)      {:9.2} ms", 1e3 * t.solve_s);
    println!(
        "  all places and chokes after the solve     {:9.2} ms   {:.2} of a solve (aim: below 1)",
        1e3 * t.answers_s,
        t.answers_s / t.solve_s
    );

    // five frequencies: the middle of each band and the low edge of the lowest; three soils
    let mut five = layout;
    let low = five.operation.frequencies.first().cloned();
    five.operation.frequencies.retain(|f| f.edge == Some(BandEdge::Middle));
    five.operation.frequencies.extend(low);
    assert_eq!(five.operation.frequencies.len(), 5);
    let soil = |permittivity, conductivity_s_per_m| Earth::Soil(Soil::Constant { permittivity, conductivity_s_per_m });
    let variants: Vec<(String, Layout)> = [("wet", soil(40.0, 0.03)), ("dry", soil(8.0, 1e-3))]
        .into_iter()
        .map(|(name, earth)| (name.to_string(), Layout { earth, ..five.clone() }))
        .collect();
    let start = Instant::now();
    let out = place(&five, &variants, &options).expect("solves");
    let whole_s = start.elapsed().as_secs_f64();
    let answers = out.places_m.len() * out.chokes.len() * out.frequencies_hz.len() * out.variants.len();
    println!(
        "{answers} answers ({} places x {} chokes x 5 frequencies x 3 soils), tables included: {whole_s:.2} s",
        out.places_m.len(),
        out.chokes.len()
    );

    // brute force: a prediction with the choke in the layout, a few of them, scaled up
    let few = 3;
    let start = Instant::now();
    for _ in 0..few {
        predict(&five, &Options::default()).expect("solves");
    }
    let each_s = start.elapsed().as_secs_f64() / f64::from(few) / 5.0;
    let brute_s = each_s * answers as f64;
    println!(
        "the same by one prediction each: {:.2} ms x {answers} = {:.0} s, {:.0} times as long",
        1e3 * each_s,
        brute_s,
        brute_s / whole_s
    );
}
