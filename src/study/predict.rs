//! The main job: feed point, shield current and power budget at every frequency of the station.

use super::shield;
use super::watch::{Unwatched, Watch};
use crate::field::{FarField, Solution};
use crate::halfspace::HalfSpaceError;
use crate::interaction::{Extent, Factored, Interaction, Legendre, PotentialMap, SingularMatrix, Surroundings};
use crate::layout::{Earth, EarthAt, FrequencyPoint, Layout, PartKind, Soil, Warning};
use crate::mesh::{Density, Mesh};
use crate::network::{self, Chain, ChainError, ChainState};
use crate::outcome::{
    ConductorOutcome, DiscretisationOutcome, EarthOutcome, FeedOutcome, FrequencyOutcome, PartOutcome, PointOutcome,
    PowerOutcome, Prediction, RadioOutcome, Side, SoilOutcome, VariantOutcome,
};
use crate::ports::PortModel;
use crate::quantity::SPEED_OF_LIGHT_M_PER_S;
use nalgebra::DVector;
use num_complex::Complex64;
use rayon::prelude::*;
use std::sync::Arc;

/// Second mesh for the error estimate, as a share of the default density.
pub(super) const SECOND_MESH: f64 = 0.5;
/// The stated error over the difference of the two meshes, from the convergence table: covers the true one nine times in ten.
const ERROR_OVER_DIFFERENCE: f64 = 1.5;
/// Least share of the whole difference that either part is charged with: one of the two may vanish by chance.
const LEAST_SHARE: f64 = 0.2;

/// How a prediction is made.
#[derive(Debug, Clone, Default)]
pub struct Options {
    /// Mesh density.
    pub density: Density,
    /// Frequencies instead of the station's own.
    pub frequencies: Option<Vec<FrequencyPoint>>,
}

