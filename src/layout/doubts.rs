//! Legal but doubtful: computed, with a word on what it does to the numbers.

use super::place::Placing;
use super::{ConductorKind, Feed};
use crate::quantity::metres;
use crate::station::Earth;

/// A leg this low over soil is close enough that every millimetre counts, m.
const LOW_M: f64 = 0.005;

/// Frequencies the potentials over soil are proved for, Hz.
const PROVED_HZ: std::ops::RangeInclusive<f64> = 1e4..=6e7;

impl Placing<'_> {
    /// Collects the warnings that need the finished geometry.
    pub(super) fn doubts(&mut self, feed: &Feed) {
        let soil = !matches!(self.station.earth.value, Earth::None | Earth::Perfect);
        for index in 0..self.drafts.len() {
            if soil {
                self.lying_low(index);
            }
            self.stubby(index);
        }
        self.lone_rods(feed);
        self.parts_at_open_ends();
        self.broken_bonds();
        self.soil_model_range();
    }

    fn lying_low(&mut self, index: usize) {
        let draft = &self.drafts[index];
        if matches!(draft.kind, ConductorKind::Rod | ConductorKind::Body) {
            return;
        }
        let outer_m = draft.metal.outer_radius_m();
        let low =
            draft.vertices.windows(2).map(|leg| leg[0].at.z.abs().max(leg[1].at.z.abs())).fold(f64::INFINITY, f64::min);
        // One word for a whole star.
        let name = match (draft.kind, draft.name.rsplit_once(' ')) {
            (ConductorKind::Radial, Some((star, "1"))) => star.to_owned(),
            (ConductorKind::Radial, _) => return,
            _ => draft.name.clone(),
        };
        if low > LOW_M.max(3.0 * outer_m) {
            return;
        }
        if draft.metal.jacket.is_some() && low <= 1.1 * outer_m {
            self.warn(
                name,
                "lies on the surface; its jacket is computed as in air though soil touches it from below, and a thin wire is taken to carry its \
                 current evenly around it: expect a few percent in the wave's speed along it, and more where the soil is wet",
            );
        } else {
            self.warn(
                name,
                format!(
                    "runs {} from the surface of the soil, where a millimetre up or down moves loss and resonance by percents: \
                     take the numbers as a guide and try \"on grass\" beside them",
                    metres(low)
                ),
            );
        }
    }

    /// Legs shorter than the conductor is thick.
    fn stubby(&mut self, index: usize) {
        let draft = &self.drafts[index];
        let thick_m = 2.0 * draft.metal.radius_m;
        let shortest =
            draft.vertices.windows(2).map(|leg| (leg[1].at - leg[0].at).norm()).fold(f64::INFINITY, f64::min);
        if shortest < thick_m {
            let name = draft.name.clone();
            self.warn(
                name,
                format!(
                    "has a leg of {} though it is {} thick: a thin wire cannot tell what happens there, and reads the capacitance at that spot wrong",
                    metres(shortest),
                    metres(thick_m)
                ),
            );
        }
    }

    fn lone_rods(&mut self, feed: &Feed) {
        let lone: Vec<String> = self
            .drafts
            .iter()
            .enumerate()
            .filter(|(c, d)| {
                d.kind == ConductorKind::Rod && d.at(0) != feed.position && self.junction_of(*c, 0).is_none()
            })
            .map(|(_, d)| d.name.clone())
            .collect();
        for name in lone {
            self.warn(
                name,
                "this rod is bonded to nothing in the file. An earth rod that is not bonded to the building's earth is a hazard in a storm \
                 and on a mains fault: local electrical code and licensed practice decide how it is bonded",
            );
        }
    }

    fn parts_at_open_ends(&mut self) {
        let idle: Vec<(String, String)> = self
            .station
            .parts
            .iter()
            .filter_map(|part| {
                let conductor = self.named(&part.on.value)?;
                let draft = &self.drafts[conductor];
                let at_end = part.at_m.value >= draft.length_now_m() - 2.0 * draft.metal.radius_m;
                (at_end && self.junction_of(conductor, draft.last()).is_none())
                    .then(|| (part.name.value.clone(), draft.called()))
            })
            .collect();
        for (name, called) in idle {
            self.warn(
                name,
                format!("sits at the open end of {called}, where hardly any current flows: it does nothing there"),
            );
        }
    }

    fn broken_bonds(&mut self) {
        let broken: Vec<(String, String)> = self
            .station
            .parts
            .iter()
            .filter_map(|part| {
                let draft = &self.drafts[self.named(&part.on.value)?];
                draft.metal.protective.then(|| (part.name.value.clone(), draft.called()))
            })
            .collect();
        for (name, called) in broken {
            self.warn(
                name,
                format!(
                    "sits in {called}, a protective conductor: nothing may interrupt a bond. Cores may go around the coax beside it; \
                     local electrical code and licensed practice decide"
                ),
            );
        }
    }

    fn soil_model_range(&mut self) {
        if matches!(self.station.earth.value, Earth::None | Earth::Perfect) {
            return;
        }
        let operation = &self.station.operation;
        let highest =
            operation.bands.iter().map(|b| b.2).chain(operation.frequencies_hz.iter().copied()).fold(0.0, f64::max);
        if operation.frequencies_hz.iter().any(|f| !PROVED_HZ.contains(f)) {
            self.warn(
                "earth",
                "the soil's tables are proved from 10 kHz to 60 MHz; outside that their error is not known",
            );
        }
        if matches!(self.station.earth.value, Earth::AlipioVisacro(_)) && highest > 4e6 {
            self.warn(
                "earth",
                "the Alipio–Visacro soil model was measured up to 4 MHz; above that it is an extrapolation: compare with \"longmire-smith\"",
            );
        }
    }
}
