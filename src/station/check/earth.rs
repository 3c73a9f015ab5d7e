//! `[earth]`.

use super::Check;
use crate::station::raw::{Conductivity, Dispersion, EarthKind, RawEarth};
use crate::station::source::Written;
use crate::station::types::Earth;

impl Check<'_> {
    pub(super) fn earth(&mut self, raw: Written<RawEarth>) -> Option<Written<Earth>> {
        let table = raw.place;
        let raw = raw.value;
        let kind = match (raw.kind.map(|k| k.value), raw.soil.is_some() || raw.conductivity.is_some()) {
            (Some(kind), _) => kind,
            (None, true) => EarthKind::Soil,
            (None, false) => {
                self.fault(table, "`kind` is missing here", "write kind = \"soil\", \"perfect\" or \"none\"");
                return None;
            }
        };
        if kind != EarthKind::Soil {
            let stray = [
                raw.soil.map(|v| v.place),
                raw.permittivity.map(|v| v.place),
                raw.conductivity.map(|v| v.place),
                raw.dispersion.map(|v| v.place),
            ];
            if let Some(place) = stray.into_iter().flatten().next() {
                self.fault(place, "only a soil has constants", "write kind = \"soil\", or leave this out");
                return None;
            }
            let earth = if kind == EarthKind::Perfect { Earth::Perfect } else { Earth::None };
            return Some(Written { value: earth, place: table });
        }
        self.soil(raw, table).map(|value| Written { value, place: table })
    }

    fn soil(&mut self, raw: RawEarth, table: Option<crate::station::Place>) -> Option<Earth> {
        match (raw.soil, raw.permittivity, raw.conductivity, raw.dispersion) {
            (Some(soil), None, None, None) => {
                let Some((permittivity, conductivity_s_per_m)) = self.catalogue.soil(&soil) else {
                    let names = self.catalogue.soil_names();
                    let mend = format!(
                        "{} Or write permittivity and conductivity instead",
                        crate::station::offer(&soil, names.iter().map(String::as_str))
                    );
                    self.fault(soil.place, format!("no soil of the catalogue is called \"{}\"", soil.value), mend);
                    return None;
                };
                Some(Earth::Soil { permittivity, conductivity_s_per_m })
            }
            (Some(soil), ..) => {
                self.fault(soil.place, "a soil by name and constants of its own contradict", "keep one of the two");
                None
            }
            (None, permittivity, Some(conductivity), Some(dispersion)) => {
                if let Some(permittivity) = permittivity {
                    self.fault(
                        permittivity.place,
                        "a `dispersion` model gives its own permittivity",
                        "leave permittivity out",
                    );
                    return None;
                }
                let sigma = self.sigma(conductivity)?;
                if sigma == 0.0 {
                    self.fault(
                        conductivity.place,
                        "a dispersion model needs a conductivity above zero",
                        "write conductivity = \"5 mS/m\"",
                    );
                    return None;
                }
                Some(match dispersion.value {
                    Dispersion::LongmireSmith => Earth::LongmireSmith(sigma),
                    Dispersion::AlipioVisacro => Earth::AlipioVisacro(sigma),
                })
            }
            (None, Some(permittivity), Some(conductivity), None) => {
                let conductivity_s_per_m = self.sigma(conductivity);
                if !(1.0..=100.0).contains(&permittivity.value) {
                    self.fault(
                        permittivity.place,
                        "the relative permittivity of a soil lies between 1 and 100",
                        "write for example permittivity = 13",
                    );
                    return None;
                }
                Some(Earth::Soil { permittivity: permittivity.value, conductivity_s_per_m: conductivity_s_per_m? })
            }
            _ => {
                self.fault(
                    table,
                    "a soil needs a name, or permittivity and conductivity",
                    "write soil = \"wet meadow\", or permittivity = 13 and conductivity = \"5 mS/m\"",
                );
                None
            }
        }
    }

    fn sigma(&mut self, conductivity: Written<Conductivity>) -> Option<f64> {
        let sigma = conductivity.value.0;
        // Up to far beyond sea water, so that the limit of a perfect earth can be approached.
        if (0.0..=1e8).contains(&sigma) {
            return Some(sigma);
        }
        let reason = "the conductivity of a soil lies between 0 and 100 MS/m";
        self.fault(
            conductivity.place,
            reason,
            "write for example conductivity = \"5 mS/m\"; sea water has about 5 S/m",
        );
        None
    }
}
