//! What `vary` answers: the values tried, and the quantities wanted of each, a row a variant and frequency.

use super::{FrequencyOutcome, PartOutcome, ShieldOutcome};
use crate::layout::BandEdge;
use serde::{Deserialize, Serialize};

/// The answer of `vary`, points in the order they were asked for.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct VaryOutcome {
    /// Version of the program.
    pub braidwise: String,
    /// Title of the station.
    pub station: String,
    /// Paths of the values varied.
    pub over: Vec<String>,
    /// Quantities wanted, in the order of the values of a row.
    pub want: Vec<String>,
    /// The points.
    pub points: Vec<VariedPoint>,
}

/// One set of values.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct VariedPoint {
    /// The values, in the order of the paths, as they would be typed.
    pub values: Vec<String>,
    /// A row a variant and frequency; empty where the point failed.
    pub rows: Vec<VariedRow>,
    /// Why there are no results.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub failed: Option<String>,
    /// Nominal and over the variants, one a quantity wanted; empty where the point failed.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub summary: Vec<VariedSummary>,
}

/// One quantity of a point: its ends over the frequencies, as written and over all variants.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct VariedSummary {
    /// The quantity.
    pub quantity: String,
    /// Which way it gets worse; `None` where neither is worse.
    pub worse: Option<Worse>,
    /// The station as written.
    pub nominal: VariedEnds,
    /// All variants, the station as written among them.
    pub over_variants: VariedEnds,
}

/// The ends of a quantity; all `None` where it exists nowhere.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct VariedEnds {
    /// The smallest value.
    pub smallest: Option<VariedExtreme>,
    /// The largest value.
    pub largest: Option<VariedExtreme>,
    /// Of the two the worse; `None` where neither is.
    pub worst: Option<VariedExtreme>,
}

/// A value and where it occurs.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct VariedExtreme {
    /// The value.
    pub value: f64,
    /// Variant.
    pub variant: String,
    /// Hz.
    pub frequency_hz: f64,
}

/// Which way a quantity gets worse.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Worse {
    /// The larger the worse: standing-wave ratio, currents, voltages, losses, errors.
    Larger,
    /// The smaller the worse: what is radiated.
    Smaller,
}

impl VariedSummary {
    /// Every quantity wanted over the rows of a point.
    #[must_use]
    pub fn of(want: &[Quantity], rows: &[VariedRow]) -> Vec<Self> {
        if rows.is_empty() {
            return Vec::new();
        }
        let one = |(n, quantity): (usize, &Quantity)| {
            let worse = quantity.worse();
            Self {
                quantity: quantity.name.clone(),
                worse,
                nominal: VariedEnds::of(rows.iter().filter(|r| r.variant == "nominal"), n, worse),
                over_variants: VariedEnds::of(rows.iter(), n, worse),
            }
        };
        want.iter().enumerate().map(one).collect()
    }
}

impl VariedEnds {
    /// The ends of the value with an index; of equal ones the first counts.
    fn of<'a>(rows: impl Iterator<Item = &'a VariedRow>, value: usize, worse: Option<Worse>) -> Self {
        let (mut smallest, mut largest): (Option<VariedExtreme>, Option<VariedExtreme>) = (None, None);
        for row in rows {
            let Some(value) = row.values.get(value).copied().flatten() else { continue };
            let here = || Some(VariedExtreme { value, variant: row.variant.clone(), frequency_hz: row.frequency_hz });
            if smallest.as_ref().is_none_or(|s| value < s.value) {
                smallest = here();
            }
            if largest.as_ref().is_none_or(|l| value > l.value) {
                largest = here();
            }
        }
        let worst = match worse {
            Some(Worse::Larger) => largest.clone(),
            Some(Worse::Smaller) => smallest.clone(),
            None => None,
        };
        Self { smallest, largest, worst }
    }
}

/// The quantities of a point in one variant at one frequency.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct VariedRow {
    /// Variant; "nominal" is the file as written.
    pub variant: String,
    /// Hz.
    pub frequency_hz: f64,
    /// Band, where the frequency came from one.
    pub band: Option<String>,
    /// Where in the band.
    pub edge: Option<BandEdge>,
    /// In the order of the quantities wanted; `None` where the quantity does not exist.
    pub values: Vec<Option<f64>>,
}

/// How a quantity is read off the outcome of a frequency.
type Reader = fn(&FrequencyOutcome) -> Option<f64>;

