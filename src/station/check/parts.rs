//! `[[choke]]` and `[[inline]]`.

use super::{Check, name_or};
use crate::station::raw::{Distance, Elements, RawChoke, RawImpedance, RawInline, RawResonant};
use crate::station::source::{Place, Written};
use crate::station::types::{Law, Part, PartSort};

impl Check<'_> {
    pub(super) fn choke(&mut self, number: usize, raw: Written<RawChoke>) -> Option<Part> {
        let table = raw.place;
        let raw = raw.value;
        let on = raw.on.unwrap_or(Written { value: "coax".to_owned(), place: table });
        let known = if on.value == "coax" && !self.conductors.contains(&on.value) {
            self.fault(
                on.place,
                "a choke sits on the coax, and this station has none",
                "add on = \"NAME\" of a wire, or a [coax]",
            );
            None
        } else {
            self.conductor_exists(&on)
        };
        let at_m = self.place_along(raw.at);
        let law = match (raw.impedance, raw.resonant) {
            (Some(impedance), None) => self.fixed(impedance),
            (None, Some(resonant)) => self.resonant(resonant.value),
            (Some(_), Some(resonant)) => {
                self.fault(
                    resonant.place,
                    "the choke's impedance is given twice",
                    "keep one of impedance and resonant",
                );
                None
            }
            (None, None) => {
                self.fault(
                    table,
                    "this choke has no impedance",
                    "add impedance = { resistance = \"5 kohm\", reactance = \"0 ohm\" }",
                );
                None
            }
        };
        known?;
        Some(Part {
            name: name_or(raw.name, "choke", number, table),
            sort: PartSort::Choke,
            on,
            at_m: at_m?,
            law: law?,
        })
    }

    pub(super) fn inline(&mut self, number: usize, raw: Written<RawInline>) -> Option<Part> {
        let table = raw.place;
        let raw = raw.value;
        let known = self.conductor_exists(&raw.on);
        let at_m = self.place_along(raw.at);
        let law = self.elements(&raw, table);
        known?;
        Some(Part {
            name: name_or(raw.name, "inline", number, table),
            sort: PartSort::Inline,
            on: raw.on,
            at_m: at_m?,
            law: law?,
        })
    }

    fn place_along(&mut self, at: Written<Distance>) -> Option<Written<f64>> {
        if at.value.0 >= 0.0 {
            return Some(at.map(|d| d.0));
        }
        self.fault(
            at.place,
            "a distance along a conductor cannot be negative",
            "measure it from the first point of the path",
        );
        None
    }

    fn fixed(&mut self, raw: Written<RawImpedance>) -> Option<Law> {
        let RawImpedance { resistance, reactance } = raw.value;
        if resistance.is_none() && reactance.is_none() {
            self.fault(
                raw.place,
                "this impedance is empty",
                "write { resistance = \"5 kohm\", reactance = \"0 ohm\" }",
            );
            return None;
        }
        let resistance_ohm = resistance.map_or(0.0, |r| r.value.0);
        self.not_negative(resistance.map(|r| (resistance_ohm, r.place)), "a resistance")?;
        Some(Law::Fixed { resistance_ohm, reactance_ohm: reactance.map_or(0.0, |x| x.value.0) })
    }

    fn resonant(&mut self, raw: RawResonant) -> Option<Law> {
        let resistance =
            self.above_zero(raw.resistance.map(|r| r.0), "the resistance", 1e12, "write for example \"5 kohm\"");
        let inductance =
            self.above_zero(raw.inductance.map(|l| l.0), "the inductance", 1e3, "write for example \"40 uH\"");
        let capacitance =
            self.above_zero(raw.capacitance.map(|c| c.0), "the capacitance", 1.0, "write for example \"5 pF\"");
        Some(Law::ParallelResonant {
            resistance_ohm: resistance?.value,
            inductance_h: inductance?.value,
            capacitance_f: capacitance?.value,
        })
    }

    fn elements(&mut self, raw: &RawInline, table: Option<Place>) -> Option<Law> {
        if raw.resistance.is_none() && raw.inductance.is_none() && raw.capacitance.is_none() {
            self.fault(table, "this part has no elements", "add inductance = \"34 uH\", resistance or capacitance");
            return None;
        }
        self.not_negative(raw.resistance.map(|r| (r.value.0, r.place)), "a resistance")?;
        self.not_negative(raw.inductance.map(|l| (l.value.0, l.place)), "an inductance")?;
        let in_series = raw.elements.is_none_or(|e| e.value == Elements::Series);
        if let Some(capacitance) = raw.capacitance {
            let value = capacitance.map(|c| c.0);
            self.above_zero(
                value,
                "a capacitance",
                1.0,
                "write for example capacitance = \"120 pF\"; leave it out for none",
            )?;
        }
        if !in_series {
            for (value, place) in
                [raw.resistance.map(|r| (r.value.0, r.place)), raw.inductance.map(|l| (l.value.0, l.place))]
                    .into_iter()
                    .flatten()
            {
                if value == 0.0 {
                    self.fault(
                        place,
                        "zero in parallel is a short",
                        "leave the part out of the file, or this element out of the part",
                    );
                    return None;
                }
            }
        }
        Some(Law::Elements {
            resistance_ohm: raw.resistance.map(|r| r.value.0),
            inductance_h: raw.inductance.map(|l| l.value.0),
            capacitance_f: raw.capacitance.map(|c| c.value.0),
            in_series,
        })
    }

    fn not_negative(&mut self, value: Option<(f64, Option<Place>)>, what: &str) -> Option<()> {
        match value {
            Some((v, place)) if v < 0.0 => {
                self.fault(place, format!("{what} cannot be negative"), "write a value of zero or more");
                None
            }
            _ => Some(()),
        }
    }
}
