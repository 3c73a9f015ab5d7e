//! Where a choke goes: every place × every candidate × every frequency × every variant, from one solve a frequency and variant.
//!
//! Takes the station and its variants as layouts; gives a [`PlaceOutcome`]. A choke never refills or refactors anything: the mesh carries
//! ports along the coax (`line`), one solve gives what each of them excites (`model`), values between them are interpolated,
//! and a choke of any impedance at any place is a quotient of those (`answers`). `verdict` and `clamp` turn the arrays into a choice.
//! `joint` asks the same of every length of the coax, and `joint_verdict` chooses length and place together.

mod answers;
mod candidates;
#[cfg(test)]
mod checks;
mod clamp;
mod joint;
mod joint_verdict;
mod line;
mod model;
pub mod timing;
mod verdict;
mod words;

use super::predict::Failure;
use super::watch::{Unwatched, Watch};
use crate::interaction::{Extent, Interaction, Surroundings};
use crate::layout::{Earth, Layout, PartKind, Warning};
use crate::mesh::{Density, Mesh};
use crate::network::{self, Chain};
use crate::outcome::place::{LimitsOutcome, PlaceOutcome};
use crate::quantity::{SPEED_OF_LIGHT_M_PER_S, metres};
use crate::station::Refused;
use answers::Answer;
pub use candidates::{Candidate, DEFAULT_RESISTANCES_OHM};
pub use joint::{MOST_VALUES, place_over_lengths};
use line::{Line, Seat};
use model::{Model, Readings};
use num_complex::Complex64;
use rayon::prelude::*;
use std::sync::Arc;

/// Most places along a coax: bounds memory.
const MOST_PLACES: usize = 20_000;

/// What is asked.
#[derive(Debug, Clone)]
pub struct PlaceOptions {
    /// Mesh density.
    pub density: Density,
    /// Distance between places, m.
    pub step_m: f64,
    /// Candidates besides the file's own chokes on the coax; with neither, [`DEFAULT_RESISTANCES_OHM`].
    pub candidates: Vec<Candidate>,
    /// Names of the file's chokes that stay where they are.
    pub keep: Vec<String>,
}

impl Default for PlaceOptions {
    fn default() -> Self {
        Self { density: Density::default(), step_m: 0.01, candidates: Vec::new(), keep: Vec::new() }
    }
}

