//! Every length solved at every frequency and variant.

use super::lengths::{self, Axis};
use super::moving::Target;
use super::nested;
use super::radiation::{self, Radiation};
use super::reading::{Reading, Solved, Spots};
use super::{CutFailure, Method, Question};
use crate::field::{Solution, Sphere};
use crate::interaction::{Extent, Factored, Interaction, SingularMatrix, Surroundings};
use crate::layout::{Earth, Layout};
use crate::mesh::{Anchor, Density, Mesh};
use crate::network;
use crate::ports::PortModel;
use crate::station::{Refused, Station};
use crate::study::{Failure, Watch};
use num_complex::Complex64;
use rayon::prelude::*;

/// Readings on all axes.
#[derive(Debug, Clone)]
pub(super) struct Grid {
    pub(super) variants: usize,
    pub(super) frequencies: usize,
    pub(super) lengths: usize,
    pub(super) seconds: usize,
    readings: Vec<Reading>,
}

impl Grid {
    pub(super) fn at(&self, variant: usize, frequency: usize, length: usize, second: usize) -> &Reading {
        let row = (variant * self.frequencies + frequency) * self.lengths + length;
        &self.readings[row * self.seconds + second]
    }
}

/// One variant with its earth at every frequency.
pub(super) struct Variant<'a> {
    pub(super) name: String,
    pub(super) station: Station,
    pub(super) earth: Vec<At<'a>>,
}

/// One variant at one frequency.
pub(super) struct At<'a> {
    pub(super) earth: Surroundings,
    pub(super) sphere: Sphere,
    watch: &'a dyn Watch,
}

impl<'a> At<'a> {
    fn new(frequency_hz: f64, layout: &Layout, extent: &Extent, watch: &'a dyn Watch) -> Result<Self, CutFailure> {
        go_on(watch)?;
        let at = layout.earth.at(frequency_hz);
        let earth = Surroundings::new(frequency_hz, at, extent).map_err(Failure::Soil)?;
        let sphere = Sphere::new(frequency_hz, at, extent);
        watch.step_done();
        Ok(Self { earth, sphere, watch })
    }
}

fn go_on(watch: &dyn Watch) -> Result<(), Failure> {
    if watch.stop() { Err(Failure::Stopped) } else { Ok(()) }
}

/// Everything all lengths share.
pub(super) struct Scan<'a> {
    pub(super) frequencies_hz: Vec<f64>,
    pub(super) list: Vec<Variant<'a>>,
    pub(super) targets: Vec<Target>,
    present: Layout,
    extents: Vec<Extent>,
    density: Density,
    highest_hz: f64,
    method: Method,
    watch: &'a dyn Watch,
}

impl<'a> Scan<'a> {
    /// Prepare: the space all lengths take up, and the earth once a frequency and variant.
    ///
    /// # Errors
    /// [`CutFailure`] when a variant names no frequency or its soil cannot be.
    pub(super) fn new(
        stations: &[(String, Station)],
        first: &Axis,
        second: Option<&Axis>,
        question: &Question,
        watch: &'a dyn Watch,
    ) -> Result<Self, CutFailure> {
        let present = Layout::place(&stations[0].1).map_err(|faults| refused(&stations[0].1, faults))?;
        let frequencies_hz: Vec<f64> = present.operation.frequencies.iter().map(|f| f.frequency_hz).collect();
        let highest_hz = frequencies_hz.iter().copied().fold(0.0, f64::max);
        if highest_hz <= 0.0 {
            return Err(Failure::NoFrequency.into());
        }
        let mut extents = first.extents.clone();
        if let Some(second) = second {
            for ((_, station), extent) in stations.iter().zip(&mut extents) {
                for (one_m, other_m) in
                    first.lengths_m.iter().flat_map(|l| second.lengths_m.iter().map(move |s| (*l, *s)))
                {
                    if let Ok(layout) = lengths::place(station, &[(&first.target, one_m), (&second.target, other_m)]) {
                        *extent = extent.union(Extent::of(&layout));
                    }
                }
            }
        }
        watch.begins(stations.len() * frequencies_hz.len(), 0);
        let list = stations
            .par_iter()
            .zip(&extents)
            .map(|((name, station), extent)| {
                let layout = Layout::place(station).map_err(|faults| refused(station, faults))?;
                let at = |f: &f64| At::new(*f, &layout, extent, watch);
                let earth = frequencies_hz.par_iter().map(at).collect::<Result<Vec<_>, CutFailure>>()?;
                Ok(Variant { name: name.clone(), station: station.clone(), earth })
            })
            .collect::<Result<Vec<_>, CutFailure>>()?;
        let targets = std::iter::once(first).chain(second).map(|a| a.target.clone()).collect();
        let (density, method) = (question.density, question.method);
        Ok(Self { frequencies_hz, list, targets, present, extents, density, highest_hz, method, watch })
    }

