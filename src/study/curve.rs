//! Curves over frequency from few solves: the port model interpolated, everything lumped applied exactly afterwards.
//!
//! What is interpolated is the structure between its ports: the admittance matrix of feed gap and part gaps, and what one volt
//! at each port makes of current and voltage at the entry and at the radio. All of these have the same resonances, so one
//! rational function serves them ([`super::rational`]). Chokes, inline parts, transformer and line follow at every
//! frequency from their own laws and are exact.

use super::predict::Failure;
use super::rational::{Curve, CurveError, adaptive};
use crate::field::Solution;
use crate::interaction::{Extent, Interaction, Surroundings};
use crate::layout::{Coax, Earth, Layout};
use crate::mesh::{Density, Mesh};
use crate::network::{self, Chain};
use crate::outcome::curve::{CurveOutcome, ShieldCurve};
use crate::ports::PortModel;
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

impl<'a> PortCurve<'a> {
    /// Solves at as many frequencies as the tolerance needs, two or more at a time on the cores there are.
    ///
    /// # Errors
    /// [`Failure`] where a frequency cannot be solved; [`Failure::Range`] for an empty or reversed range.
    pub fn new(layout: &'a Layout, low_hz: f64, high_hz: f64, options: CurveOptions) -> Result<Self, Failure> {
        if !(low_hz > 0.0 && low_hz < high_hz && high_hz.is_finite()) {
            return Err(Failure::Range { low_hz, high_hz });
        }
        let mesh = Mesh::new(layout, high_hz, options.density, &[]);
        let interaction = Interaction::new(mesh, layout.earth != Earth::None);
        let extent = Extent::of(layout);
        let sampler = |frequencies: &[f64]| {
            frequencies.par_iter().map(|f| sample(layout, &interaction, &extent, *f)).collect::<Result<Vec<_>, Failure>>()
        };
        let curve = adaptive(sampler, low_hz, high_hz, options.tolerance, options.most_solves).map_err(|e| match e {
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
    pub fn outcome(&self, frequencies_hz: &[f64]) -> Result<CurveOutcome, Failure> {
        let points = frequencies_hz.par_iter().map(|f| self.at(*f)).collect::<Result<Vec<_>, Failure>>()?;
        let shield = self.layout.coax.as_ref().map(|coax| {
            let conductor = &self.layout.conductors[coax.conductor];
            let last = conductor.points.len() - 1;
            // the potential has no meaning to a person below the surface
            let above = |height_m: f64| height_m >= 0.0;
            let entry_above = above(height_at(self.layout, coax));
            let end_above = above(conductor.points[last].z);
            let read = |k: usize| points.iter().map(|p| p.shield[k]).collect::<Vec<f64>>();
            let shown = |k: usize, shown: bool| points.iter().map(|p| shown.then_some(p.shield[k])).collect();
            ShieldCurve {
                entry_at_m: coax.entry_m,
                entry_current_a: read(0),
                entry_voltage_v: shown(1, entry_above),
                end_current_a: read(2),
                end_voltage_v: shown(3, end_above),
            }
        });
        Ok(CurveOutcome {
            band: None,
            frequencies_hz: frequencies_hz.to_vec(),
            feed_ohm: points.iter().map(|p| p.feed_ohm).collect(),
            radio_ohm: points.iter().map(|p| p.radio_ohm).collect(),
            radio_swr: points.iter().map(|p| p.radio_swr).collect(),
            shield,
            error_estimate: self.curve.error_estimate(),
            converged: self.curve.converged(),
            tolerance: self.tolerance,
            solves: self.curve.samples().len(),
        })
    }

    fn at(&self, frequency_hz: f64) -> Result<At, Failure> {
        let values = self.values(frequency_hz);
        let parts: Vec<Complex64> =
            self.layout.parts.iter().map(|p| network::impedance(&p.law, frequency_hz)).collect();
        let model = PortModel { admittance_s: values.admittance_s, currents_a: faer::Mat::new() };
        let currents = model.loaded_currents(&parts);
        let feed_ohm = currents[0].inv();
        let state = Chain::of(self.layout).at(frequency_hz).state(feed_ohm, self.layout.operation.power_w)?;
        let mut shield = [0.0; OBSERVED];
        for (k, out) in shield.iter_mut().enumerate() {
            // voltages at the ports: 1 at the feed, −Z I at every part
            let of_parts = (1..currents.len()).map(|p| -values.shield[p][k] * parts[p - 1] * currents[p]);
            *out = (values.shield[0][k] + of_parts.sum::<Complex64>()).norm() * state.feed_voltage_v;
        }
        Ok(At { feed_ohm, radio_ohm: state.radio_ohm, radio_swr: state.radio_swr, shield })
    }

    fn values(&self, frequency_hz: f64) -> Values {
        let flat = self.curve.eval(frequency_hz);
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

/// One frequency of a curve.
struct At {
    feed_ohm: Complex64,
    radio_ohm: Complex64,
    radio_swr: f64,
    shield: [f64; OBSERVED],
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
    let model =
        PortModel::solve(interaction, &earth).map_err(|source| Failure::Singular { frequency_hz, source })?;
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
            let potentials = Solution { currents: interaction.potentials(&earth, &solution.currents) };
            let [current, entry, end_current, end] = places;
            out.extend([
                current.map_or(Complex64::ZERO, |p| solution.current_at(p.element, p.xi)),
                entry.map_or(Complex64::ZERO, |p| potentials.current_at(p.element, p.xi)),
                end_current.map_or(Complex64::ZERO, |p| solution.current_at(p.element, p.xi)),
                end.map_or(Complex64::ZERO, |p| potentials.current_at(p.element, p.xi)),
            ]);
        }
    }
    Ok(out)
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

/// Height of the entry above the surface, m.
fn height_at(layout: &Layout, coax: &Coax) -> f64 {
    let conductor = &layout.conductors[coax.conductor];
    let at = conductor.distances_m();
    let leg = (1..at.len()).find(|&k| at[k] >= coax.entry_m - 1e-9).unwrap_or(at.len() - 1);
    let (from, to) = (conductor.points[leg - 1].z, conductor.points[leg].z);
    let share = ((coax.entry_m - at[leg - 1]) / (at[leg] - at[leg - 1])).clamp(0.0, 1.0);
    from + (to - from) * share
}
