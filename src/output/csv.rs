//! Results as comma-separated rows, units in the headers, for spreadsheets and scripts.

pub use super::csv_studies::{cut, place};

use super::OutputError;
use crate::outcome::{FrequencyOutcome, PartOutcome, Prediction, ShieldEnd};
use std::collections::BTreeSet;
use std::io::Write;

/// Columns in front of those of the parts.
const COLUMNS: [&str; 35] = [
    "variant",
    "frequency_hz",
    "band",
    "edge",
    "earth_permittivity",
    "earth_conductivity_s_per_m",
    "feed_resistance_ohm",
    "feed_reactance_ohm",
    "feed_resistance_error_ohm",
    "feed_reactance_error_ohm",
    "feed_voltage_v",
    "feed_current_a",
    "radio_resistance_ohm",
    "radio_reactance_ohm",
    "radio_swr",
    "entry_at_m",
    "entry_current_a",
    "entry_voltage_v",
    "shield_end",
    "end_current_a",
    "end_voltage_v",
    "last_metre_current_a",
    "largest_current_a",
    "largest_current_at_m",
    "largest_voltage_v",
    "largest_voltage_at_m",
    "input_w",
    "radiated_w",
    "earth_w",
    "metal_w",
    "line_w",
    "transformer_w",
    "chokes_w",
    "inline_w",
    "unaccounted_w",
];

/// One row a frequency and variant, the station as written first ("nominal"). Currents and voltages are RMS magnitudes. An
/// empty field is a quantity that does not exist there. Each choke and inline part has three columns of its own at the end.
///
/// # Errors
/// [`OutputError::Rows`] or [`OutputError::Stream`] when `target` refuses.
pub fn prediction(prediction: &Prediction, target: impl Write) -> Result<(), OutputError> {
    let mut rows = csv::Writer::from_writer(target);
    let variants = prediction.variants.iter().map(|v| (v.name.as_str(), v.frequencies.as_slice()));
    let all: Vec<_> = std::iter::once(("nominal", prediction.frequencies.as_slice())).chain(variants).collect();
    let names: BTreeSet<&str> =
        all.iter().flat_map(|(_, list)| list.iter().flat_map(parts).map(|p| p.name.as_str())).collect();
    let part_columns = names.iter().flat_map(|n| ["w", "a", "v"].map(|unit| format!("part {n}_{unit}")));
    rows.write_record(COLUMNS.iter().map(ToString::to_string).chain(part_columns))?;
    for (variant, frequencies) in &all {
        for frequency in *frequencies {
            let mut record = vec![(*variant).to_string()];
            record.extend(fields(frequency));
            for name in &names {
                let part = parts(frequency).find(|p| p.name == *name);
                record.extend([
                    number(part.map(|p| p.dissipated_w)),
                    number(part.map(|p| p.current_a)),
                    number(part.map(|p| p.voltage_v)),
                ]);
            }
            rows.write_record(record)?;
        }
    }
    rows.flush()?;
    Ok(())
}

fn parts(frequency: &FrequencyOutcome) -> impl Iterator<Item = &PartOutcome> {
    frequency.power.chokes.iter().chain(&frequency.power.inline)
}

/// Shortest digits that read back the same; nothing for what is missing or not a number.
pub(super) fn number(value: Option<f64>) -> String {
    // a sum of nothing is -0, which reads like a value
    value.filter(|v| v.is_finite()).map_or(String::new(), |v| (v + 0.0).to_string())
}