/// Every quantity that needs no name of a part. Currents and voltages are RMS magnitudes.
const PLAIN: [(&str, Reader); 31] = [
    ("feed.resistance_ohm", |f| Some(f.feed.resistance_ohm)),
    ("feed.reactance_ohm", |f| Some(f.feed.reactance_ohm)),
    ("feed.voltage_v", |f| Some(f.feed.voltage_v.norm())),
    ("feed.current_a", |f| Some(f.feed.current_a.norm())),
    ("radio.resistance_ohm", |f| Some(f.radio.resistance_ohm)),
    ("radio.reactance_ohm", |f| Some(f.radio.reactance_ohm)),
    ("radio.swr", |f| Some(f.radio.swr)),
    ("shield.entry_at_m", |f| shield(f, |s| Some(s.entry_at_m))),
    ("shield.entry_current_a", |f| shield(f, |s| Some(s.entry_current_a))),
    ("shield.entry_voltage_v", |f| shield(f, |s| s.entry_voltage_v)),
    ("shield.end_current_a", |f| shield(f, |s| Some(s.end_current_a))),
    ("shield.end_voltage_v", |f| shield(f, |s| s.end_voltage_v)),
    ("shield.last_metre_current_a", |f| shield(f, |s| Some(s.last_metre_current_a))),
    ("shield.largest_current_a", |f| shield(f, |s| Some(s.largest_current_a))),
    ("shield.largest_at_m", |f| shield(f, |s| Some(s.largest_at_m))),
    ("shield.largest_voltage_v", |f| shield(f, |s| s.largest_voltage_v)),
    ("shield.largest_voltage_at_m", |f| shield(f, |s| s.largest_voltage_at_m)),
    ("power.input_w", |f| Some(f.power.input_w)),
    ("power.radiated_w", |f| Some(f.power.radiated_w)),
    ("power.radiated_fraction", |f| Some(f.power.radiated_w / f.power.input_w)),
    ("power.earth_w", |f| Some(f.power.earth_w)),
    ("power.metal_w", |f| Some(f.power.metal_w)),
    ("power.line_w", |f| Some(f.power.line_w)),
    ("power.transformer_w", |f| Some(f.power.transformer_w)),
    ("power.chokes_w", |f| Some(total_w(&f.power.chokes))),
    ("power.inline_w", |f| Some(total_w(&f.power.inline))),
    ("power.unaccounted_w", |f| f.power.unaccounted_w),
    ("earth.permittivity", |f| f.earth.map(|e| e.permittivity)),
    ("earth.conductivity_s_per_m", |f| f.earth.map(|e| e.conductivity_s_per_m)),
    ("discretisation.resistance_ohm", |f| Some(f.discretisation.resistance_ohm)),
    ("discretisation.reactance_ohm", |f| Some(f.discretisation.reactance_ohm)),
];

/// How a quantity is read off a choke or inline part.
type PartReader = fn(&PartOutcome) -> f64;

/// What can be asked of a choke or inline part.
const OF_A_PART: [(&str, PartReader); 3] =
    [("dissipated_w", |p| p.dissipated_w), ("current_a", |p| p.current_a), ("voltage_v", |p| p.voltage_v)];

/// What is asked for where nothing is.
pub const DEFAULT_WANT: [&str; 5] =
    ["feed.resistance_ohm", "feed.reactance_ohm", "radio.swr", "shield.entry_current_a", "shield.entry_voltage_v"];

fn shield(f: &FrequencyOutcome, read: impl Fn(&ShieldOutcome) -> Option<f64>) -> Option<f64> {
    f.shield.as_ref().and_then(read)
}

fn total_w(parts: &[PartOutcome]) -> f64 {
    // from plain zero: the sum of nothing would be -0
    parts.iter().fold(0.0, |sum, p| sum + p.dissipated_w)
}

/// One quantity of a station at a frequency.
#[derive(Debug, Clone, Copy)]
enum Source {
    Plain(Reader),
    Part { inline: bool, read: PartReader },
    Joint,
}

/// A quantity by its name, ready to be read off an outcome.
#[derive(Debug, Clone)]
pub struct Quantity {
    /// The name as asked for: "radio.swr", "choke.entry choke.dissipated_w".
    pub name: String,
    part: String,
    source: Source,
}

