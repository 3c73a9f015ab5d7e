//! The main job: feed point, shield current and power budget at every frequency of the station.

use super::shield;
use crate::field::{FarField, Solution};
use crate::halfspace::HalfSpaceError;
use crate::interaction::{Extent, Interaction, SingularMatrix, Surroundings};
use crate::layout::{Earth, EarthAt, FrequencyPoint, Layout, PartKind, Soil};
use crate::mesh::{Density, Mesh};
use crate::network::{self, Chain, ChainError, ChainState};
use crate::outcome::{
    ConductorOutcome, DiscretisationOutcome, EarthOutcome, FeedOutcome, FrequencyOutcome, PartOutcome, PointOutcome,
    PowerOutcome, Prediction, RadioOutcome, Side, SoilOutcome,
};
use crate::ports::PortModel;
use crate::quantity::SPEED_OF_LIGHT_M_PER_S;
use nalgebra::DVector;
use num_complex::Complex64;
use rayon::prelude::*;

/// Second mesh for the error estimate, as a share of the default density.
const SECOND_MESH: f64 = 0.5;
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
    /// The soil's constants cannot be.
    #[error(transparent)]
    Soil(#[from] HalfSpaceError),
    /// No power can flow.
    #[error(transparent)]
    Chain(#[from] ChainError),
}

/// Predict a station.
///
/// # Errors
/// [`Failure`] for the first frequency that cannot be computed.
pub fn predict(layout: &Layout, options: &Options) -> Result<Prediction, Failure> {
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
        .map(|point| At::new(layout, point, &extent)?.outcome(&fine, &coarse))
        .collect::<Result<Vec<_>, _>>()?;
    Ok(Prediction {
        braidwise: env!("CARGO_PKG_VERSION").to_string(),
        station: layout.title.clone(),
        earth: earth_outcome(layout.earth),
        gap_m: layout.feed.gap_m,
        unknowns: fine.mesh().unknowns,
        warnings: layout.warnings.clone(),
        frequencies,
        variants: Vec::new(),
    })
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
struct At<'a> {
    layout: &'a Layout,
    point: &'a FrequencyPoint,
    earth: Surroundings,
}

impl<'a> At<'a> {
    fn new(layout: &'a Layout, point: &'a FrequencyPoint, extent: &Extent) -> Result<Self, Failure> {
        let earth = Surroundings::new(point.frequency_hz, layout.earth.at(point.frequency_hz), extent)?;
        Ok(Self { layout, point, earth })
    }

    fn outcome(&self, fine: &Interaction, coarse: &Interaction) -> Result<FrequencyOutcome, Failure> {
        let f = self.point.frequency_hz;
        let parts: Vec<Complex64> = self.layout.parts.iter().map(|p| network::impedance(&p.law, f)).collect();
        let (model, currents) = self.solve(fine, &parts)?;
        let (_, coarse_currents) = self.solve(coarse, &parts)?;
        let feed_ohm = currents[0].inv();
        let second_ohm = coarse_currents[0].inv();
        let state = Chain::of(self.layout).at(f).state(feed_ohm, self.layout.operation.power_w)?;
        // with 1 V (peak) at the gap the feed takes ½ Re Y; everything is linear in the voltage
        let voltage_peak_v = (2.0 * state.feed_w / currents[0].re).sqrt();
        let solution =
            Solution::new(fine.mesh(), &model.unknowns(&parts, &currents)).scaled(Complex64::from(voltage_peak_v));
        let port_currents = currents * Complex64::from(voltage_peak_v);
        let conductors = self.conductors(fine, &solution);
        let difference = feed_ohm - second_ohm;
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
            power: self.power(fine.mesh(), &solution, &state, &parts, &port_currents),
            conductors,
            discretisation: DiscretisationOutcome {
                resistance_ohm: ERROR_OVER_DIFFERENCE * difference.re.abs().max(least),
                reactance_ohm: ERROR_OVER_DIFFERENCE * difference.im.abs().max(least),
            },
        })
    }

    fn solve(
        &self,
        interaction: &Interaction,
        parts: &[Complex64],
    ) -> Result<(PortModel, DVector<Complex64>), Failure> {
        let frequency_hz = self.point.frequency_hz;
        let model =
            PortModel::solve(interaction, &self.earth).map_err(|source| Failure::Singular { frequency_hz, source })?;
        let currents = model.loaded_currents(parts);
        Ok((model, currents))
    }

    fn soil(&self) -> Option<SoilOutcome> {
        match self.earth.earth() {
            EarthAt::Soil { permittivity, conductivity_s_per_m } => {
                Some(SoilOutcome { permittivity, conductivity_s_per_m })
            }
            _ => None,
        }
    }

    fn conductors(&self, interaction: &Interaction, solution: &Solution) -> Vec<ConductorOutcome> {
        let f = self.point.frequency_hz;
        let step_m = (SPEED_OF_LIGHT_M_PER_S / f / 100.0).min(0.1);
        let potentials = interaction.potentials(&self.earth, &solution.currents);
        let rms = std::f64::consts::FRAC_1_SQRT_2;
        (0..self.layout.conductors.len())
            .map(|c| ConductorOutcome {
                name: self.layout.conductors[c].name.clone(),
                points: solution
                    .along(self.layout, interaction.mesh(), c, &potentials, step_m)
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
        let radiated_w = FarField::new(mesh, solution, f, self.earth.earth()).radiated_w();
        let earth_w = 0.0;
        let metal_w = solution.metal_w(mesh, f);
        let in_parts: f64 = chokes.iter().chain(&inline).map(|p| p.dissipated_w).sum();
        let accounted = radiated_w + earth_w + metal_w + state.line_w + state.transformer_w + in_parts;
        PowerOutcome {
            input_w,
            radiated_w,
            earth_w,
            metal_w,
            line_w: state.line_w,
            transformer_w: state.transformer_w,
            chokes,
            inline,
            unaccounted_w: Some(input_w - accounted),
        }
    }
}
