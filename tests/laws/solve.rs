//! From a station's text or layout to the numbers a law is about.

use braidwise::interaction::{Extent, Interaction, Surroundings};
use braidwise::layout::{Earth, Layout};
use braidwise::mesh::{Density, Mesh};
use braidwise::outcome::{FrequencyOutcome, Prediction};
use braidwise::ports::PortModel;
use braidwise::station::{Document, Embedded};
use braidwise::study::{Options, predict};
use num_complex::Complex64;

/// The station of a text, placed.
pub(crate) fn layout(text: &str) -> Layout {
    let document = Document::parse(text, "law").unwrap_or_else(|e| panic!("{}\n{text}", e.show(false)));
    let station = document.station(&Embedded).unwrap_or_else(|e| panic!("{}\n{text}", e.show(false)));
    Layout::place(&station).unwrap_or_else(|e| panic!("{e:?}\n{text}"))
}

/// Everything at the station's frequencies.
pub(crate) fn outcome(layout: &Layout) -> Prediction {
    predict(layout, &Options::default()).unwrap()
}

/// Feed impedance, ohm.
pub(crate) fn feed_ohm(f: &FrequencyOutcome) -> Complex64 {
    Complex64::new(f.feed.resistance_ohm, f.feed.reactance_ohm)
}

/// Feed impedances at all frequencies of a layout, ohm.
pub(crate) fn feeds(layout: &Layout) -> Vec<Complex64> {
    outcome(layout).frequencies.iter().map(feed_ohm).collect()
}

/// Mesh, prepared pairs and earth of a layout at its only frequency, with further gaps.
pub(crate) fn prepared(layout: &Layout, gaps: &[(usize, f64, f64)]) -> (Interaction, Surroundings) {
    let f = layout.operation.frequencies[0].frequency_hz;
    let mesh = Mesh::new(layout, f, Density::default(), gaps);
    let interaction = Interaction::new(mesh, layout.earth != Earth::None);
    let earth = Surroundings::new(f, layout.earth.at(f), &Extent::of(layout)).unwrap();
    (interaction, earth)
}

/// Port model of a layout at its only frequency, with further gaps.
pub(crate) fn ports(layout: &Layout, gaps: &[(usize, f64, f64)]) -> PortModel {
    let (interaction, earth) = prepared(layout, gaps);
    PortModel::solve(&interaction, &earth).unwrap()
}

/// Largest relative difference of two lists of impedances.
pub(crate) fn apart(one: &[Complex64], two: &[Complex64]) -> f64 {
    assert_eq!(one.len(), two.len());
    one.iter().zip(two).map(|(a, b)| (a - b).norm() / b.norm()).fold(0.0, f64::max)
}