/// Why no placement could be computed.
#[derive(Debug, Clone, thiserror::Error)]
pub enum PlaceFailure {
    /// Nothing to put a choke on.
    #[error("{about} has no coax, so there is no place for a choke: give it a [coax]")]
    NoCoax {
        /// "the station" or a variant.
        about: String,
    },
    /// A choke to keep that is not there.
    #[error("no choke on the coax is called \"{name}\"; there is {known}")]
    UnknownChoke {
        /// As asked.
        name: String,
        /// What there is.
        known: String,
    },
    /// The step makes no grid.
    #[error("a step of {} along {} of coax is out of range: write 1 mm to 1 m, and at most {MOST_PLACES} places", metres(*.step_m), metres(*.length_m))]
    Step {
        /// As asked, m.
        step_m: f64,
        /// Of the coax, m.
        length_m: f64,
    },
    /// The coax is too short for any gap.
    #[error("the coax has no room for a choke: it is {} long and a choke's gap takes {}", metres(*.length_m), metres(*.gap_m))]
    NoRoom {
        /// Of the coax, m.
        length_m: f64,
        /// Of a gap, m.
        gap_m: f64,
    },
    /// The lengths asked for.
    #[error("{0}")]
    Lengths(String),
    /// The station cannot be meant.
    #[error(transparent)]
    Refused(#[from] Refused),
    /// The solver failed.
    #[error(transparent)]
    Study(#[from] Failure),
}

/// One variant, ready to be solved.
struct Prepared {
    name: String,
    layout: Layout,
    line: Line,
    seats: Vec<Seat>,
    interaction: Arc<Interaction>,
    readings: Readings,
    chain: Chain,
}

/// One variant's model and answers at one frequency.
struct Solved {
    model: Model,
    answer: Answer,
}

/// Place a choke on the coax of a station.
///
/// # Inputs
/// - `nominal`: the station as written; its frequencies, power and limits count
/// - `variants`: what must hold too, by name
///
/// # Errors
/// [`PlaceFailure`] where the question cannot be meant or a frequency cannot be computed.
pub fn place(
    nominal: &Layout,
    variants: &[(String, Layout)],
    options: &PlaceOptions,
) -> Result<PlaceOutcome, PlaceFailure> {
    place_watched(nominal, variants, options, &Unwatched)
}

/// The same with somebody watching: a step a frequency and soil.
///
/// # Errors
/// As [`place`], and [`Failure::Stopped`] when the watcher says so.
pub fn place_watched(
    nominal: &Layout,
    variants: &[(String, Layout)],
    options: &PlaceOptions,
    watch: &dyn Watch,
) -> Result<PlaceOutcome, PlaceFailure> {
    let highest_hz = highest_hz(nominal)?;
    let candidates = candidates::of(nominal, options)?;
    let mut warnings = nominal.warnings.clone();
    let (places_m, prepared) = prepare(nominal, variants, options, highest_hz, &mut warnings)?;
    let soils = Soils::of(prepared.iter().map(|p| &p.layout));
    let extents: Vec<Extent> = prepared.iter().map(|p| Extent::of(&p.layout)).collect();
    let earth =
        |f: usize, soil: usize| soils.surroundings(nominal.operation.frequencies[f].frequency_hz, soil, &extents);
    watch.begins(nominal.operation.frequencies.len() * soils.count(), 0);
    let solved = solve(&prepared, nominal, &candidates, (&soils, &earth), watch)?;
    let mut outcome = outcome(nominal, &prepared, &candidates, places_m, &solved)?;
    outcome.warnings = warnings;
    outcome.warnings.extend(protective_warnings(nominal));
    verdict::decide(&mut outcome);
    outcome.clamp = clamp::places(&outcome, &prepared, &solved);
    Ok(outcome)
}

fn highest_hz(nominal: &Layout) -> Result<f64, Failure> {
    let highest_hz = nominal.operation.frequencies.iter().map(|p| p.frequency_hz).fold(0.0, f64::max);
    if highest_hz > 0.0 { Ok(highest_hz) } else { Err(Failure::NoFrequency) }
}

/// The layout without the chokes on its coax that are to be placed.
fn without_chokes(layout: &Layout, keep: &[String]) -> Layout {
    let shield = layout.coax.as_ref().map(|c| c.conductor);
    let mut out = layout.clone();
    out.parts.retain(|p| p.kind != PartKind::Choke || Some(p.conductor) != shield || keep.contains(&p.name));
    out
}

/// Meshes, ports and seats of every variant, and the places they share.
fn prepare(
    nominal: &Layout,
    variants: &[(String, Layout)],
    options: &PlaceOptions,
    highest_hz: f64,
    warnings: &mut Vec<Warning>,
) -> Result<(Vec<f64>, Vec<Prepared>), PlaceFailure> {
    let stations = lined(nominal, variants, options, highest_hz)?;
    let places_m = places(&stations, options.step_m, warnings)?;
    let prepared = ready(stations, &places_m, options.density, highest_hz);
    Ok((places_m, prepared))
}

/// One variant without the chokes that are to be placed, and its coax.
struct Lined {
    name: String,
    layout: Layout,
    line: Line,
}

/// The station as written and its variants.
fn lined(
    nominal: &Layout,
    variants: &[(String, Layout)],
    options: &PlaceOptions,
    highest_hz: f64,
) -> Result<Vec<Lined>, PlaceFailure> {
    let all = std::iter::once(("nominal".to_string(), nominal)).chain(variants.iter().map(|(n, l)| (n.clone(), l)));
    all.map(|(name, layout)| {
        let layout = without_chokes(layout, &options.keep);
        let about = if name == "nominal" { "the station".to_string() } else { format!("variant \"{name}\"") };
        let line = Line::of(&layout, SPEED_OF_LIGHT_M_PER_S / highest_hz).ok_or(PlaceFailure::NoCoax { about })?;
        Ok(Lined { name, layout, line })
    })
    .collect()
}

/// Places of the station's own coax that every variant has, m.
fn places(stations: &[Lined], step_m: f64, warnings: &mut Vec<Warning>) -> Result<Vec<f64>, PlaceFailure> {
    let own = &stations[0].line;
    let end_m = stations.iter().map(|s| s.line.length_m).fold(own.length_m, f64::min);
    if end_m < own.length_m - 1e-3 {
        warnings.push(Warning {
            about: "coax".to_string(),
            message: format!(
                "in a variant the coax is only {} long, so places end there; the station's own is {}",
                metres(end_m),
                metres(own.length_m)
            ),
        });
    }
    let in_range = (1e-3..=1.0).contains(&step_m) && end_m / step_m <= MOST_PLACES as f64;
    if !in_range {
        return Err(PlaceFailure::Step { step_m, length_m: end_m });
    }
    let mut places_m = own.places(step_m, end_m);
    places_m.retain(|p| stations.iter().all(|s| s.line.seat(*p).is_some()));
    if places_m.is_empty() {
        return Err(PlaceFailure::NoRoom { length_m: own.length_m, gap_m: own.gap_m });
    }
    Ok(places_m)
}

/// Meshes and seats of every variant; every place must have a seat in all of them.
fn ready(stations: Vec<Lined>, places_m: &[f64], density: Density, highest_hz: f64) -> Vec<Prepared> {
    let interactions = interactions(&stations, density, highest_hz);
    let prepared = stations.into_iter().zip(interactions).map(|(Lined { name, layout, line }, interaction)| Prepared {
        name,
        seats: places_m.iter().filter_map(|p| line.seat(*p)).collect(),
        readings: Readings::of(&layout, interaction.mesh(), &line),
        chain: Chain::of(&layout),
        layout,
        line,
        interaction,
    });
    prepared.collect()
}

/// One prepared mesh for each variant, shared where only the soil differs.
fn interactions(stations: &[Lined], density: Density, highest_hz: f64) -> Vec<Arc<Interaction>> {
    // everything a mesh and its static moments depend on, exactly (a float's Debug form is exact)
    let geometry = |layout: &Layout| {
        let earth = std::mem::discriminant(&layout.earth);
        format!("{earth:?} {:?} {:?} {:?} {:?}", layout.conductors, layout.junctions, layout.feed, layout.parts)
    };
    let keys: Vec<String> = stations.iter().map(|s| geometry(&s.layout)).collect();
    let first: Vec<usize> = keys.iter().map(|k| keys.iter().position(|o| o == k).unwrap_or(0)).collect();
    let made: Vec<Option<Arc<Interaction>>> = (0..stations.len())
        .into_par_iter()
        .map(|n| {
            let Lined { layout, line, .. } = &stations[n];
            let make =
                || Interaction::new(Mesh::new(layout, highest_hz, density, &line.gaps()), layout.earth != Earth::None);
            (first[n] == n).then(|| Arc::new(make()))
        })
        .collect();
    first.iter().filter_map(|n| made[*n].clone()).collect()
}

/// Which variants stand over the same soil: they share its tables.
struct Soils(Vec<(Earth, Vec<usize>)>);

impl Soils {
    fn of<'a>(layouts: impl Iterator<Item = &'a Layout>) -> Self {
        let mut earths: Vec<(Earth, Vec<usize>)> = Vec::new();
        for (v, layout) in layouts.enumerate() {
            match earths.iter_mut().find(|e| e.0 == layout.earth) {
                Some(e) => e.1.push(v),
                None => earths.push((layout.earth, vec![v])),
            }
        }
        Self(earths)
    }

    fn count(&self) -> usize {
        self.0.len()
    }

    /// One soil at one frequency, over the space that its variants take up.
    fn surroundings(&self, frequency_hz: f64, soil: usize, extents: &[Extent]) -> Result<Arc<Surroundings>, Failure> {
        let (earth, members) = &self.0[soil];
        let extent = members[1..].iter().fold(extents[members[0]], |all, v| all.union(extents[*v]));
        Ok(Arc::new(Surroundings::new(frequency_hz, earth.at(frequency_hz), &extent)?))
    }
}

/// The surroundings of a frequency and soil, both by index.
type EarthOf<'a> = &'a (dyn Fn(usize, usize) -> Result<Arc<Surroundings>, Failure> + Sync);

/// All models and answers, `[variant][frequency]`.
fn solve(
    prepared: &[Prepared],
    nominal: &Layout,
    candidates: &[Candidate],
    (soils, earth_at): (&Soils, EarthOf),
    watch: &dyn Watch,
) -> Result<Vec<Vec<Solved>>, PlaceFailure> {
    let frequencies = &nominal.operation.frequencies;
    let power_w = nominal.operation.power_w;
    // the highest frequencies over soil take longest: they start first
    let jobs: Vec<(usize, usize)> =
        (0..frequencies.len()).rev().flat_map(|f| (0..soils.count()).map(move |e| (f, e))).collect();
    let done: Vec<Vec<(usize, usize, Solved)>> = jobs
        .par_iter()
        .map(|&(f, e)| {
            if watch.stop() {
                return Err(Failure::Stopped.into());
            }
            let surroundings = earth_at(f, e)?;
            let members = soils.0[e].1.iter();
            let solved = members
                .map(|&v| Ok((v, f, solve_one(&prepared[v], &surroundings, candidates, power_w)?)))
                .collect::<Result<Vec<_>, PlaceFailure>>();
            watch.step_done();
            solved
        })
        .collect::<Result<_, PlaceFailure>>()?;
    let mut sorted: Vec<(usize, usize, Solved)> = done.into_iter().flatten().collect();
    sorted.sort_by_key(|s| (s.0, s.1));
    let mut out: Vec<Vec<Solved>> = prepared.iter().map(|_| Vec::with_capacity(frequencies.len())).collect();
    for (v, _, solved) in sorted {
        out[v].push(solved);
    }
    Ok(out)
}

fn solve_one(
    variant: &Prepared,
    earth: &Surroundings,
    candidates: &[Candidate],
    power_w: f64,
) -> Result<Solved, PlaceFailure> {
    let frequency_hz = earth.frequency_hz();
    let parts: Vec<Complex64> = variant.layout.parts.iter().map(|p| network::impedance(&p.law, frequency_hz)).collect();
    let model = Model::solve(&variant.interaction, earth, &variant.line, &variant.readings, &parts)
        .map_err(|source| Failure::Singular { frequency_hz, source })?;
    let chokes: Vec<Complex64> = candidates.iter().map(|c| network::impedance(&c.law, frequency_hz)).collect();
    let answer = Answer::of(&model, variant, &chokes, frequency_hz, power_w).map_err(Failure::from)?;
    Ok(Solved { model, answer })
}

fn outcome(
    nominal: &Layout,
    prepared: &[Prepared],
    candidates: &[Candidate],
    places_m: Vec<f64>,
    solved: &[Vec<Solved>],
) -> Result<PlaceOutcome, PlaceFailure> {
    let coax = nominal.coax.as_ref().ok_or(PlaceFailure::NoCoax { about: "the station".to_string() })?;
    let mut outcome = answers::arrays(solved, candidates.len());
    describe(&mut outcome, nominal, prepared.iter().map(|p| p.name.clone()).collect(), candidates);
    outcome.entry_at_m = coax.entry_m;
    outcome.coax_length_m = coax.length_m;
    outcome.joins_m.clone_from(&prepared[0].line.joins_m);
    outcome.reachable_m = coax.reachable_m.iter().map(|&(a, b)| [a, b]).collect();
    outcome.places_m = places_m;
    Ok(outcome)
}

/// What was asked of which station.
fn describe(outcome: &mut PlaceOutcome, nominal: &Layout, variants: Vec<String>, candidates: &[Candidate]) {
    let frequencies = &nominal.operation.frequencies;
    outcome.braidwise = env!("CARGO_PKG_VERSION").to_string();
    outcome.station.clone_from(&nominal.title);
    outcome.power_w = nominal.operation.power_w;
    outcome.limits = LimitsOutcome { entry_current_a: nominal.limits.entry_current_a, swr: nominal.limits.swr };
    outcome.variants = variants;
    outcome.chokes = candidates.iter().map(|c| c.outcome(frequencies)).collect();
    outcome.frequencies_hz = frequencies.iter().map(|f| f.frequency_hz).collect();
    outcome.bands = frequencies.iter().map(|f| f.band.clone()).collect();
}

/// A choke goes around a safety conductor's join, never in place of it.
fn protective_warnings(layout: &Layout) -> Vec<Warning> {
    let Some(shield) = layout.coax.as_ref().map(|c| c.conductor) else { return Vec::new() };
    let joined = layout.junctions.iter().filter(|j| j.members.iter().any(|m| m.0 == shield));
    let bonds = joined.flat_map(|j| &j.members).map(|m| &layout.conductors[m.0]).filter(|c| c.protective);
    bonds
        .map(|c| Warning {
            about: c.name.clone(),
            message: format!(
                "\"{}\" is a protective bond of the shield: it stays as it is, whatever the choke does; put the choke around the \
                 coax beside it, never into the bond",
                c.name
            ),
        })
        .collect()
}
