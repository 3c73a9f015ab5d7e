//! The question of `place` asked of every length of the coax: same places, candidates, frequencies and variants.
//!
//! Soil tables cover all lengths and are made once a frequency and soil. Lengths go through as many at a time as there are threads, and of each
//! only the worst over its variants and how its places stand are kept, so that memory does not grow with the variants.

use super::candidates::{self, Candidate};
use super::joint_verdict;
use super::verdict::{self, Judged};
use super::{
    EarthOf, Lined, PlaceFailure, PlaceOptions, Soils, answers, describe, highest_hz, lined, places, ready, solve,
};
use crate::layout::Layout;
use crate::outcome::joint::{LengthsOutcome, LengthsWithoutOutcome, OverFrequencyAndLength, OverLengthAndPlace};
use crate::outcome::place::{OverFrequency, OverPlace, PlaceOutcome, PlaceVerdict};
use crate::station::{PartSort, Refused, Station};
use crate::study::Failure;
use crate::study::cut::{CoaxLengths, CutFailure};
use crate::study::watch::Watch;
use rayon::prelude::*;

/// Most values of one quantity, over chokes × frequencies × lengths × places: bounds memory.
pub const MOST_VALUES: usize = 2_000_000;

/// Quantities kept of every place: those with limits, in the order of the verdict's, and the heat in the choke.
const KEPT: usize = 5;

/// One length, reduced.
pub(super) struct Row {
    pub(super) length_m: f64,
    /// Limits in the order of the verdict's quantities.
    pub(super) limits: [f64; 4],
    /// How the length stands without a choke.
    pub(super) without: Option<Judged>,
    /// How each place of the common axis stands, `[choke][place]`; `None` where this length has none.
    pub(super) judged: Vec<Vec<Option<Judged>>>,
    /// Of the places within a hand's breadth the worst, `[choke][place]`; `None` where no hand reaches.
    pub(super) robust: Vec<Vec<Option<usize>>>,
    /// Worst over the variants, `[quantity][choke][frequency][place]`.
    pub(super) worst: [Vec<Vec<Vec<Option<f64>>>>; KEPT],
    /// The same without a choke, `[quantity][frequency]`.
    bare: [Vec<Option<f64>>; 4],
}

/// What all lengths share.
struct Asked<'a> {
    /// The station as written and its variants, without the chokes that are to be placed.
    stations: Vec<(String, Station)>,
    lengths: CoaxLengths,
    candidates: Vec<Candidate>,
    options: &'a PlaceOptions,
    highest_hz: f64,
}

/// Place a choke along the coax, its length free too.
///
/// # Inputs
/// - `stations`: the one as written first, then its variants by name, each with the length of its own coax
/// - `lengths_m`: ascending; those that lose a join or leave the route are left out with a warning, by the rules of `cut`
/// - `watch`: told of every frequency, soil and length
///
/// # Errors
/// [`PlaceFailure`] where the question cannot be meant or a frequency cannot be computed.
pub fn place_over_lengths(
    stations: &[(String, Station)],
    lengths_m: &[f64],
    options: &PlaceOptions,
    watch: &dyn Watch,
) -> Result<LengthsOutcome, PlaceFailure> {
    let Some((_, written)) = stations.first() else { return Err(Failure::NoFrequency.into()) };
    let nominal = Layout::place(written).map_err(|faults| Refused { sources: written.sources.clone(), faults })?;
    if nominal.coax.is_none() {
        return Err(PlaceFailure::NoCoax { about: "the station".to_string() });
    }
    let highest_hz = highest_hz(&nominal)?;
    let candidates = candidates::of(&nominal, options)?;
    let stations: Vec<(String, Station)> =
        stations.iter().map(|(name, s)| (name.clone(), without_chokes(s, &options.keep))).collect();
    let lengths = CoaxLengths::of(&stations, lengths_m)?;
    let asked = Asked { stations, lengths, candidates, options, highest_hz };
    let places_m = asked.places_m(nominal.operation.frequencies.len())?;
    let rows = asked.rows(&nominal, &places_m, watch)?;
    let mut frame = answers::arrays(&[], 0);
    let names = asked.stations.iter().map(|s| s.0.clone()).collect();
    describe(&mut frame, &nominal, names, &asked.candidates);
    let mut out = outcome(&asked, &nominal, places_m, &rows);
    joint_verdict::decide(&mut out, &frame, &rows);
    Ok(out)
}

/// The station without the chokes on its coax that are to be placed: they go with no length.
fn without_chokes(station: &Station, keep: &[String]) -> Station {
    let mut out = station.clone();
    out.parts.retain(|p| p.sort != PartSort::Choke || p.on.value != "coax" || keep.contains(&p.name.value));
    out
}

