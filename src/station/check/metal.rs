//! Diameter, metal and jacket of a conductor.

use super::Check;
use crate::station::raw::{Conductivity, Length, RawJacket, WireSize};
use crate::station::source::{Place, Written};
use crate::station::types::Metal;

/// Conductivity of annealed copper, S/m, where the catalogue has none (IEC 60028: 58 MS/m at 20 °C).
const COPPER_S_PER_M: f64 = 58.0e6;

/// The keys a conductor's metal comes from.
pub(super) struct RawMetal {
    pub(super) diameter: Option<Written<WireSize>>,
    pub(super) gauge: Option<Written<WireSize>>,
    pub(super) width: Option<Written<Length>>,
    pub(super) metal: Option<Written<String>>,
    pub(super) conductivity: Option<Written<Conductivity>>,
    pub(super) jacket: Option<Written<RawJacket>>,
    pub(super) protective: bool,
}

impl Check<'_> {
    pub(super) fn metal(&mut self, raw: RawMetal, default: &str, table: Option<Place>) -> Option<Metal> {
        let radius_m = self.radius(raw.diameter, raw.gauge, raw.width, table);
        let conductivity = self.conductivity(raw.metal, raw.conductivity, default);
        let jacket = match raw.jacket {
            Some(jacket) => Some(self.jacket(jacket)?),
            None => None,
        };
        Some(Metal { radius_m: radius_m?, conductivity_s_per_m: conductivity?, jacket, protective: raw.protective })
    }

    fn radius(
        &mut self,
        diameter: Option<Written<WireSize>>,
        gauge: Option<Written<WireSize>>,
        width: Option<Written<Length>>,
        table: Option<Place>,
    ) -> Option<f64> {
        // A flat strap of width w has the equivalent radius w/4 (design contract; the classic result for a thin strip).
        let sizes = [
            diameter.map(|d| d.map(|d| d.0 / 2.0)),
            gauge.map(|g| g.map(|g| g.0 / 2.0)),
            width.map(|w| w.map(|w| w.0 / 4.0)),
        ];
        let given: Vec<Written<f64>> = sizes.into_iter().flatten().collect();
        match given.as_slice() {
            [one] => self
                .above_zero(*one, "the diameter or width", 1.0, "write for example diameter = \"1.6 mm\"")
                .map(|r| r.value),
            [] => {
                self.fault(
                    table,
                    "this conductor has no size",
                    "add diameter = \"1.6 mm\", gauge = \"14 AWG\" or width = \"50 mm\"",
                );
                None
            }
            [_, second, ..] => {
                self.fault(second.place, "the size is given twice", "keep one of diameter, gauge and width");
                None
            }
        }
    }

    /// `Some(None)` is a perfect conductor.
    pub(super) fn conductivity(
        &mut self,
        metal: Option<Written<String>>,
        conductivity: Option<Written<Conductivity>>,
        default: &str,
    ) -> Option<Option<f64>> {
        match (metal, conductivity) {
            (Some(metal), Some(_)) => {
                self.fault(metal.place, "the metal is given twice", "keep one of metal and conductivity");
                None
            }
            (Some(metal), None) if metal.value == "perfect" => Some(None),
            (Some(metal), None) => match self.catalogue.metal(&metal) {
                Some(sigma) => Some(Some(sigma)),
                None => {
                    let mut names = self.catalogue.metal_names();
                    names.push("perfect".to_owned());
                    let mend = crate::station::offer(&metal, names.iter().map(String::as_str));
                    self.fault(metal.place, format!("no metal of the catalogue is called \"{}\"", metal.value), mend);
                    None
                }
            },
            (None, Some(sigma)) => {
                let sigma = sigma.map(|s| s.0);
                self.above_zero(
                    sigma,
                    "the conductivity of a metal",
                    1e9,
                    "write for example conductivity = \"58 MS/m\"",
                )
                .map(|s| Some(s.value))
            }
            (None, None) => {
                Some(self.catalogue.metal(default).or_else(|| self.catalogue.metal("copper")).or(Some(COPPER_S_PER_M)))
            }
        }
    }

    /// Permittivity and thickness.
    pub(super) fn jacket(&mut self, jacket: Written<RawJacket>) -> Option<(f64, f64)> {
        let RawJacket { permittivity, thickness } = jacket.value;
        let thickness =
            self.above_zero(thickness.map(|t| t.0), "the thickness", 0.1, "write for example thickness = \"0.8 mm\"");
        if !(1.0..=20.0).contains(&permittivity.value) {
            self.fault(
                permittivity.place,
                "the relative permittivity of a jacket lies between 1 and 20",
                "write 2.3 for polyethylene or 3 for PVC",
            );
            return None;
        }
        Some((permittivity.value, thickness?.value))
    }
}
