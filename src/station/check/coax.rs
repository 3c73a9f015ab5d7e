//! `[coax]`: catalogue data, explicit data, and what is estimated where neither is given.

use super::Check;
use crate::quantity::metres;
use crate::station::catalogue::Cable;
use crate::station::raw::{Distance, RawCoax, RawLoss};
use crate::station::source::{Place, Written};
use crate::station::types::{Coax, Metal};

/// Shield over outside diameter of a flexible coax (common practice: 0.72 to 0.79 for the usual 5 to 10 mm cables).
const SHIELD_SHARE: f64 = 0.75;
/// Relative permittivity of a PVC jacket (handbook value about 3, from memory).
const PVC: f64 = 3.0;
/// Loss at 10 MHz of a solid-dielectric 50 ohm cable, dB per 100 m times mm of outside diameter (common practice: 4.6 dB
/// at 5 mm, 2.1 dB at 10.3 mm); grows as the square root of the frequency.
const LOSS_DB_MM: f64 = 22.0;

/// From and to, as written.
type Stretch = Vec<Written<Distance>>;

impl Check<'_> {
    pub(super) fn coax(&mut self, raw: Written<RawCoax>) -> Option<Coax> {
        let table = raw.place;
        let raw = raw.value;
        let path = self.path(raw.path.clone());
        let length_m = self.length(raw.length.map(|l| l.map(|l| l.0)));
        let entry = match &raw.entry {
            Some(entry) => self.point_exists(entry),
            None => Some(()),
        };
        let reachable_m = self.reachable(raw.reachable.clone().map(|r| r.value.0));
        let cable = self.cable(&raw, table);
        entry?;
        let cable = cable?;
        Some(Coax {
            path: path?,
            entry: raw.entry,
            length_m: length_m?,
            metal: Metal {
                radius_m: cable.shield_diameter_m / 2.0,
                conductivity_s_per_m: self.conductivity(None, None, "copper")?,
                jacket: cable.jacket,
                protective: false,
            },
            impedance_ohm: cable.impedance_ohm,
            velocity_factor: cable.velocity_factor,
            loss: cable.loss,
            reachable_m: reachable_m?,
            table: Written { value: (), place: table },
        })
    }

    fn cable(&mut self, raw: &RawCoax, table: Option<Place>) -> Option<Cable> {
        let mut cable = match &raw.cable {
            Some(name) => self.named_cable(name, raw)?,
            None => self.shield(raw, table)?,
        };
        if let Some(jacket) = raw.jacket.clone() {
            cable.jacket = Some(self.jacket(jacket)?);
        }
        if let Some(impedance) = raw.impedance {
            let value = impedance.map(|z| z.0);
            cable.impedance_ohm =
                self.above_zero(value, "the impedance", 1e3, "write for example impedance = \"50 ohm\"")?.value;
        }
        if let Some(factor) = raw.velocity_factor {
            let value = factor.map(|v| v.0);
            cable.velocity_factor = self
                .above_zero(value, "the velocity factor", 1.0, "write a share of one: velocity_factor = 0.66")?
                .value;
        }
        if let Some(loss) = &raw.loss {
            cable.loss = self.loss(loss)?;
        }
        Some(cable)
    }

    fn named_cable(&mut self, name: &Written<String>, raw: &RawCoax) -> Option<Cable> {
        if let Some(place) = raw.shield_diameter.map(|d| d.place).or(raw.outside_diameter.map(|d| d.place)) {
            self.fault(place, "a cable by name has its own diameter", "keep one of the two");
            return None;
        }
        let found = self.catalogue.cable(name);
        if found.is_none() {
            let names = self.catalogue.cable_names();
            let mend = format!(
                "{} Or give outside_diameter instead",
                crate::station::offer(name, names.iter().map(String::as_str))
            );
            self.fault(name.place, format!("no cable of the catalogue is called \"{}\"", name.value), mend);
        }
        found
    }

    /// The shield by its own diameter, or estimated from the outside; the inside as far as it must be assumed.
    fn shield(&mut self, raw: &RawCoax, table: Option<Place>) -> Option<Cable> {
        let mend = "write for example shield_diameter = \"3.5 mm\"";
        let outside = match raw.outside_diameter {
            Some(d) => Some(self.above_zero(d.map(|d| d.0), "the outside diameter", 0.2, mend)?),
            None => None,
        };
        let (shield_diameter_m, outside_m) = match (raw.shield_diameter, outside) {
            (Some(shield), outside) => {
                let shield = self.above_zero(shield.map(|d| d.0), "the shield diameter", 0.2, mend)?;
                if let Some(outside) = outside.filter(|o| o.value < shield.value) {
                    self.fault(
                        outside.place,
                        "the outside is thinner than the shield",
                        "swap the two, or leave one out",
                    );
                    return None;
                }
                (shield.value, outside.map_or(shield.value, |o| o.value))
            }
            (None, Some(outside)) => {
                let shield_m = SHIELD_SHARE * outside.value;
                self.doubt(
                    "coax",
                    format!(
                        "the shield is taken as {} across, three quarters of the outside; 10 % of it moves the feed by less than a percent",
                        metres(shield_m)
                    ),
                );
                (shield_m, outside.value)
            }
            (None, None) => {
                self.fault(
                    table,
                    "this coax has no cable",
                    "add cable = \"RG-58\", or shield_diameter, or outside_diameter",
                );
                return None;
            }
        };
        let wall_m = (outside_m - shield_diameter_m) / 2.0;
        let at_10_mhz = LOSS_DB_MM / (outside_m * 1e3);
        if raw.impedance.is_none() || raw.velocity_factor.is_none() || raw.loss.is_none() {
            self.doubt(
                "coax",
                format!(
                    "what is not given of the inside is taken as 50 ohm, velocity factor 0.66 and {at_10_mhz:.1} dB per 100 m at 10 MHz, \
                     as for solid polyethylene: it bears on what the radio sees and on the loss in the line, not on the outside"
                ),
            );
        }
        Some(Cable {
            shield_diameter_m,
            jacket: (wall_m > 0.0).then_some((PVC, wall_m)),
            impedance_ohm: 50.0,
            velocity_factor: 0.66,
            loss: vec![(10e6, at_10_mhz), (100e6, at_10_mhz * 10f64.sqrt())],
        })
    }

    fn loss(&mut self, loss: &Written<Vec<Written<RawLoss>>>) -> Option<Vec<(f64, f64)>> {
        if loss.value.is_empty() {
            self.fault(loss.place, "this list is empty", "write loss = [ { at = \"10 MHz\", per_100m = \"4.6 dB\" } ]");
            return None;
        }
        let mut points: Vec<(f64, f64)> = Vec::new();
        for row in &loss.value {
            let at =
                self.above_zero(row.at.map(|f| f.0), "the frequency", 1e12, "write for example at = \"10 MHz\"")?;
            let db = row.per_100m.value.0;
            if db < 0.0 {
                self.fault(row.per_100m.place, "a loss cannot be negative", "write it as a positive number of dB");
                return None;
            }
            if points.iter().any(|(f, _)| *f == at.value) {
                self.fault(at.place, "the loss at this frequency is given twice", "keep one of them");
                return None;
            }
            points.push((at.value, db));
        }
        points.sort_by(|a, b| a.0.total_cmp(&b.0));
        Some(points)
    }

    fn reachable(&mut self, raw: Option<Vec<Written<Stretch>>>) -> Option<Vec<Written<(f64, f64)>>> {
        let stretches = raw.unwrap_or_default().into_iter().map(|stretch| match stretch.value.as_slice() {
            [from, to] if from.value.0 >= 0.0 && to.value.0 > from.value.0 => {
                Some(stretch.map(|s| (s[0].value.0, s[1].value.0)))
            }
            _ => {
                self.fault(
                    stretch.place,
                    "a stretch runs from one distance to a larger one",
                    "write reachable = [[\"1 ft\", \"8 ft\"]]",
                );
                None
            }
        });
        stretches.collect::<Vec<_>>().into_iter().collect()
    }
}
