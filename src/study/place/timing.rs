//! How long the steps of a placement take, for the benches.

use super::{Answer, PlaceFailure, PlaceOptions, candidates, model::Model, prepare};
use crate::interaction::{Extent, Factored, Surroundings};
use crate::layout::Layout;
use crate::network;
use crate::ports::excitations;
use crate::study::Failure;
use num_complex::Complex64;
use std::time::Instant;

/// Times of one frequency on one thread, s.
#[derive(Debug, Clone, Copy)]
pub struct Timing {
    /// Unknowns of the study's mesh.
    pub unknowns: usize,
    /// Ports along the coax.
    pub ports: usize,
    /// Places.
    pub places: usize,
    /// Candidates.
    pub chokes: usize,
    /// A solve: fill, factor, one right side, the soil's tables included.
    pub solve_s: f64,
    /// All places and candidates once the ports are solved.
    pub answers_s: f64,
}

/// Time the first frequency of a station.
///
/// # Errors
/// As [`super::place`].
pub fn one_frequency(layout: &Layout, options: &PlaceOptions) -> Result<Timing, PlaceFailure> {
    let frequency_hz = layout.operation.frequencies.first().ok_or(Failure::NoFrequency)?.frequency_hz;
    let candidates = candidates::of(layout, options)?;
    let (places_m, prepared) = prepare(layout, &[], options, frequency_hz, &mut Vec::new())?;
    let variant = &prepared[0];
    let start = Instant::now();
    let earth = Surroundings::new(frequency_hz, layout.earth.at(frequency_hz), &Extent::of(&variant.layout))
        .map_err(Failure::from)?;
    let singular = |source| Failure::Singular { frequency_hz, source };
    let factored = Factored::new(variant.interaction.fill(&earth)).map_err(singular)?;
    let mut right = excitations(variant.interaction.mesh()).subcols(0, 1).to_owned();
    factored.solve_in_place(&mut right);
    let solve_s = start.elapsed().as_secs_f64();
    let parts: Vec<Complex64> = variant.layout.parts.iter().map(|p| network::impedance(&p.law, frequency_hz)).collect();
    let model =
        Model::solve(&variant.interaction, &earth, &variant.line, &variant.readings, &parts).map_err(singular)?;
    let chokes: Vec<Complex64> = candidates.iter().map(|c| network::impedance(&c.law, frequency_hz)).collect();
    let start = Instant::now();
    Answer::of(&model, variant, &chokes, frequency_hz, layout.operation.power_w).map_err(Failure::from)?;
    Ok(Timing {
        unknowns: variant.interaction.mesh().unknowns,
        ports: variant.line.node_count(),
        places: places_m.len(),
        chokes: chokes.len(),
        solve_s,
        answers_s: start.elapsed().as_secs_f64(),
    })
}