/// Why a prediction could not be made.
#[derive(Debug, Clone, thiserror::Error)]
pub enum Failure {
    /// Nothing to compute.
    #[error("the station names no frequency: give [operation] bands or frequencies")]
    NoFrequency,
    /// The equations have no usable solution.
    #[error("at {:.4} MHz: {source}", .frequency_hz / 1e6)]
    Singular {
        /// Where.
        frequency_hz: f64,
        /// What.
        source: SingularMatrix,
    },
    /// A curve's range.
    #[error("a curve needs a range that rises: {:.4} to {:.4} MHz is none", .low_hz / 1e6, .high_hz / 1e6)]
    Range {
        /// Start as given.
        low_hz: f64,
        /// End as given.
        high_hz: f64,
    },
    /// Values that are no numbers.
    #[error("no curve from {:.4} to {:.4} MHz: some of its solves came out as no number", .low_hz / 1e6, .high_hz / 1e6)]
    Curve {
        /// Start of the range.
        low_hz: f64,
        /// End of the range.
        high_hz: f64,
    },
    /// The soil's constants cannot be.
    #[error(transparent)]
    Soil(#[from] HalfSpaceError),
    /// No power can flow.
    #[error(transparent)]
    Chain(#[from] ChainError),
    /// Whoever watches said stop.
    #[error("stopped before the end")]
    Stopped,
}

/// Predict a station.
///
/// # Errors
/// [`Failure`] for the first frequency that cannot be computed.
pub fn predict(layout: &Layout, options: &Options) -> Result<Prediction, Failure> {
    predict_watched(layout, options, &Unwatched)
}

/// The same with somebody watching, who knows how many steps there are: one a frequency.
fn predict_watched(layout: &Layout, options: &Options, watch: &dyn Watch) -> Result<Prediction, Failure> {
    let points = options.frequencies.as_ref().unwrap_or(&layout.operation.frequencies);
    let highest = points.iter().map(|p| p.frequency_hz).fold(0.0, f64::max);
    if highest <= 0.0 {
        return Err(Failure::NoFrequency);
    }
    let with_image = layout.earth != Earth::None;
    let second = Density { factor: options.density.factor * SECOND_MESH };
    let (fine, coarse) = rayon::join(
        || Interaction::new(Mesh::new(layout, highest, options.density, &[]), with_image),
        || Interaction::new(Mesh::new(layout, highest, second, &[]), with_image),
    );
    let extent = Extent::of(layout);
    let frequencies = points
        .par_iter()
        .map(|point| {
            if watch.stop() {
                return Err(Failure::Stopped);
            }
            let earth = Surroundings::new(point.frequency_hz, layout.earth.at(point.frequency_hz), &extent)?;
            let outcome = At::new(layout, point, Arc::new(earth)).outcome(&fine, &coarse);
            watch.step_done();
            outcome
        })
        .collect::<Result<Vec<_>, _>>()?;
    Ok(Prediction {
        braidwise: env!("CARGO_PKG_VERSION").to_string(),
        station: layout.title.clone(),
        earth: earth_outcome(layout.earth),
        gap_m: layout.feed.gap_m,
        unknowns: fine.mesh().unknowns,
        warnings: warnings(layout, points),
        frequencies,
        variants: Vec::new(),
        patterns: Vec::new(),
    })
}

/// Predict a station and its variants; `variants` leaves the nominal station out.
///
/// # Errors
/// [`Failure`] of the first that cannot be computed.
pub fn predict_variants(
    nominal: &Layout,
    variants: &[(String, Layout)],
    options: &Options,
) -> Result<Prediction, Failure> {
    predict_variants_watched(nominal, variants, options, &Unwatched)
}

/// The same with somebody watching: a step a frequency and variant.
///
/// # Errors
/// As [`predict_variants`], and [`Failure::Stopped`] when the watcher says so.
pub fn predict_variants_watched(
    nominal: &Layout,
    variants: &[(String, Layout)],
    options: &Options,
    watch: &dyn Watch,
) -> Result<Prediction, Failure> {
    let own = |layout: &Layout| options.frequencies.as_ref().unwrap_or(&layout.operation.frequencies).len();
    watch.begins(own(nominal) + variants.iter().map(|v| own(&v.1)).sum::<usize>(), 0);
    let mut prediction = predict_watched(nominal, options, watch)?;
    for (name, layout) in variants {
        let varied = predict_watched(layout, options, watch)?;
        for mut warning in varied.warnings {
            if !prediction.warnings.contains(&warning) {
                warning.about = format!("{} (variant {name})", warning.about);
                prediction.warnings.push(warning);
            }
        }
        prediction.variants.push(VariantOutcome { name: name.clone(), frequencies: varied.frequencies });
    }
    Ok(prediction)
}

/// A solved station at one frequency, at the operating power.
pub(super) struct Operating {
    pub(super) mesh: Mesh,
    pub(super) solution: Solution,
    pub(super) feed_w: f64,
}

/// Solve a station at one frequency on its default mesh.
pub(super) fn solve_one(layout: &Layout, frequency_hz: f64) -> Result<Operating, Failure> {
    let interaction =
        Interaction::new(Mesh::new(layout, frequency_hz, Density::default(), &[]), layout.earth != Earth::None);
    let earth = Surroundings::new(frequency_hz, layout.earth.at(frequency_hz), &Extent::of(layout))?;
    let model = PortModel::solve(&interaction, &earth).map_err(|source| Failure::Singular { frequency_hz, source })?;
    let parts: Vec<Complex64> = layout.parts.iter().map(|p| network::impedance(&p.law, frequency_hz)).collect();
    let currents = model.loaded_currents(&parts);
    let state = Chain::of(layout).at(frequency_hz).state(currents[0].inv(), layout.operation.power_w)?;
    let scale = Complex64::from((2.0 * state.feed_w / currents[0].re).sqrt());
    let solution = Solution::new(interaction.mesh(), &model.unknowns(&parts, &currents)).scaled(scale);
    Ok(Operating { mesh: interaction.mesh().clone(), solution, feed_w: state.feed_w })
}

/// The station's warnings and those of its earth at the frequencies asked for, each once.
fn warnings(layout: &Layout, points: &[FrequencyPoint]) -> Vec<Warning> {
    let mut out = layout.warnings.clone();
    for point in points {
        for warning in layout.earth.warnings_at(point.frequency_hz) {
            if !out.contains(&warning) {
                out.push(warning);
            }
        }
    }
    out
}

fn earth_outcome(earth: Earth) -> EarthOutcome {
    let (kind, permittivity, conductivity_s_per_m) = match earth {
        Earth::None => ("none", None, None),
        Earth::Perfect => ("perfect", None, None),
        Earth::Soil(Soil::Constant { permittivity, conductivity_s_per_m }) => {
            ("soil", Some(permittivity), Some(conductivity_s_per_m))
        }
        Earth::Soil(Soil::LongmireSmith { conductivity_s_per_m } | Soil::AlipioVisacro { conductivity_s_per_m }) => {
            ("soil", None, Some(conductivity_s_per_m))
        }
    };
    EarthOutcome { kind: kind.to_string(), permittivity, conductivity_s_per_m }
}

/// One frequency of one station.
pub(super) struct At<'a> {
    layout: &'a Layout,
    point: &'a FrequencyPoint,
    earth: Arc<Surroundings>,
}

/// The ports of a mesh at one frequency, and the potentials its charges make.
pub(super) struct Ported {
    pub(super) model: PortModel,
    pub(super) potentials: PotentialMap,
}

impl<'a> At<'a> {
    /// The earth must be that of the layout at this frequency, and cover its extent.
    pub(super) fn new(layout: &'a Layout, point: &'a FrequencyPoint, earth: Arc<Surroundings>) -> Self {
        Self { layout, point, earth }
    }