/// Everything between the variant and the parts, in the order of [`COLUMNS`].
fn fields(f: &FrequencyOutcome) -> Vec<String> {
    let shield = f.shield.as_ref();
    let end = shield.map_or("", |s| match s.end {
        ShieldEnd::Open => "open",
        ShieldEnd::Body => "body",
        ShieldEnd::Joined => "joined",
    });
    let edge = f.edge.map_or("", super::bands::edge_name);
    let some = |value: f64| number(Some(value));
    let mut out = vec![some(f.frequency_hz), f.band.clone().unwrap_or_default(), edge.to_string()];
    out.extend([number(f.earth.map(|e| e.permittivity)), number(f.earth.map(|e| e.conductivity_s_per_m))]);
    out.extend([f.feed.resistance_ohm, f.feed.reactance_ohm].map(some));
    out.extend([f.discretisation.resistance_ohm, f.discretisation.reactance_ohm].map(some));
    out.extend([f.feed.voltage_v.norm(), f.feed.current_a.norm()].map(some));
    out.extend([f.radio.resistance_ohm, f.radio.reactance_ohm, f.radio.swr].map(some));
    out.extend([number(shield.map(|s| s.entry_at_m)), number(shield.map(|s| s.entry_current_a))]);
    out.extend([number(shield.and_then(|s| s.entry_voltage_v)), end.to_string()]);
    out.extend([number(shield.map(|s| s.end_current_a)), number(shield.and_then(|s| s.end_voltage_v))]);
    out.extend([number(shield.map(|s| s.last_metre_current_a)), number(shield.map(|s| s.largest_current_a))]);
    out.extend([number(shield.map(|s| s.largest_at_m)), number(shield.and_then(|s| s.largest_voltage_v))]);
    out.push(number(shield.and_then(|s| s.largest_voltage_at_m)));
    let p = &f.power;
    let total = |parts: &[PartOutcome]| parts.iter().map(|part| part.dissipated_w).sum::<f64>();
    out.extend([p.input_w, p.radiated_w, p.earth_w, p.metal_w, p.line_w, p.transformer_w].map(some));
    out.extend([some(total(&p.chokes)), some(total(&p.inline)), number(p.unaccounted_w)]);
    out
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::output::sample;

    #[test]
    fn every_frequency_of_every_variant_is_a_row_under_its_headers() {
        let sample = sample::prediction();
        let mut bytes = Vec::new();
        prediction(&sample, &mut bytes).unwrap();
        let mut reader = csv::Reader::from_reader(bytes.as_slice());
        let headers = reader.headers().unwrap().clone();
        let records: Vec<_> = reader.records().map(Result::unwrap).collect();
        assert_eq!(records.len(), 30);
        let column = |name: &str| headers.iter().position(|h| h == name).unwrap();
        let read = |row: usize, name: &str| records[row][column(name)].to_string();
        assert_eq!(
            (read(0, "variant"), read(15, "variant"), read(4, "edge")),
            ("nominal".into(), "wet".into(), "middle".into())
        );
        let shield = sample.frequencies[4].shield.as_ref().unwrap();
        assert_eq!(read(4, "entry_current_a").parse::<f64>().unwrap(), shield.entry_current_a);
        assert_eq!(read(4, "unaccounted_w"), "0.1");
        assert_eq!(read(4, "part entry choke_w"), "10.4");
        // The columns of a row balance as the outcome does.
        let watts =
            ["radiated_w", "earth_w", "metal_w", "line_w", "transformer_w", "chokes_w", "inline_w", "unaccounted_w"];
        let sum: f64 = watts.iter().map(|name| read(4, name).parse::<f64>().unwrap()).sum();
        assert!((sum - 100.0).abs() < 1e-9, "{sum}");
    }

    #[test]
    fn nothing_is_zero_and_not_less_than_zero() {
        assert_eq!((number(Some(-0.0)), number(Some(-0.5))), ("0".into(), "-0.5".into()));
        let mut sample = sample::prediction();
        sample.frequencies.iter_mut().for_each(|f| f.power.inline.clear());
        let mut bytes = Vec::new();
        prediction(&sample, &mut bytes).unwrap();
        assert!(!String::from_utf8(bytes).unwrap().split(',').any(|field| field == "-0"));
    }

    #[test]
    fn what_is_missing_is_empty() {
        let mut sample = sample::prediction();
        sample.frequencies[0].shield = None;
        sample.frequencies[0].radio.swr = f64::INFINITY;
        let mut bytes = Vec::new();
        prediction(&sample, &mut bytes).unwrap();
        let text = String::from_utf8(bytes).unwrap();
        assert!(!text.contains("NaN") && !text.contains("inf"));
        assert!(text.lines().nth(1).unwrap().contains(",,,,,,,,,,"));
    }
}