impl From<CutFailure> for PlaceFailure {
    fn from(failure: CutFailure) -> Self {
        match failure {
            CutFailure::Question(text) => PlaceFailure::Lengths(text),
            CutFailure::Refused(refused) => PlaceFailure::Refused(refused),
            CutFailure::Solving(failure) => PlaceFailure::Study(failure),
        }
    }
}

impl Asked<'_> {
    /// The variants at a length.
    fn lined(&self, length_m: f64) -> Result<Vec<Lined>, PlaceFailure> {
        let at = |(name, station): &(String, Station)| Ok((name.clone(), self.lengths.place(station, length_m)?));
        let mut layouts = self.stations.iter().map(at).collect::<Result<Vec<(String, Layout)>, CutFailure>>()?;
        let (_, nominal) = layouts.remove(0);
        lined(&nominal, &layouts, self.options, self.highest_hz)
    }

    /// Places of all lengths on one axis, m.
    fn places_m(&self, frequencies: usize) -> Result<Vec<f64>, PlaceFailure> {
        let each = self
            .lengths
            .lengths_m()
            .par_iter()
            .map(|l| places(&self.lined(*l)?, self.options.step_m, &mut Vec::new()))
            .collect::<Result<Vec<_>, PlaceFailure>>()?;
        let mut all: Vec<f64> = each.into_iter().flatten().collect();
        all.sort_by(f64::total_cmp);
        all.dedup_by(|b, a| *b - *a < 1e-9);
        let values = self.candidates.len() * frequencies * self.lengths.lengths_m().len() * all.len();
        if values > MOST_VALUES {
            return Err(PlaceFailure::Lengths(format!(
                "{} chokes at {} places of {} lengths on {frequencies} frequencies are {values} values and {MOST_VALUES} are the \
                 most; take longer steps of the lengths or of the places, or fewer chokes",
                self.candidates.len(),
                all.len(),
                self.lengths.lengths_m().len(),
            )));
        }
        Ok(all)
    }

    fn rows(&self, nominal: &Layout, places_m: &[f64], watch: &dyn Watch) -> Result<Vec<Row>, PlaceFailure> {
        let lengths_m = self.lengths.lengths_m();
        let layouts = self.lined(lengths_m[0])?;
        let soils = Soils::of(layouts.iter().map(|s| &s.layout));
        let frequencies = &nominal.operation.frequencies;
        let jobs: Vec<(usize, usize)> =
            (0..frequencies.len()).flat_map(|f| (0..soils.count()).map(move |s| (f, s))).collect();
        watch.begins(jobs.len() * (1 + lengths_m.len()), 0);
        let tables = jobs
            .par_iter()
            .map(|&(f, soil)| {
                if watch.stop() {
                    return Err(Failure::Stopped);
                }
                let made = soils.surroundings(frequencies[f].frequency_hz, soil, self.lengths.extents());
                watch.step_done();
                made
            })
            .collect::<Result<Vec<_>, Failure>>()?;
        let earth_of = |f: usize, soil: usize| Ok(tables[f * soils.count() + soil].clone());
        let mut rows = Vec::with_capacity(lengths_m.len());
        for some in lengths_m.chunks(rayon::current_num_threads().max(1)) {
            let more = some.par_iter().map(|l| self.row(*l, places_m, (&soils, &earth_of), watch));
            rows.extend(more.collect::<Result<Vec<_>, PlaceFailure>>()?);
        }
        Ok(rows)
    }

    fn row(
        &self,
        length_m: f64,
        places_m: &[f64],
        earths: (&Soils, EarthOf),
        watch: &dyn Watch,
    ) -> Result<Row, PlaceFailure> {
        let stations = self.lined(length_m)?;
        let end_m = stations.iter().map(|s| s.line.length_m).fold(f64::INFINITY, f64::min);
        let fits = |p: f64| p <= end_m + 1e-9 && stations.iter().all(|s| s.line.seat(p).is_some());
        let here: Vec<usize> = (0..places_m.len()).filter(|&p| fits(places_m[p])).collect();
        let here_m: Vec<f64> = here.iter().map(|&p| places_m[p]).collect();
        let prepared = ready(stations, &here_m, self.options.density, self.highest_hz);
        let nominal = prepared[0].layout.clone();
        let solved = solve(&prepared, &nominal, &self.candidates, earths, watch)?;
        let one = super::outcome(&nominal, &prepared, &self.candidates, here_m, &solved)?;
        Ok(Row::of(&one, length_m, &here, places_m.len()))
    }
}

