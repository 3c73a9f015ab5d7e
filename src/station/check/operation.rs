//! `[radio]`, `[operation]` and `[limits]`.

use super::Check;
use crate::station::raw::{RawBody, RawLimits, RawOperation, RawRadio};
use crate::station::source::Written;
use crate::station::types::{Limits, Operation, Radio};

/// Largest side of a usual radio's case, m, where the file says nothing (common practice).
const BODY_M: f64 = 0.3;
/// Power where the file says nothing, W (common practice).
const POWER_W: f64 = 100.0;
/// Shield current at equipment: between the injected disturbance levels of IEC 61000-4-6 (3 V and 10 V behind 150 ohm).
const ENTRY_CURRENT_A: f64 = 0.02;
/// Standing-wave ratio most radios put up with (common practice).
const SWR: f64 = 2.0;
/// The frequencies the kernel and the soil tables are proved for reach from 10 kHz to 60 MHz.
const FREQUENCIES_HZ: std::ops::RangeInclusive<f64> = 1e3..=1e9;

impl Check<'_> {
    pub(super) fn radio(&mut self, raw: Option<Written<RawRadio>>) -> Option<Radio> {
        let (impedance, body) = raw.map_or((None, None), |r| (r.value.impedance, r.value.body));
        let impedance_ohm = match impedance {
            Some(z) => {
                self.above_zero(z.map(|z| z.0), "the impedance", 1e5, "write for example impedance = \"50 ohm\"")?.value
            }
            None => 50.0,
        };
        let body_m = match body {
            None => Some(BODY_M),
            Some(Written { value: RawBody::None, .. }) => None,
            Some(Written { value: RawBody::Side(side_m), place }) => {
                let side = Written { value: side_m, place };
                Some(
                    self.above_zero(
                        side,
                        "the side of the case",
                        3.0,
                        "write for example body = \"0.3 m\", or \"none\"",
                    )?
                    .value,
                )
            }
        };
        Some(Radio { impedance_ohm, body_m })
    }

    pub(super) fn operation(&mut self, raw: Written<RawOperation>) -> Option<Operation> {
        let table = raw.place;
        let raw = raw.value;
        let power_w = match raw.power {
            Some(power) => self
                .above_zero(power.map(|p| p.0), "the power", 1e7, "write for example power = \"100 W\"")
                .map(|p| p.value),
            None => Some(POWER_W),
        };
        let wanted = raw.bands.map_or_else(Vec::new, |b| b.value);
        let bands = if wanted.is_empty() { Some(Vec::new()) } else { self.bands(&wanted, raw.region) };
        let frequencies = raw.frequencies.map_or_else(Vec::new, |f| f.value);
        for frequency in &frequencies {
            if !FREQUENCIES_HZ.contains(&frequency.value.0) {
                self.fault(frequency.place, "frequencies run from 1 kHz to 1 GHz", "write for example \"7.1 MHz\"");
            }
        }
        if wanted.is_empty() && frequencies.is_empty() {
            self.fault(
                table,
                "no band and no frequency is asked for",
                "add bands = [\"40 m\"] with region, or frequencies = [\"7.1 MHz\"]",
            );
            return None;
        }
        let frequencies_hz = frequencies.iter().map(|f| f.value.0).collect();
        Some(Operation { power_w: power_w?, bands: bands?, frequencies_hz })
    }

    fn bands(&mut self, wanted: &[Written<String>], region: Option<Written<u32>>) -> Option<Vec<(String, f64, f64)>> {
        let region = match region {
            Some(region) if (1..=3).contains(&region.value) => region.value,
            Some(region) => {
                self.fault(
                    region.place,
                    "the ITU regions are 1, 2 and 3",
                    "write 1 for Europe, Africa and the Middle East, 2 for the Americas, 3 for Asia-Pacific",
                );
                return None;
            }
            None => {
                let place = wanted.first().and_then(|b| b.place);
                self.fault(
                    place,
                    "band edges differ between regions, and none is given",
                    "add region = 1, 2 or 3, the ITU region",
                );
                return None;
            }
        };
        let names = self.catalogue.band_names(region);
        let found: Vec<Option<(String, f64, f64)>> = wanted
            .iter()
            .map(|name| {
                let band = self.catalogue.band(name, region);
                if band.is_none() {
                    let mend = format!(
                        "the bands of region {region} are {}",
                        crate::station::quoted(names.iter().map(String::as_str))
                    );
                    self.fault(name.place, format!("no band is called \"{}\"", name.value), mend);
                }
                band
            })
            .collect();
        found.into_iter().collect()
    }

    pub(super) fn limits(&mut self, raw: Option<Written<RawLimits>>) -> Option<Limits> {
        let (current, swr) = raw.map_or((None, None), |l| (l.value.entry_current, l.value.swr));
        let entry_current_a = match current {
            Some(current) => {
                self.above_zero(
                    current.map(|c| c.0),
                    "the current",
                    1e3,
                    "write for example entry_current = \"20 mA\"",
                )?
                .value
            }
            None => ENTRY_CURRENT_A,
        };
        let swr = match swr {
            Some(swr) if swr.value > 1.0 => swr.value,
            Some(swr) => {
                self.fault(swr.place, "a standing-wave ratio is above 1", "write for example swr = 2");
                return None;
            }
            None => SWR,
        };
        Some(Limits { entry_current_a, swr })
    }
}