    fn outcome(&self, fine: &Interaction, coarse: &Interaction) -> Result<FrequencyOutcome, Failure> {
        let (ported, second) = (self.solve(fine)?, self.ports(coarse)?);
        self.outcome_of(fine, &ported, Some(&second), true)
    }

    /// Everything at this frequency from a solved mesh and the solution of the second mesh. Without the second the
    /// discretisation error is not a number; without the budget the power radiated, lost in the earth and unaccounted for is not.
    pub(super) fn outcome_of(
        &self,
        fine: &Interaction,
        ported: &Ported,
        second: Option<&PortModel>,
        budget: bool,
    ) -> Result<FrequencyOutcome, Failure> {
        let f = self.point.frequency_hz;
        let parts: Vec<Complex64> = self.layout.parts.iter().map(|p| network::impedance(&p.law, f)).collect();
        let currents = ported.model.loaded_currents(&parts);
        let feed_ohm = currents[0].inv();
        let state = Chain::of(self.layout).at(f).state(feed_ohm, self.layout.operation.power_w)?;
        // with 1 V (peak) at the gap the feed takes ½ Re Y; everything is linear in the voltage
        let voltage_peak_v = (2.0 * state.feed_w / currents[0].re).sqrt();
        let solution = Solution::new(fine.mesh(), &ported.model.unknowns(&parts, &currents))
            .scaled(Complex64::from(voltage_peak_v));
        let port_currents = currents * Complex64::from(voltage_peak_v);
        let conductors = self.conductors(fine.mesh(), &solution, &ported.potentials.along(&solution.currents));
        let nan = Complex64::new(f64::NAN, f64::NAN);
        let difference = second.map_or(nan, |second| feed_ohm - second.loaded_currents(&parts)[0].inv());
        let least = LEAST_SHARE * difference.norm();
        Ok(FrequencyOutcome {
            frequency_hz: f,
            band: self.point.band.clone(),
            edge: self.point.edge,
            earth: self.soil(),
            feed: FeedOutcome {
                resistance_ohm: feed_ohm.re,
                reactance_ohm: feed_ohm.im,
                voltage_v: Complex64::from(voltage_peak_v / std::f64::consts::SQRT_2),
                current_a: port_currents[0] / std::f64::consts::SQRT_2,
            },
            radio: RadioOutcome {
                resistance_ohm: state.radio_ohm.re,
                reactance_ohm: state.radio_ohm.im,
                swr: state.radio_swr,
            },
            shield: shield::outcome(self.layout, &conductors),
            joints: shield::joints(self.layout, &conductors),
            power: self.power(budget.then_some(fine), fine.mesh(), &solution, &state, &parts, &port_currents),
            conductors,
            discretisation: DiscretisationOutcome {
                resistance_ohm: ERROR_OVER_DIFFERENCE * difference.re.abs().max(least),
                reactance_ohm: ERROR_OVER_DIFFERENCE * difference.im.abs().max(least),
            },
        })
    }

    /// The ports of a mesh of this station at this frequency.
    pub(super) fn ports(&self, interaction: &Interaction) -> Result<PortModel, Failure> {
        let frequency_hz = self.point.frequency_hz;
        PortModel::solve(interaction, &self.earth).map_err(|source| Failure::Singular { frequency_hz, source })
    }