impl Row {
    /// Reduce the answer for one length; `here` are its places on the common axis.
    pub(super) fn of(one: &PlaceOutcome, length_m: f64, here: &[usize], places: usize) -> Self {
        let limits = verdict::limits(one);
        let judged = verdict::judge_all(one, limits);
        let offered = verdict::offered(one);
        let robust: Vec<Vec<Option<usize>>> = judged
            .iter()
            .map(|j| {
                let own: Vec<Option<usize>> = (0..here.len())
                    .map(|p| offered[p].then(|| here[verdict::worst_beside(&one.places_m, j, p)]))
                    .collect();
                spread(own, here, places)
            })
            .collect();
        let chokes = judged.len();
        let plain = |of: &OverPlace<f64>| worst_over(of, chokes, here, places, |v| Some(*v));
        let volts = |of: &OverPlace<Option<f64>>| worst_over(of, chokes, here, places, |v| *v);
        let w = &one.without;
        Self {
            length_m,
            limits,
            without: verdict::judge_without(one, limits),
            judged: judged.into_iter().map(|j| spread(j.into_iter().map(Some).collect(), here, places)).collect(),
            robust,
            worst: [
                plain(&one.entry_current_a),
                plain(&one.last_metre_current_a),
                plain(&one.swr),
                volts(&one.end_voltage_v),
                plain(&one.choke_w),
            ],
            bare: [
                bare(&w.entry_current_a, |v| Some(*v)),
                bare(&w.last_metre_current_a, |v| Some(*v)),
                bare(&w.swr, |v| Some(*v)),
                bare(&w.end_voltage_v, |v| *v),
            ],
        }
    }
}

/// Values of a length's own places on the common axis.
fn spread<T: Clone>(own: Vec<Option<T>>, here: &[usize], places: usize) -> Vec<Option<T>> {
    let mut out = vec![None; places];
    for (value, &p) in own.into_iter().zip(here) {
        out[p] = value;
    }
    out
}

/// Worst over the variants, `[choke][frequency][place]`.
fn worst_over<T>(
    values: &OverPlace<T>,
    chokes: usize,
    here: &[usize],
    places: usize,
    read: impl Fn(&T) -> Option<f64>,
) -> Vec<Vec<Vec<Option<f64>>>> {
    let frequencies = values.first().and_then(|v| v.first()).map_or(0, Vec::len);
    let at = |c: usize, f: usize, p: usize| values.iter().filter_map(|v| read(&v[c][f][p])).reduce(f64::max);
    let line = |c: usize, f: usize| spread((0..here.len()).map(|p| at(c, f, p)).collect(), here, places);
    (0..chokes).map(|c| (0..frequencies).map(|f| line(c, f)).collect()).collect()
}

fn bare<T>(values: &OverFrequency<T>, read: impl Fn(&T) -> Option<f64>) -> Vec<Option<f64>> {
    let frequencies = values.first().map_or(0, Vec::len);
    (0..frequencies).map(|f| values.iter().filter_map(|v| read(&v[f])).reduce(f64::max)).collect()
}

/// The rows as arrays, without the choice.
fn outcome(asked: &Asked, nominal: &Layout, places_m: Vec<f64>, rows: &[Row]) -> LengthsOutcome {
    let frequencies = nominal.operation.frequencies.len();
    let over = |q: usize| -> OverLengthAndPlace {
        let lengths = |c: usize, f: usize| rows.iter().map(|r| r.worst[q][c][f].clone()).collect();
        (0..asked.candidates.len()).map(|c| (0..frequencies).map(|f| lengths(c, f)).collect()).collect()
    };
    let without = |q: usize| -> OverFrequencyAndLength {
        (0..frequencies).map(|f| rows.iter().map(|r| r.bare[q][f]).collect()).collect()
    };
    LengthsOutcome {
        moving_end: asked.lengths.moving_end(nominal),
        present_length_m: asked.lengths.present_m(),
        lengths_m: rows.iter().map(|r| r.length_m).collect(),
        places_m,
        chokes: asked.candidates.iter().map(|c| c.name.clone()).collect(),
        without: LengthsWithoutOutcome {
            entry_current_a: without(0),
            last_metre_current_a: without(1),
            swr: without(2),
            end_voltage_v: without(3),
        },
        end_voltage_limit_v: rows.iter().map(|r| r.limits[3]).collect(),
        entry_current_a: over(0),
        last_metre_current_a: over(1),
        swr: over(2),
        end_voltage_v: over(3),
        choke_w: over(4),
        none_needed_at_m: Vec::new(),
        verdict: PlaceVerdict::NoPlace,
        why: String::new(),
        picks: Vec::new(),
        warnings: asked.lengths.warnings().to_vec(),
    }
}
