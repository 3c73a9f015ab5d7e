//! Curves over frequency from few solves: the port model interpolated, everything lumped applied exactly afterwards.
//!
//! What is interpolated is the structure between its ports: the admittance matrix of feed gap and part gaps, and what one volt
//! at each port makes of current and voltage at the entry and at the radio. All of these have the same resonances, so one
//! rational function serves them ([`super::rational`]). Chokes, inline parts, transformer and line follow at every
//! frequency from their own laws and are exact.

use super::predict::Failure;
use super::rational::{Curve, CurveError, adaptive_from};
use super::watch::{Unwatched, Watch};
use crate::field::Solution;
use crate::interaction::{Extent, Factored, Interaction, Surroundings};
use crate::layout::{Coax, Earth, Layout};
use crate::mesh::{Density, Mesh};
use crate::network::{self, Chain};
use crate::outcome::curve::{CurveBand, CurveOutcome, CurvePoint, InterpolatedCurve, ShieldCurvePoint};
use crate::ports::PortModel;
use crate::quantity::SPEED_OF_LIGHT_M_PER_S;
use nalgebra::DMatrix;
use num_complex::Complex64;
use rayon::prelude::*;

/// How a curve is made.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct CurveOptions {
    /// Mesh density.
    pub density: Density,
    /// Relative error of the port model aimed at.
    pub tolerance: f64,
    /// Solves at most.
    pub most_solves: usize,
}

impl Default for CurveOptions {
    fn default() -> Self {
        // the README's station from 3 to 30 MHz to 0.1 % takes fewer than 25 (benches/curve.rs); longer conductors take more
        Self { density: Density::default(), tolerance: 1e-3, most_solves: 80 }
    }
}

/// A station's port model over a range of frequencies.
#[derive(Debug, Clone)]
pub struct PortCurve<'a> {
    layout: &'a Layout,
    curve: Curve,
    tolerance: f64,
}

/// Places of the shield whose current and voltage are interpolated.
#[derive(Debug, Clone, Copy)]
struct Place {
    element: usize,
    xi: f64,
}

/// The interpolated values at one frequency, taken apart.
struct Values {
    admittance_s: DMatrix<Complex64>,
    /// For each port: entry current, entry voltage, end current, end voltage, for 1 V at that port and the others shorted.
    shield: Vec<[Complex64; OBSERVED]>,
}

const OBSERVED: usize = 4;
/// Solves a curve starts from: of 8 to 14, measured on all models from 3 to 30 MHz, this took the README's station 23 and came second
/// in all (596 solves on 22 models; the others 590 to 606).
const FIRST_SOLVES: usize = 11;

impl<'a> PortCurve<'a> {
    /// Solves at as many frequencies as the tolerance needs, two or more at a time on the cores there are.
    ///
    /// # Errors
    /// [`Failure`] where a frequency cannot be solved; [`Failure::Range`] for an empty or reversed range.
    pub fn new(layout: &'a Layout, low_hz: f64, high_hz: f64, options: CurveOptions) -> Result<Self, Failure> {
        Self::watched(layout, (low_hz, high_hz), options, &Unwatched)
    }

    /// The same with somebody watching: a step a solve, announced as they turn out to be needed.
    ///
    /// # Errors
    /// As [`PortCurve::new`], and [`Failure::Stopped`] when the watcher says so.
    pub fn watched(
        layout: &'a Layout,
        (low_hz, high_hz): (f64, f64),
        options: CurveOptions,
        watch: &dyn Watch,
    ) -> Result<Self, Failure> {
        if !(low_hz > 0.0 && low_hz < high_hz && high_hz.is_finite()) {
            return Err(Failure::Range { low_hz, high_hz });
        }
        let mesh = Mesh::new(layout, high_hz, options.density, &[]);
        let interaction = Interaction::new(mesh, layout.earth != Earth::None);
        let extent = Extent::of(layout);
        let sampler = |frequencies: &[f64]| {
            watch.begins(frequencies.len(), 0);
            frequencies
                .par_iter()
                .map(|f| {
                    if watch.stop() {
                        return Err(Failure::Stopped);
                    }
                    let sample = sample(layout, &interaction, &extent, *f);
                    watch.step_done();
                    sample
                })
                .collect::<Result<Vec<_>, Failure>>()
        };
        let curve = adaptive_from(FIRST_SOLVES, sampler, (low_hz, high_hz), options.tolerance, options.most_solves)
            .map_err(|e| match e {
                CurveError::Sample(failure) => failure,
                CurveError::Range { low, high } => Failure::Range { low_hz: low, high_hz: high },
                CurveError::Shape { .. } => Failure::Curve { low_hz, high_hz },
            })?;
        Ok(Self { layout, curve, tolerance: options.tolerance })
    }