    /// The ports with the potentials along every conductor.
    pub(super) fn solve(&self, interaction: &Interaction) -> Result<Ported, Failure> {
        let frequency_hz = self.point.frequency_hz;
        let singular = |source| Failure::Singular { frequency_hz, source };
        let (matrix, potentials) = interaction.fill_with_potentials(&self.earth);
        let factored = Factored::new(matrix).map_err(singular)?;
        let model = PortModel::from_factored(interaction.mesh(), &factored).map_err(singular)?;
        Ok(Ported { model, potentials })
    }

    fn soil(&self) -> Option<SoilOutcome> {
        match self.earth.earth() {
            EarthAt::Soil { permittivity, conductivity_s_per_m } => {
                Some(SoilOutcome { permittivity, conductivity_s_per_m })
            }
            _ => None,
        }
    }

    fn conductors(&self, mesh: &Mesh, solution: &Solution, potentials: &[Legendre]) -> Vec<ConductorOutcome> {
        let f = self.point.frequency_hz;
        let step_m = (SPEED_OF_LIGHT_M_PER_S / f / 100.0).min(0.1);
        let rms = std::f64::consts::FRAC_1_SQRT_2;
        (0..self.layout.conductors.len())
            .map(|c| ConductorOutcome {
                name: self.layout.conductors[c].name.clone(),
                points: solution
                    .along(self.layout, mesh, c, potentials, step_m)
                    .into_iter()
                    .map(|s| PointOutcome {
                        distance_m: s.distance_m,
                        side: s.after.map(|after| if after { Side::After } else { Side::Before }),
                        position_m: [s.position.x, s.position.y, s.position.z],
                        current_a: s.current_a * rms,
                        voltage_v: s.potential_v.map(|v| v.norm() * rms),
                    })
                    .collect(),
            })
            .collect()
    }

    fn power(
        &self,
        budget: Option<&Interaction>,
        mesh: &Mesh,
        solution: &Solution,
        state: &ChainState,
        parts: &[Complex64],
        port_currents: &DVector<Complex64>,
    ) -> PowerOutcome {
        let f = self.point.frequency_hz;
        let of_kind = |kind: PartKind| -> Vec<PartOutcome> {
            let placed = self.layout.parts.iter().enumerate().filter(|(_, p)| p.kind == kind);
            placed
                .map(|(k, p)| {
                    let current_a = port_currents[k + 1].norm() * std::f64::consts::FRAC_1_SQRT_2;
                    PartOutcome {
                        name: p.name.clone(),
                        on: self.layout.conductors[p.conductor].name.clone(),
                        at_m: p.at_m,
                        dissipated_w: parts[k].re * current_a * current_a,
                        current_a,
                        voltage_v: parts[k].norm() * current_a,
                    }
                })
                .collect()
        };
        let (chokes, inline) = (of_kind(PartKind::Choke), of_kind(PartKind::Inline));
        let input_w = self.layout.operation.power_w;
        let metal_w = solution.metal_w(mesh, f);
        let in_parts: f64 = chokes.iter().chain(&inline).map(|p| p.dissipated_w).sum();
        let remaining_w = input_w - metal_w - state.line_w - state.transformer_w - in_parts;
        let (radiated_w, earth_w, unaccounted_w) = match budget {
            Some(interaction) => self.outward(interaction, solution, remaining_w),
            None => (f64::NAN, f64::NAN, None),
        };
        PowerOutcome {
            input_w,
            radiated_w,
            earth_w,
            metal_w,
            line_w: state.line_w,
            transformer_w: state.transformer_w,
            chokes,
            inline,
            unaccounted_w,
        }
    }

    /// Power radiated, lost in the earth, and unaccounted for, W, of what metal, line and parts leave.
    fn outward(&self, interaction: &Interaction, solution: &Solution, remaining_w: f64) -> (f64, f64, Option<f64>) {
        let far = FarField::new(interaction.mesh(), solution, self.point.frequency_hz, self.earth.earth());
        let radiated_w = far.radiated_w();
        let rest_w = remaining_w - radiated_w;
        match (self.earth.earth(), interaction.near_field_loss_w(&self.earth, &solution.currents)) {
            (EarthAt::Soil { .. }, Some(near_w)) => {
                let earth_w = near_w + far.downward_w();
                (radiated_w, earth_w, Some(rest_w - earth_w))
            }
            // with conductors below the surface the earth's share is what remains
            (EarthAt::Soil { .. }, None) => (radiated_w, rest_w, None),
            _ => (radiated_w, 0.0, Some(rest_w)),
        }
    }
}
