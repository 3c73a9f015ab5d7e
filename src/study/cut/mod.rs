//! How long a conductor should be: one or two lengths scanned over every frequency and variant, and the choice among them.
//!
//! Takes checked stations (the one written and its variants) and a [`Question`]; gives a [`CutOutcome`]. The steps: `moving` what is
//! scanned and which end of it moves, `lengths` which lengths can be built, `scan` every length solved, `nested` with what
//! lengths have in common computed once, `reading` what is kept of a
//! solution, `radiation` the power into the far field, `judge` windows and picks, `avoid` resonances to stay away from, `trim` how the match moves with length.

mod avoid;
mod coax;
mod judge;
mod lengths;
mod moving;
mod nested;
mod radiation;
mod reading;
mod scan;
mod trim;

use super::{Failure, Unwatched, Watch};
use crate::layout::Warning;
use crate::mesh::Density;
use crate::network::ChainError;
use crate::outcome::cut::{CutOutcome, OverLength};
use crate::outcome::place::LimitsOutcome;
use crate::station::{Catalogue, Document, Refused, Station};
pub(super) use coax::CoaxLengths;
use lengths::Axis;
use reading::Reading;
use scan::{Grid, Scan};

/// Most combinations of lengths in one question.
pub const MOST_LENGTHS: usize = 20_000;

/// Lengths of one conductor.
#[derive(Debug, Clone, PartialEq)]
pub struct Lengths {
    /// "coax", a wire or a star of radials by name.
    pub conductor: String,
    /// m, ascending.
    pub lengths_m: Vec<f64>,
}

/// What is asked.
#[derive(Debug, Clone, PartialEq)]
pub struct Question {
    /// The conductor scanned.
    pub first: Lengths,
    /// A conductor scanned jointly.
    pub second: Option<Lengths>,
    /// Lengths of the first that can be bought: as written, m.
    pub stock: Vec<(String, f64)>,
    /// How it is computed; the answer is the same.
    pub method: Method,
    /// Mesh density.
    pub density: Density,
    /// Whether the trim rule is wanted: for a single frequency it takes a solve at one more beside it.
    pub trim: bool,
}

/// How a scan is computed.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Method {
    /// What lengths have in common is computed once.
    #[default]
    Shared,
    /// Every length filled and factored on its own, on the same meshes.
    Alone,
}