    /// Frequencies solved, Hz, rising.
    #[must_use]
    pub fn solved_at_hz(&self) -> &[f64] {
        self.curve.samples()
    }

    /// Estimated largest relative error of any entry of the port model within the range.
    #[must_use]
    pub fn error_estimate(&self) -> f64 {
        self.curve.error_estimate()
    }

    /// The station at frequencies within the range.
    ///
    /// # Errors
    /// [`Failure::Chain`] where no power can flow.
    pub fn outcome(&self, frequencies_hz: &[f64]) -> Result<InterpolatedCurve, Failure> {
        let points = frequencies_hz.par_iter().map(|f| self.at(*f)).collect::<Result<Vec<_>, Failure>>()?;
        Ok(InterpolatedCurve {
            curve: CurveOutcome {
                station: self.layout.title.clone(),
                reference_ohm: self.layout.radio.impedance_ohm,
                swr_limit: Some(self.layout.limits.swr),
                bands: self.bands(),
                points: points.iter().map(|p| p.0).collect(),
            },
            shield: points.iter().filter_map(|p| p.1).collect(),
            error_estimate: self.curve.error_estimate(),
            tolerance: self.tolerance,
            converged: self.curve.converged(),
            solves: self.curve.samples().len(),
        })
    }

    /// The station's bands that lie within the range.
    fn bands(&self) -> Vec<CurveBand> {
        let samples = self.curve.samples();
        let (low, high) = (samples.first().copied().unwrap_or(0.0), samples.last().copied().unwrap_or(0.0));
        bands(self.layout).into_iter().filter(|b| b.from_hz >= 0.999 * low && b.to_hz <= 1.001 * high).collect()
    }

    fn at(&self, frequency_hz: f64) -> Result<(CurvePoint, Option<ShieldCurvePoint>), Failure> {
        let values = self.values(frequency_hz);
        let parts: Vec<Complex64> =
            self.layout.parts.iter().map(|p| network::impedance(&p.law, frequency_hz)).collect();
        let model = PortModel { admittance_s: values.admittance_s, currents_a: faer::Mat::new() };
        let currents = model.loaded_currents(&parts);
        let feed_ohm = currents[0].inv();
        let state = Chain::of(self.layout).at(frequency_hz).state(feed_ohm, self.layout.operation.power_w)?;
        let observed: [f64; OBSERVED] = std::array::from_fn(|k| {
            // voltages at the ports: 1 at the feed, −Z I at every part
            let of_parts = (1..currents.len()).map(|p| -values.shield[p][k] * parts[p - 1] * currents[p]);
            (values.shield[0][k] + of_parts.sum::<Complex64>()).norm() * state.feed_voltage_v
        });
        let shield = self.layout.coax.as_ref().map(|coax| {
            // the potential has no meaning to a person below the surface
            let [entry_m, end_m] = heights_m(self.layout, coax);
            ShieldCurvePoint {
                frequency_hz,
                entry_current_a: observed[0],
                entry_voltage_v: (entry_m >= 0.0).then_some(observed[1]),
                end_current_a: observed[2],
                end_voltage_v: (end_m >= 0.0).then_some(observed[3]),
            }
        });
        let point = CurvePoint { frequency_hz, feed_ohm, radio_ohm: state.radio_ohm, swr: state.radio_swr };
        Ok((point, shield))
    }

    fn values(&self, frequency_hz: f64) -> Values {
        let mut flat = self.curve.eval(frequency_hz);
        for (value, shape) in flat.iter_mut().zip(shapes(self.layout, frequency_hz)) {
            *value *= shape;
        }
        let ports = self.layout.parts.len() + 1;
        let mut admittance_s = DMatrix::zeros(ports, ports);
        let mut next = flat.into_iter();
        for i in 0..ports {
            for j in i..ports {
                let y = next.next().unwrap_or_default();
                admittance_s[(i, j)] = y;
                admittance_s[(j, i)] = y;
            }
        }
        let rest: Vec<Complex64> = next.collect();
        let observed = |p: usize| std::array::from_fn(|k| rest.get(p * OBSERVED + k).copied().unwrap_or_default());
        Values { admittance_s, shield: (0..ports).map(observed).collect() }
    }
}