/// A quantity that does not exist.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("there is no quantity \"{name}\"; {}", offer(.nearest))]
pub struct NoQuantity {
    /// What was asked for.
    pub name: String,
    /// Names that are near.
    pub nearest: Vec<String>,
}

fn offer(nearest: &[String]) -> String {
    let quoted: Vec<String> = nearest.iter().map(|n| format!("\"{n}\"")).collect();
    format!("nearest are {}", quoted.join(", "))
}

impl Quantity {
    /// A quantity by name, for a station with these chokes and inline parts.
    ///
    /// # Errors
    /// [`NoQuantity`] with the nearest names.
    pub fn named(name: &str, chokes: &[String], inline: &[String]) -> Result<Self, NoQuantity> {
        let name = name.trim();
        let found = |part: &str, source| Ok(Self { name: name.to_owned(), part: part.to_owned(), source });
        if let Some((_, read)) = PLAIN.iter().find(|(n, _)| *n == name) {
            return found("", Source::Plain(*read));
        }
        if let Some(part) = name.strip_prefix("joint.").and_then(|n| n.strip_suffix(".current_a")) {
            return found(part, Source::Joint);
        }
        for (kind, names, is_inline) in [("choke", chokes, false), ("inline", inline, true)] {
            for part in names {
                for (field, read) in OF_A_PART {
                    if name == format!("{kind}.{part}.{field}") {
                        return found(part, Source::Part { inline: is_inline, read });
                    }
                }
            }
        }
        Err(NoQuantity { name: name.to_owned(), nearest: nearest(name, chokes, inline) })
    }

    /// Its value; `None` where it does not exist.
    #[must_use]
    pub fn of(&self, outcome: &FrequencyOutcome) -> Option<f64> {
        let value = match self.source {
            Source::Plain(read) => read(outcome),
            Source::Part { inline, read } => {
                let parts = if inline { &outcome.power.inline } else { &outcome.power.chokes };
                parts.iter().find(|p| p.name == self.part).map(read)
            }
            Source::Joint => outcome.joints.iter().find(|j| j.conductor == self.part).map(|j| j.current_a),
        };
        value.filter(|v| v.is_finite())
    }

    /// Which way it gets worse; `None` for resistances, reactances, places, constants and what must only balance.
    #[must_use]
    pub fn worse(&self) -> Option<Worse> {
        let losses = ["earth_w", "metal_w", "line_w", "transformer_w", "chokes_w", "inline_w", "dissipated_w"];
        let last = self.name.rsplit('.').next().unwrap_or(&self.name);
        if last.starts_with("radiated_") {
            Some(Worse::Smaller)
        } else if last == "swr"
            || last.ends_with("_a")
            || last.ends_with("_v")
            || losses.contains(&last)
            || self.needs_second_mesh()
        {
            Some(Worse::Larger)
        } else {
            None
        }
    }

    /// Whether it rests on the power radiated or lost in the earth, which are dear.
    #[must_use]
    pub fn needs_power_budget(&self) -> bool {
        ["power.radiated", "power.earth", "power.unaccounted"].iter().any(|start| self.name.starts_with(start))
    }

    /// Whether it rests on the second, coarser mesh.
    #[must_use]
    pub fn needs_second_mesh(&self) -> bool {
        self.name.starts_with("discretisation.")
    }
}

/// Names of all quantities, "NAME" standing for a part or conductor.
#[must_use]
pub fn quantity_names() -> Vec<String> {
    let parts = ["choke", "inline"].into_iter().flat_map(|kind| OF_A_PART.map(|(f, _)| format!("{kind}.NAME.{f}")));
    let plain = PLAIN.iter().map(|(name, _)| (*name).to_owned());
    plain.chain(parts).chain(["joint.CONDUCTOR.current_a".to_owned()]).collect()
}

