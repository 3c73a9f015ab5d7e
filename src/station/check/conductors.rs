//! `[[wire]]`, `[[radials]]` and `[[rod]]`.

use super::metal::RawMetal;
use super::{Check, MOST_RADIALS, name_or};
use crate::station::raw::{PathPoint, RawRadials, RawRod, RawWire, WireSize};
use crate::station::source::{Place, Written};
use crate::station::types::{Radials, Rod, Wire};

/// Longer than any wire of the stations this is for; catches a missing unit.
const LONGEST_M: f64 = 1e5;

impl Check<'_> {
    /// A path of at least two points that exist.
    pub(super) fn path(&mut self, path: Written<Vec<Written<PathPoint>>>) -> Option<Vec<Written<PathPoint>>> {
        let known: Vec<Option<()>> = path.value.iter().map(|point| self.point_exists(point)).collect();
        if path.value.len() < 2 {
            self.fault(
                path.place,
                "a path needs at least two points",
                "write path = [\"feed\", \"apex\"], point names or coordinates",
            );
            return None;
        }
        known.into_iter().collect::<Option<Vec<()>>>().map(|_| path.value)
    }

    pub(super) fn length(&mut self, length: Option<Written<f64>>) -> Option<Option<Written<f64>>> {
        match length {
            Some(length) => {
                self.above_zero(length, "a length", LONGEST_M, "write for example length = \"41 ft\"").map(Some)
            }
            None => Some(None),
        }
    }

    pub(super) fn wire(&mut self, number: usize, raw: Written<RawWire>) -> Option<Wire> {
        let table = raw.place;
        let raw = raw.value;
        let path = self.path(raw.path);
        let length_m = self.length(raw.length.map(|l| l.map(|l| l.0)));
        let metal = RawMetal {
            diameter: raw.diameter,
            gauge: raw.gauge,
            width: raw.width,
            metal: raw.metal,
            conductivity: raw.conductivity,
            jacket: raw.jacket,
            protective: raw.protective.is_some_and(|p| p.value),
        };
        let metal = self.metal(metal, "copper", table);
        Some(Wire { name: name_or(raw.name, "wire", number, table), path: path?, length_m: length_m?, metal: metal? })
    }

    pub(super) fn star(&mut self, number: usize, raw: Written<RawRadials>) -> Option<Radials> {
        let table = raw.place;
        let raw = raw.value;
        let known = self.point_exists(&raw.at);
        let length_m = self.above_zero(raw.length.map(|l| l.0), "a length", LONGEST_M, "write for example length = 5");
        let metal = RawMetal {
            diameter: raw.diameter,
            gauge: raw.gauge,
            width: raw.width,
            metal: raw.metal,
            conductivity: raw.conductivity,
            jacket: raw.jacket,
            protective: raw.protective.is_some_and(|p| p.value),
        };
        let metal = self.metal(metal, "copper", table);
        let count = raw.count.value;
        if count == 0 || f64::from(count) > MOST_RADIALS {
            self.fault(raw.count.place, format!("a star has 1 to {MOST_RADIALS} wires"), "write for example count = 4");
            return None;
        }
        known?;
        Some(Radials {
            name: name_or(raw.name, "radials", number, table),
            at: raw.at,
            count,
            length_m: length_m?,
            first_bearing_deg: raw.first_bearing.map_or(0.0, |b| b.value.0),
            height: raw.height,
            metal: metal?,
        })
    }

    pub(super) fn rod(&mut self, number: usize, raw: Written<RawRod>) -> Option<Rod> {
        let table: Option<Place> = raw.place;
        let raw = raw.value;
        let known = self.point_exists(&raw.at);
        let length_m =
            self.above_zero(raw.length.map(|l| l.0), "the length of a rod", 100.0, "write for example length = 1.5");
        let metal = RawMetal {
            diameter: Some(raw.diameter.map(|d| WireSize(d.0))),
            gauge: None,
            width: None,
            metal: raw.metal,
            conductivity: raw.conductivity,
            jacket: None,
            protective: true,
        };
        let metal = self.metal(metal, "steel", table);
        known?;
        Some(Rod { name: name_or(raw.name, "rod", number, table), at: raw.at, length_m: length_m?, metal: metal? })
    }
}