/// A curve through each band of a station, edges included, all in one.
///
/// Up to two bands are interpolated each by itself, more of them in one range from the lowest edge to the highest: that takes
/// fewer solves.
///
/// # Errors
/// [`Failure::NoFrequency`] where the station names no band, else as [`PortCurve`].
pub fn of_bands(layout: &Layout, points_a_band: usize, options: CurveOptions) -> Result<InterpolatedCurve, Failure> {
    of_bands_watched(layout, points_a_band, options, &Unwatched)
}

/// The same with somebody watching.
///
/// # Errors
/// As [`of_bands`], and [`Failure::Stopped`] when the watcher says so.
pub fn of_bands_watched(
    layout: &Layout,
    points_a_band: usize,
    options: CurveOptions,
    watch: &dyn Watch,
) -> Result<InterpolatedCurve, Failure> {
    let bands = bands(layout);
    let (Some(first), Some(last)) = (bands.first(), bands.last()) else { return Err(Failure::NoFrequency) };
    let grid = |b: &CurveBand| spaced(b.from_hz, b.to_hz, points_a_band);
    if bands.len() > 2 {
        let highest = bands.iter().map(|b| b.to_hz).fold(last.to_hz, f64::max);
        let mut frequencies: Vec<f64> = bands.iter().flat_map(grid).collect();
        frequencies.sort_by(f64::total_cmp);
        return PortCurve::watched(layout, (first.from_hz, highest), options, watch)?.outcome(&frequencies);
    }
    let mut whole = PortCurve::watched(layout, (first.from_hz, first.to_hz), options, watch)?.outcome(&grid(first))?;
    for band in &bands[1..] {
        let more = PortCurve::watched(layout, (band.from_hz, band.to_hz), options, watch)?.outcome(&grid(band))?;
        whole.curve.points.extend(more.curve.points);
        whole.shield.extend(more.shield);
        whole.error_estimate = whole.error_estimate.max(more.error_estimate);
        whole.converged &= more.converged;
        whole.solves += more.solves;
    }
    whole.curve.bands = bands;
    Ok(whole)
}

/// Equally spaced frequencies, ends included, at least two.
#[must_use]
pub fn spaced(low_hz: f64, high_hz: f64, count: usize) -> Vec<f64> {
    let last = count.max(2) - 1;
    // the ends exactly, so that none falls outside the range by rounding
    (0..=last).map(|n| if n == last { high_hz } else { low_hz + (high_hz - low_hz) * n as f64 / last as f64 }).collect()
}

/// The bands of a station, rising.
#[must_use]
pub fn bands(layout: &Layout) -> Vec<CurveBand> {
    let mut out: Vec<CurveBand> = Vec::new();
    for point in &layout.operation.frequencies {
        let (Some(name), hz) = (&point.band, point.frequency_hz) else { continue };
        match out.iter_mut().find(|b| b.name == *name) {
            Some(band) => (band.from_hz, band.to_hz) = (band.from_hz.min(hz), band.to_hz.max(hz)),
            None => out.push(CurveBand { name: name.clone(), from_hz: hz, to_hz: hz }),
        }
    }
    out.sort_by(|a, b| a.from_hz.total_cmp(&b.from_hz));
    out
}

/// The values to interpolate at one frequency: the upper triangle of the admittance matrix, then what each port makes of the
/// shield.
fn sample(
    layout: &Layout,
    interaction: &Interaction,
    extent: &Extent,
    frequency_hz: f64,
) -> Result<Vec<Complex64>, Failure> {
    let earth = Surroundings::new(frequency_hz, layout.earth.at(frequency_hz), extent)?;
    let singular = |source| Failure::Singular { frequency_hz, source };
    let (matrix, potential_map) = interaction.fill_with_potentials(&earth);
    let model =
        PortModel::from_factored(interaction.mesh(), &Factored::new(matrix).map_err(singular)?).map_err(singular)?;
    let ports = model.admittance_s.nrows();
    let mut out = Vec::with_capacity(ports * (ports + 1) / 2 + ports * OBSERVED);
    for i in 0..ports {
        out.extend((i..ports).map(|j| model.admittance_s[(i, j)]));
    }
    if let Some(coax) = &layout.coax {
        let places = places(layout, coax, interaction.mesh());
        for port in 0..ports {
            let unknowns: Vec<Complex64> =
                (0..interaction.mesh().unknowns).map(|row| model.currents_a[(row, port)]).collect();
            let solution = Solution::new(interaction.mesh(), &unknowns);
            let potentials = Solution { currents: potential_map.along(&solution.currents) };
            let [current, entry, end_current, end] = places;
            out.extend([
                current.map_or(Complex64::ZERO, |p| solution.current_at(p.element, p.xi)),
                entry.map_or(Complex64::ZERO, |p| potentials.current_at(p.element, p.xi)),
                end_current.map_or(Complex64::ZERO, |p| solution.current_at(p.element, p.xi)),
                end.map_or(Complex64::ZERO, |p| potentials.current_at(p.element, p.xi)),
            ]);
        }
    }
    for (value, shape) in out.iter_mut().zip(shapes(layout, frequency_hz)) {
        *value /= shape;
    }
    Ok(out)
}