    /// The station as written, placed.
    pub(super) fn nominal(&self) -> &Layout {
        &self.present
    }

    pub(super) fn variants(&self) -> Vec<String> {
        self.list.iter().map(|v| v.name.clone()).collect()
    }

    /// Solve every combination of lengths.
    ///
    /// # Errors
    /// [`CutFailure`] of the first that cannot be solved.
    pub(super) fn grid(&self, firsts: &[f64], seconds: Option<&[f64]>) -> Result<Grid, CutFailure> {
        let combinations: Vec<Vec<f64>> = match seconds {
            None => firsts.iter().map(|&l| vec![l]).collect(),
            Some(seconds) => firsts.iter().flat_map(|&l| seconds.iter().map(move |&s| vec![l, s])).collect(),
        };
        self.watch.begins(self.list.len() * self.frequencies_hz.len() * combinations.len(), 0);
        let mut readings = Vec::new();
        for variant in &self.list {
            let by_length = match self.method {
                Method::Alone => self.alone(variant, &combinations)?,
                Method::Shared => nested::readings(self, variant, &combinations)?,
            };
            readings.extend((0..self.frequencies_hz.len()).flat_map(|f| by_length.iter().map(move |row| row[f])));
        }
        Ok(Grid {
            variants: self.list.len(),
            frequencies: self.frequencies_hz.len(),
            lengths: firsts.len(),
            seconds: seconds.map_or(1, <[f64]>::len),
            readings,
        })
    }

    /// The layout of a variant at some lengths.
    ///
    /// # Errors
    /// [`CutFailure::Refused`] when it cannot be built.
    pub(super) fn place(&self, variant: &Variant, lengths_m: &[f64]) -> Result<Layout, CutFailure> {
        let sets: Vec<(&Target, f64)> = self.targets.iter().zip(lengths_m.iter().copied()).collect();
        Ok(lengths::place(&variant.station, &sets).map_err(|faults| refused(&variant.station, faults))?)
    }

    /// The mesh of a layout, nested with those of other lengths.
    pub(super) fn mesh(&self, layout: &Layout) -> Mesh {
        Mesh::anchored(layout, self.highest_hz, self.density, &Anchor::new(layout, &self.moving(layout)))
    }

    /// Conductors whose last points move.
    pub(super) fn moving(&self, layout: &Layout) -> Vec<usize> {
        self.targets.iter().flat_map(|t| t.conductors(layout)).collect()
    }

    /// Readings `[length][frequency]`, every length on its own.
    pub(super) fn alone(&self, variant: &Variant, combinations: &[Vec<f64>]) -> Result<Vec<Vec<Reading>>, CutFailure> {
        combinations
            .par_iter()
            .map(|lengths_m| {
                let layout = self.place(variant, lengths_m)?;
                let interaction = Interaction::new(self.mesh(&layout), layout.earth != Earth::None);
                variant.earth.par_iter().map(|at| solve(&layout, &interaction, at)).collect()
            })
            .collect()
    }