/// Why a question about lengths has no answer.
#[derive(Debug, Clone, thiserror::Error)]
pub enum CutFailure {
    /// The question cannot be meant.
    #[error("{0}")]
    Question(String),
    /// The station cannot be meant.
    #[error(transparent)]
    Refused(#[from] Refused),
    /// The equations failed.
    #[error(transparent)]
    Solving(#[from] Failure),
}

impl From<ChainError> for CutFailure {
    fn from(error: ChainError) -> Self {
        CutFailure::Solving(Failure::Chain(error))
    }
}

/// The station as written, named "nominal", and its variants.
///
/// # Errors
/// [`Refused`] with the faults of the station, or else those of its variants.
pub fn variants_of(document: &Document, catalogue: &dyn Catalogue) -> Result<Vec<(String, Station)>, Refused> {
    document.stations(catalogue)
}

/// Scan lengths.
///
/// # Inputs
/// - `stations`: the nominal one first, at least one
///
/// # Errors
/// [`CutFailure`] when the question cannot be meant or a solution fails.
pub fn cut(stations: &[(String, Station)], question: &Question) -> Result<CutOutcome, CutFailure> {
    cut_watched(stations, question, &Unwatched)
}

/// The same with somebody watching: a step a length, frequency and variant.
///
/// # Errors
/// As [`cut`], and [`Failure::Stopped`] when the watcher says so.
pub fn cut_watched(
    stations: &[(String, Station)],
    question: &Question,
    watch: &dyn Watch,
) -> Result<CutOutcome, CutFailure> {
    let (mut first, second) = axes(stations, question)?;
    let mut warnings = first.warnings.clone();
    warnings.extend(second.iter().flat_map(|s| s.warnings.clone()));
    let stock = lengths::stock(stations, &mut first, &question.stock, &mut warnings);
    let scan = Scan::new(stations, &first, second.as_ref(), question, watch)?;
    let grid = scan.grid(&first.lengths_m, second.as_ref().map(|s| s.lengths_m.as_slice()))?;
    let judged = judge::judge(&scan, &grid, &first, second.as_ref());
    let chosen = judged.picks.first().map_or((first.present_m, None), |p| (p.length_m, p.second_length_m));
    let stock = judge::stock(&scan, &stock, chosen.1)?;
    let trim = if question.trim { trim::rule(&scan, &grid, (&first, second.as_ref()), chosen)? } else { Vec::new() };
    for warning in &scan.nominal().warnings {
        if !warnings.contains(warning) {
            warnings.push(warning.clone());
        }
    }
    Ok(outcome(&scan, &grid, (first, second), judged, Tail { stock, trim, warnings }))
}

/// What stands behind the arrays.
struct Tail {
    stock: Vec<crate::outcome::cut::StockOutcome>,
    trim: Vec<crate::outcome::cut::TrimOutcome>,
    warnings: Vec<Warning>,
}

/// Both axes, checked.
fn axes(stations: &[(String, Station)], question: &Question) -> Result<(Axis, Option<Axis>), CutFailure> {
    let asked = question.first.lengths_m.len() * question.second.as_ref().map_or(1, |s| s.lengths_m.len());
    if asked > MOST_LENGTHS {
        return Err(CutFailure::Question(format!(
            "the ranges ask for {asked} combinations of lengths and {MOST_LENGTHS} are the most; take longer steps"
        )));
    }
    let first = lengths::axis(stations, &question.first, None)?;
    let second = match &question.second {
        Some(second) if second.conductor == question.first.conductor => {
            return Err(CutFailure::Question(format!(
                "--with names {} again; name another conductor, or leave --with out",
                second.conductor
            )));
        }
        Some(second) => Some(lengths::axis(stations, second, Some((&first.target, first.anchor_m())))?),
        None => None,
    };
    Ok((first, second))
}

fn outcome(
    scan: &Scan,
    grid: &Grid,
    (first, second): (Axis, Option<Axis>),
    judged: judge::Judged,
    tail: Tail,
) -> CutOutcome {
    let layout = scan.nominal();
    let of = |read: fn(&Reading) -> f64| over(grid, second.is_some(), read);
    let volts = |read: fn(&Reading) -> Option<f64>| over(grid, second.is_some(), read);
    CutOutcome {
        braidwise: env!("CARGO_PKG_VERSION").to_string(),
        station: layout.title.clone(),
        power_w: layout.operation.power_w,
        limits: LimitsOutcome { entry_current_a: layout.limits.entry_current_a, swr: layout.limits.swr },
        variants: scan.variants(),
        frequencies_hz: scan.frequencies_hz.clone(),
        bands: layout.operation.frequencies.iter().map(|f| f.band.clone()).collect(),
        moving_end: first.target.moving_end(layout),
        present_length_m: first.present_m,
        lengths_to_avoid: avoid::resonances(scan, grid, &first, judged.picks.first().map(|p| p.window_m)),
        entry_current_a: of(|r| r.entry_current_a),
        entry_voltage_v: volts(|r| r.entry_voltage_v),
        end_voltage_v: volts(|r| r.end_voltage_v),
        last_metre_current_a: of(|r| r.last_metre_current_a),
        feed_ohm: over(grid, second.is_some(), |r| r.feed_ohm),
        swr: of(|r| r.swr),
        radiated_fraction: of(|r| r.radiated_fraction),
        conductor: first.target.name().to_owned(),
        lengths_m: first.lengths_m,
        second_conductor: second.as_ref().map(|s| s.target.name().to_owned()),
        second_lengths_m: second.map(|s| s.lengths_m),
        verdict: judged.verdict,
        why: judged.why,
        picks: judged.picks,
        stock: tail.stock,
        trim: tail.trim,
        warnings: tail.warnings,
    }
}

/// One quantity on the axes of the outcome.
fn over<T>(grid: &Grid, two: bool, read: impl Fn(&Reading) -> T) -> OverLength<T> {
    let rows = |v: usize, f: usize, l: usize| (0..grid.seconds).map(|s| read(grid.at(v, f, l, s))).collect::<Vec<T>>();
    if two {
        let planes = |v, f| (0..grid.lengths).map(|l| rows(v, f, l)).collect();
        OverLength::Two((0..grid.variants).map(|v| (0..grid.frequencies).map(|f| planes(v, f)).collect()).collect())
    } else {
        let line = |v, f| (0..grid.lengths).map(|l| read(grid.at(v, f, l, 0))).collect();
        OverLength::One((0..grid.variants).map(|v| (0..grid.frequencies).map(|f| line(v, f)).collect()).collect())
    }
}