fn nearest(name: &str, chokes: &[String], inline: &[String]) -> Vec<String> {
    let mut names: Vec<String> = PLAIN.iter().map(|(n, _)| (*n).to_owned()).collect();
    for (kind, parts) in [("choke", chokes), ("inline", inline)] {
        names.extend(parts.iter().flat_map(|part| OF_A_PART.map(|(f, _)| format!("{kind}.{part}.{f}"))));
    }
    // What was typed is compared with the whole name and with its last step, so that "swr" finds "radio.swr".
    let score = |candidate: &str| {
        let last = candidate.rsplit('.').next().unwrap_or(candidate);
        strsim::jaro_winkler(name, candidate).max(strsim::jaro_winkler(name, last))
    };
    names.sort_by(|a, b| score(b).total_cmp(&score(a)));
    names.truncate(3);
    names
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn an_unknown_quantity_is_refused_with_the_nearest_names() {
        let near = |name: &str| Quantity::named(name, &["entry choke".to_owned()], &[]).unwrap_err().nearest;
        assert_eq!(near("swr")[0], "radio.swr");
        assert_eq!(near("shield.entry_curent_a")[0], "shield.entry_current_a");
        assert_eq!(near("choke.entry.dissipated_w")[0], "choke.entry choke.dissipated_w");
        assert!(Quantity::named("choke.entry choke.voltage_v", &["entry choke".to_owned()], &[]).is_ok());
    }

    fn wanted(names: &[&str]) -> Vec<Quantity> {
        names.iter().map(|n| Quantity::named(n, &["a.b choke".to_owned()], &[]).unwrap()).collect()
    }

    #[test]
    fn a_summary_has_nominal_and_worst_with_variant_and_frequency() {
        let row = |variant: &str, frequency_hz: f64, values: [Option<f64>; 3]| VariedRow {
            variant: variant.to_owned(),
            frequency_hz,
            band: None,
            edge: None,
            values: values.to_vec(),
        };
        let rows = [
            row("nominal", 7e6, [Some(2.0), Some(0.5), None]),
            row("nominal", 14e6, [Some(1.5), Some(0.6), None]),
            row("flood", 7e6, [Some(3.0), Some(0.4), Some(7.0)]),
            row("flood", 14e6, [Some(1.2), Some(0.7), Some(-2.0)]),
        ];
        let want = wanted(&["radio.swr", "power.radiated_fraction", "feed.reactance_ohm"]);
        let [swr, radiated, reactance] = VariedSummary::of(&want, &rows).try_into().unwrap();
        let told = |e: &Option<VariedExtreme>| e.as_ref().map(|e| (e.value, e.variant.clone(), e.frequency_hz));
        assert_eq!(told(&swr.nominal.worst), Some((2.0, "nominal".to_owned(), 7e6)));
        assert_eq!(told(&swr.over_variants.worst), Some((3.0, "flood".to_owned(), 7e6)));
        assert_eq!(told(&swr.over_variants.smallest), Some((1.2, "flood".to_owned(), 14e6)));
        assert_eq!(told(&radiated.over_variants.worst), Some((0.4, "flood".to_owned(), 7e6)));
        assert_eq!(told(&radiated.nominal.worst), Some((0.5, "nominal".to_owned(), 7e6)));
        assert_eq!((reactance.worse, reactance.over_variants.worst.is_none()), (None, true));
        assert_eq!(told(&reactance.nominal.largest), None);
        assert_eq!(told(&reactance.over_variants.smallest), Some((-2.0, "flood".to_owned(), 14e6)));
        assert!(VariedSummary::of(&want, &[]).is_empty());
    }

    #[test]
    fn worse_is_larger_for_what_hurts_and_smaller_for_what_is_wanted() {
        let larger = ["radio.swr", "shield.entry_current_a", "shield.end_voltage_v", "power.earth_w", "power.chokes_w"];
        let parts = ["choke.a.b choke.dissipated_w", "choke.a.b choke.voltage_v", "joint.mast.current_a"];
        let smaller = ["power.radiated_w", "power.radiated_fraction"];
        let neither = ["feed.resistance_ohm", "shield.largest_at_m", "power.input_w", "power.unaccounted_w"];
        for (names, worse) in [
            (&larger[..], Some(Worse::Larger)),
            (&parts, Some(Worse::Larger)),
            (&["discretisation.resistance_ohm"], Some(Worse::Larger)),
            (&smaller, Some(Worse::Smaller)),
            (&neither, None),
        ] {
            for quantity in wanted(names) {
                assert_eq!(quantity.worse(), worse, "{}", quantity.name);
            }
        }
    }

    #[test]
    fn every_name_is_told_apart_and_every_default_exists() {
        let mut names = quantity_names();
        names.sort();
        names.dedup();
        assert_eq!(names.len(), quantity_names().len());
        for name in DEFAULT_WANT {
            assert!(Quantity::named(name, &[], &[]).is_ok(), "{name}");
        }
    }
}