/// What every value is divided by before it is interpolated, and multiplied with afterwards: known factors that would cost poles.
///
/// Currents rise with frequency, charges do not; and what travels d along the coax turns by k d, of which half is taken out
/// because part of the current stands. Over 3 to 30 MHz this saved 2 to 6 of 28 solves on the models with 14 m of coax.
fn shapes(layout: &Layout, frequency_hz: f64) -> Vec<Complex64> {
    let ports = layout.parts.len() + 1;
    let rise = Complex64::from(frequency_hz / 1e7);
    let mut out = vec![rise; ports * (ports + 1) / 2];
    if let Some(coax) = &layout.coax {
        let half_k_per_m = std::f64::consts::PI * frequency_hz / SPEED_OF_LIGHT_M_PER_S;
        for port in 0..ports {
            let from_m =
                port.checked_sub(1).and_then(|p| layout.parts.get(p)).filter(|p| p.conductor == coax.conductor);
            let from_m = from_m.map_or(0.0, |p| p.at_m);
            let turn = |to_m: f64| Complex64::from_polar(1.0, -half_k_per_m * (to_m - from_m).abs());
            let (entry, end) = (turn(coax.entry_m), turn(coax.length_m));
            out.extend([rise * entry, entry, rise * end, end]);
        }
    }
    out
}

/// Where entry current, entry voltage, end current and end voltage are read: the radio side of the entry, the radio's end of
/// the shield. `None` is a current that is zero by definition.
fn places(layout: &Layout, coax: &Coax, mesh: &Mesh) -> [Option<Place>; OBSERVED] {
    let range = mesh.conductor_elements[coax.conductor].clone();
    let last = range.end.checked_sub(1).filter(|k| *k >= range.start).map(|element| Place { element, xi: 1.0 });
    let joined = layout.radio.body.is_some() || ends_joined(layout, coax);
    let end_current = last.filter(|_| joined);
    if coax.length_m - coax.entry_m < 1e-6 {
        // nothing of the shield lies beyond: what goes on is the case of the radio
        let body = layout.radio.body.map(|b| Place { element: mesh.conductor_elements[b].start, xi: -1.0 });
        return [body, last, end_current, last];
    }
    let entry = range.clone().find(|&k| mesh.elements[k].to_m > coax.entry_m + 1e-9).map(|element| {
        let e = &mesh.elements[element];
        Place { element, xi: (2.0 * (coax.entry_m - e.from_m) / e.length_m - 1.0).clamp(-1.0, 1.0) }
    });
    [entry, entry, end_current, last]
}

fn ends_joined(layout: &Layout, coax: &Coax) -> bool {
    let end = (coax.conductor, layout.conductors[coax.conductor].points.len() - 1);
    layout.junctions.iter().any(|j| j.members.contains(&end) && (j.members.len() > 1 || j.to_earth))
}

/// Heights of the entry and of the end of the shield above the surface, m.
fn heights_m(layout: &Layout, coax: &Coax) -> [f64; 2] {
    let conductor = &layout.conductors[coax.conductor];
    let at = conductor.distances_m();
    let last = at.len() - 1;
    let leg = (1..=last).find(|&k| at[k] >= coax.entry_m - 1e-9).unwrap_or(last);
    let (from, to) = (conductor.points[leg - 1].z, conductor.points[leg].z);
    let share = ((coax.entry_m - at[leg - 1]) / (at[leg] - at[leg - 1])).clamp(0.0, 1.0);
    [from + (to - from) * share, conductor.points[last].z]
}