    /// Feed impedances of the nominal station at any lengths and frequencies, ohm, `[lengths][frequency]`.
    ///
    /// # Errors
    /// [`CutFailure`] of the first that cannot be solved.
    pub(super) fn feeds(&self, combinations: &[Vec<f64>], at_hz: &[f64]) -> Result<Vec<Vec<Complex64>>, CutFailure> {
        let nominal = &self.list[0];
        self.watch.begins(at_hz.len(), 0);
        let earths = at_hz
            .par_iter()
            .map(|&f| At::new(f, &self.present, &self.extents[0], self.watch))
            .collect::<Result<Vec<_>, CutFailure>>()?;
        combinations
            .par_iter()
            .map(|lengths_m| {
                let layout = self.place(nominal, lengths_m)?;
                let interaction = Interaction::new(self.mesh(&layout), layout.earth != Earth::None);
                earths.par_iter().map(|at| feed_ohm(&layout, &interaction, &at.earth)).collect()
            })
            .collect()
    }
}

fn refused(station: &Station, faults: Vec<crate::station::Fault>) -> Refused {
    Refused { sources: station.sources.clone(), faults }
}

/// One length at one frequency from nothing.
///
/// # Errors
/// [`CutFailure::Solving`] when the matrix is singular or no power can flow.
pub(super) fn solve(layout: &Layout, interaction: &Interaction, at: &At) -> Result<Reading, CutFailure> {
    let earth = &at.earth;
    let mesh = interaction.mesh();
    let spots = Spots::of(layout, mesh, earth.frequency_hz());
    let (z, rows) = interaction.fill_probed(earth, &Spots::of_potential(spots.as_ref()));
    let model = Factored::new(z).and_then(|f| PortModel::from_factored(mesh, &f));
    let model = model.map_err(|source| singular(earth, source))?;
    finish(layout, mesh, at, (&model, spots, &rows, None))
}

/// The failure of a singular matrix.
pub(super) fn singular(earth: &Surroundings, source: SingularMatrix) -> CutFailure {
    CutFailure::Solving(Failure::Singular { frequency_hz: earth.frequency_hz(), source })
}

/// The form of the radiated power, and for every element the one of its mesh that is the same.
pub(super) type Lines<'a> = (&'a Radiation, &'a [Option<usize>]);

/// From the port model, and potentials as rows over the unknowns, to a reading.
///
/// # Errors
/// [`CutFailure::Solving`] when no power can flow, and when whoever watches said stop.
pub(super) fn finish(
    layout: &Layout,
    mesh: &Mesh,
    at: &At,
    (model, spots, rows, radiation): (&PortModel, Option<Spots>, &[Vec<Complex64>], Option<Lines>),
) -> Result<Reading, CutFailure> {
    go_on(at.watch)?;
    let earth = &at.earth;
    let parts = parts(layout, earth);
    let port_currents = model.loaded_currents(&parts);
    let unknowns = model.unknowns(&parts, &port_currents);
    let potentials_v = rows.iter().map(|row| row.iter().zip(&unknowns).map(|(r, x)| r * x).sum()).collect();
    let currents = Solution::new(mesh, &unknowns);
    let radiated_w = radiation
        .and_then(|(r, twins)| r.radiated_w(layout, (mesh, twins), &currents))
        .unwrap_or_else(|| radiation::direct(mesh, &currents, &at.sphere));
    let feed_a = port_currents[0];
    at.watch.step_done();
    Ok(Solved { layout, mesh, earth, feed_a, currents, spots, potentials_v, radiated_w }.reading()?)
}

fn parts(layout: &Layout, earth: &Surroundings) -> Vec<Complex64> {
    layout.parts.iter().map(|p| network::impedance(&p.law, earth.frequency_hz())).collect()
}

/// Feed impedance of one length at one frequency, ohm.
fn feed_ohm(layout: &Layout, interaction: &Interaction, earth: &Surroundings) -> Result<Complex64, CutFailure> {
    let model = PortModel::solve(interaction, earth).map_err(|source| singular(earth, source))?;
    Ok(model.loaded_currents(&parts(layout, earth))[0].inv())
}
