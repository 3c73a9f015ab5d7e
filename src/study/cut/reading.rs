//! What is kept of one solved length.

use crate::field::Solution;
use crate::interaction::quadrature::legendre;
use crate::interaction::{Legendre, Spot, Surroundings};
use crate::layout::Layout;
use crate::mesh::Mesh;
use crate::network::{Chain, ChainError};
use crate::quantity::SPEED_OF_LIGHT_M_PER_S;
use num_complex::Complex64;
use std::f64::consts::FRAC_1_SQRT_2;

/// Results at one length, frequency and variant: RMS magnitudes at the operating power.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) struct Reading {
    pub(super) entry_current_a: f64,
    pub(super) entry_voltage_v: Option<f64>,
    pub(super) end_voltage_v: Option<f64>,
    pub(super) last_metre_current_a: f64,
    pub(super) feed_ohm: Complex64,
    pub(super) swr: f64,
    pub(super) radiated_fraction: f64,
}

/// Where the shield is read.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Spots {
    /// The current going on into the shack; `None` where nothing is modelled beyond the entry.
    pub(super) entry_current: Option<Spot>,
    /// The potential at the entry.
    pub(super) entry: Spot,
    /// The radio end.
    pub(super) end: Spot,
    /// Samples within a metre of the radio end.
    pub(super) last_metre: Vec<Spot>,
}

impl Spots {
    /// Places on the shield of a mesh; `None` without coax.
    pub(super) fn of(layout: &Layout, mesh: &Mesh, frequency_hz: f64) -> Option<Self> {
        let coax = layout.coax.as_ref()?;
        let range = mesh.conductor_elements[coax.conductor].clone();
        let end = Spot { element: range.end.checked_sub(1)?, xi: 1.0 };
        let slack = 1e-9 * (1.0 + coax.length_m);
        let beyond = range.clone().find(|&k| mesh.elements[k].from_m > coax.entry_m - slack);
        let entry = beyond.map_or(end, |element| Spot { element, xi: -1.0 });
        let body = layout.radio.body.map(|b| Spot { element: mesh.conductor_elements[b].start, xi: -1.0 });
        let entry_current = if beyond.is_some() { Some(entry) } else { body };
        let step_m = (SPEED_OF_LIGHT_M_PER_S / frequency_hz / 100.0).min(0.1);
        let from_m = (coax.length_m - 1.0).max(0.0);
        let mut last_metre = vec![end];
        for element in range.filter(|&k| mesh.elements[k].to_m > from_m) {
            let e = &mesh.elements[element];
            let start = (2.0 * (from_m - e.from_m) / e.length_m - 1.0).max(-1.0);
            let steps = (0.5 * (1.0 - start) * e.length_m / step_m).ceil().max(1.0);
            let at = |n: usize| Spot { element, xi: start + (1.0 - start) * n as f64 / steps };
            last_metre.extend((0..steps as usize).map(at));
        }
        Some(Self { entry_current, entry, end, last_metre })
    }

    /// Where the potential is wanted: the entry, the end.
    pub(super) fn of_potential(spots: Option<&Self>) -> Vec<Spot> {
        spots.map_or_else(Vec::new, |s| vec![s.entry, s.end])
    }
}

/// The value of a Legendre series at ξ.
fn series(c: &Legendre, xi: f64) -> Complex64 {
    c.iter().zip(legendre(xi)).map(|(c, p)| c * p).sum()
}

/// A solution for 1 V (peak) at the feed gap.
pub(super) struct Solved<'a> {
    pub(super) layout: &'a Layout,
    pub(super) mesh: &'a Mesh,
    pub(super) earth: &'a Surroundings,
    /// Feed current, A peak.
    pub(super) feed_a: Complex64,
    pub(super) currents: Solution,
    pub(super) spots: Option<Spots>,
    /// Potentials at the entry and the end, V peak; empty without coax.
    pub(super) potentials_v: Vec<Complex64>,
    /// Power into the far field, W.
    pub(super) radiated_w: f64,
}

impl Solved<'_> {
    /// Everything at the operating power.
    ///
    /// # Errors
    /// [`ChainError`] when no power can flow.
    pub(super) fn reading(&self) -> Result<Reading, ChainError> {
        let feed_ohm = self.feed_a.inv();
        let power_w = self.layout.operation.power_w;
        let state = Chain::of(self.layout).at(self.earth.frequency_hz()).state(feed_ohm, power_w)?;
        // everything is linear in the gap voltage, which takes ½ Re Y at 1 V
        let voltage_peak_v = (2.0 * state.feed_w / self.feed_a.re).sqrt();
        let rms = voltage_peak_v * FRAC_1_SQRT_2;
        let current = |spot: &Spot| series(&self.currents.currents[spot.element], spot.xi).norm() * rms;
        let volts = |spot: &Spot, v: Complex64| (!self.mesh.elements[spot.element].below).then(|| v.norm() * rms);
        let spots = self.spots.as_ref();
        Ok(Reading {
            entry_current_a: spots.and_then(|s| s.entry_current.as_ref()).map_or(0.0, current),
            entry_voltage_v: spots.zip(self.potentials_v.first()).and_then(|(s, v)| volts(&s.entry, *v)),
            end_voltage_v: spots.zip(self.potentials_v.get(1)).and_then(|(s, v)| volts(&s.end, *v)),
            last_metre_current_a: spots.map_or(0.0, |s| s.last_metre.iter().map(current).fold(0.0, f64::max)),
            feed_ohm,
            swr: state.radio_swr,
            radiated_fraction: self.radiated_w * voltage_peak_v * voltage_peak_v / power_w,
        })
    }
}
