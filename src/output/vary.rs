//! Varied points as comma-separated rows, as JSON lines, and as tables: the extremes, and nominal and worst at every point.

use super::{OutputError, figures};
use crate::outcome::vary::{VariedEnds, VariedExtreme, VariedPoint, VariedRow, VaryOutcome, Worse};
use comfy_table::{CellAlignment, Table, presets};
use serde_json::{Map, Value, json};
use std::io::Write;

/// One row a point, variant and frequency; the values varied first, under their paths. A failed point is one row with the reason in
/// the last column. An empty field is a quantity that does not exist there.
///
/// # Errors
/// [`OutputError`] when the stream refuses.
pub fn csv(outcome: &VaryOutcome, out: &mut dyn Write) -> Result<(), OutputError> {
    let mut rows = ::csv::Writer::from_writer(out);
    let fixed = ["variant", "frequency_hz", "band", "edge"];
    let heads = outcome.over.iter().map(String::as_str).chain(fixed).chain(outcome.want.iter().map(String::as_str));
    rows.write_record(heads.chain(["failed"]))?;
    for point in &outcome.points {
        for row in &point.rows {
            let (band, edge) = (row.band.clone().unwrap_or_default(), edge(row).unwrap_or_default());
            let numbers = row.values.iter().map(|v| v.map(|v| v.to_string()).unwrap_or_default());
            let before = [row.variant.clone(), row.frequency_hz.to_string(), band, edge];
            rows.write_record(point.values.iter().cloned().chain(before).chain(numbers).chain([String::new()]))?;
        }
        if let Some(reason) = &point.failed {
            let nothing = std::iter::repeat_n(String::new(), fixed.len() + outcome.want.len());
            rows.write_record(point.values.iter().cloned().chain(nothing).chain([reason.clone()]))?;
        }
    }
    rows.flush()?;
    Ok(())
}

/// One JSON object a line: the values varied under "over", then variant, frequency and every quantity by name; a failed point
/// is one line with "failed".
///
/// # Errors
/// [`OutputError`] when the stream refuses.
pub fn json_lines(outcome: &VaryOutcome, out: &mut dyn Write) -> Result<(), OutputError> {
    for point in &outcome.points {
        let over: Map<String, Value> =
            outcome.over.iter().cloned().zip(point.values.iter().cloned().map(Value::from)).collect();
        for row in &point.rows {
            let mut line = Map::new();
            line.insert("over".to_owned(), Value::Object(over.clone()));
            line.insert("variant".to_owned(), json!(row.variant));
            line.insert("frequency_hz".to_owned(), json!(row.frequency_hz));
            line.insert("band".to_owned(), json!(row.band));
            line.insert("edge".to_owned(), json!(row.edge));
            line.extend(outcome.want.iter().cloned().zip(row.values.iter().map(|v| json!(v))));
            writeln!(out, "{}", Value::Object(line))?;
        }
        if let Some(reason) = &point.failed {
            writeln!(out, "{}", json!({ "over": over, "failed": reason }))?;
        }
    }
    Ok(())
}

/// Points a table lists at most; more of them are a matter for a file.
const LISTED: usize = 40;

/// For every quantity its least and greatest value and where they are, how many points failed and why, and for every quantity each
/// point as written and at its worst over the variants.
#[must_use]
pub fn table(outcome: &VaryOutcome) -> String {
    let mut table = Table::new();
    table.load_preset(presets::ASCII_MARKDOWN);
    table.set_header(["quantity", "least", "where", "greatest", "where"]);
    let (there, nowhere): (Vec<_>, Vec<_>) = outcome.want.iter().enumerate().partition(|(n, _)| exists(outcome, *n));
    for (n, name) in there {
        let all = || {
            outcome
                .points
                .iter()
                .flat_map(|p| p.rows.iter().map(move |r| (p, r)))
                .filter_map(|(p, r)| Some((p, r, r.values[n]?)))
        };
        let least = all().min_by(|a, b| a.2.total_cmp(&b.2));
        let greatest = all().max_by(|a, b| a.2.total_cmp(&b.2));
        let mut cells = vec![name.clone()];
        for end in [least, greatest] {
            match end {
                Some((point, row, value)) => cells.extend([figure(name, value), whereabouts(outcome, point, row)]),
                None => cells.extend(["none".to_owned(), String::new()]),
            }
        }
        table.add_row(cells);
    }
    for column in [1, 3] {
        if let Some(column) = table.column_mut(column) {
            column.set_cell_alignment(CellAlignment::Right);
        }
    }
    let failed: Vec<&VariedPoint> = outcome.points.iter().filter(|p| p.failed.is_some()).collect();
    let mut text = format!("{}\n\n{table}\n\n{} points", outcome.station, outcome.points.len());
    match failed.first() {
        None => text.push_str(", none failed\n"),
        Some(first) => text.push_str(&format!(
            ", {} failed, the first at {}: {}\n",
            failed.len(),
            values(outcome, first),
            first.failed.as_deref().unwrap_or_default()
        )),
    }
    if !nowhere.is_empty() && outcome.points.iter().any(|p| !p.rows.is_empty()) {
        let names: Vec<&str> = nowhere.iter().map(|(_, name)| name.as_str()).collect();
        text.push_str(&format!("nowhere in this station: {}\n", names.join(", ")));
    }
    text.push_str(&each_point(outcome));
    text
}

/// Whether any point has a value of the quantity with an index.
fn exists(outcome: &VaryOutcome, n: usize) -> bool {
    outcome.points.iter().flat_map(|p| &p.rows).any(|row| row.values.get(n).is_some_and(Option::is_some))
}

/// Nominal and worst of every point, a table a quantity.
fn each_point(outcome: &VaryOutcome) -> String {
    let points: Vec<&VariedPoint> = outcome.points.iter().filter(|p| !p.summary.is_empty()).collect();
    if points.is_empty() {
        return String::new();
    }
    if points.len() > LISTED {
        return format!(
            "\nNominal and worst over the variants of each of the {} points: with --json, under \"summary\".\n",
            points.len()
        );
    }
    let with_variants = points.iter().flat_map(|p| &p.rows).any(|r| r.variant != "nominal");
    let mut text = String::new();
    for (n, name) in outcome.want.iter().enumerate().filter(|(n, _)| exists(outcome, *n)) {
        let worse = points.iter().find_map(|p| p.summary.get(n)?.worse);
        let (what, over) = match worse {
            Some(Worse::Larger) => (" (worst is the largest)", "worst over the variants"),
            Some(Worse::Smaller) => (" (worst is the smallest)", "worst over the variants"),
            None => ("", "over the variants"),
        };
        let mut table = Table::new();
        table.load_preset(presets::ASCII_MARKDOWN);
        let mut heads: Vec<&str> = outcome.over.iter().map(String::as_str).chain(["nominal"]).collect();
        if with_variants {
            heads.push(over);
        }
        table.set_header(heads);
        for point in &points {
            let Some(summary) = point.summary.get(n) else { continue };
            let mut cells: Vec<String> = point.values.iter().map(|v| shortened(v)).collect();
            cells.push(ends(name, &summary.nominal));
            if with_variants {
                cells.push(ends(name, &summary.over_variants));
            }
            table.add_row(cells);
        }
        text.push_str(&format!("\n{name}{what}\n{table}\n"));
    }
    text
}

/// The worst value and where it is, or both ends where neither is worse.
fn ends(name: &str, ends: &VariedEnds) -> String {
    let at = |e: &VariedExtreme| {
        let variant = if e.variant == "nominal" { String::new() } else { format!(", {}", e.variant) };
        format!("{} at {} MHz{variant}", figure(name, e.value), figures::megahertz(e.frequency_hz))
    };
    match (&ends.worst, &ends.smallest, &ends.largest) {
        (Some(worst), _, _) => at(worst),
        (None, Some(smallest), Some(largest)) if smallest == largest => at(smallest),
        (None, Some(smallest), Some(largest)) => format!("{} to {}", at(smallest), at(largest)),
        _ => "none".to_owned(),
    }
}

/// A value with its unit: the name of a quantity ends in it.
fn figure(name: &str, value: f64) -> String {
    let last = name.rsplit('.').next().unwrap_or(name);
    match last {
        "conductivity_s_per_m" => format!("{} mS/m", figures::three(1e3 * value)),
        _ => figures::quantity(last, value),
    }
}

/// A value varied, its number to five figures: drawn ones carry more than a person needs; CSV and JSON have all of them.
fn shortened(value: &str) -> String {
    let (number, unit) = value.split_once(' ').map_or((value, String::new()), |(n, unit)| (n, format!(" {unit}")));
    match number.parse::<f64>() {
        Ok(exact) if exact.is_finite() && exact != 0.0 && number.len() > 7 => {
            let decimals = (4 - exact.abs().log10().floor() as i32).clamp(0, 12) as usize;
            let text = format!("{exact:.decimals$}");
            let text = if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { &text };
            format!("{text}{unit}")
        }
        _ => value.to_owned(),
    }
}

fn values(outcome: &VaryOutcome, point: &VariedPoint) -> String {
    let each: Vec<String> =
        outcome.over.iter().zip(&point.values).map(|(path, v)| format!("{path} = {}", shortened(v))).collect();
    each.join(", ")
}

fn whereabouts(outcome: &VaryOutcome, point: &VariedPoint, row: &VariedRow) -> String {
    let variant = if row.variant == "nominal" { String::new() } else { format!(", {}", row.variant) };
    format!("{}, {} MHz{variant}", values(outcome, point), figures::megahertz(row.frequency_hz))
}

fn edge(row: &VariedRow) -> Option<String> {
    serde_json::to_value(row.edge?).ok()?.as_str().map(str::to_owned)
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::outcome::vary::{Quantity, VariedSummary};

    fn want() -> Vec<Quantity> {
        ["radio.swr", "power.unaccounted_w"].map(|n| Quantity::named(n, &[], &[]).unwrap()).to_vec()
    }

    fn outcome() -> VaryOutcome {
        let row = |variant: &str, swr: f64| VariedRow {
            variant: variant.to_owned(),
            frequency_hz: 7.1e6,
            band: Some("40 m".to_owned()),
            edge: Some(crate::layout::BandEdge::Middle),
            values: vec![Some(swr), None],
        };
        let point = |value: &str, rows: Vec<VariedRow>, failed: Option<&str>| VariedPoint {
            values: vec![value.to_owned()],
            summary: VariedSummary::of(&want(), &rows),
            rows,
            failed: failed.map(str::to_owned),
        };
        VaryOutcome {
            braidwise: "0".to_owned(),
            station: "hut".to_owned(),
            over: vec!["coax.length".to_owned()],
            want: vec!["radio.swr".to_owned(), "power.unaccounted_w".to_owned()],
            points: vec![
                point("4 m", vec![row("nominal", 3.5), row("flood", 1.25)], None),
                point("40 m", Vec::new(), Some("the route is 10 m, long: move the last point")),
            ],
        }
    }

    fn written(write: fn(&VaryOutcome, &mut dyn Write) -> Result<(), OutputError>) -> Vec<String> {
        let mut bytes = Vec::new();
        write(&outcome(), &mut bytes).unwrap();
        String::from_utf8(bytes).unwrap().lines().map(str::to_owned).collect()
    }

    #[test]
    fn rows_carry_values_quantities_and_the_reason_of_a_failure() {
        let lines = written(csv);
        assert_eq!(lines[0], "coax.length,variant,frequency_hz,band,edge,radio.swr,power.unaccounted_w,failed");
        assert_eq!(lines[1], "4 m,nominal,7100000,40 m,middle,3.5,,");
        assert_eq!(lines[3], "40 m,,,,,,,\"the route is 10 m, long: move the last point\"");
    }

    #[test]
    fn json_lines_are_one_object_each() {
        let lines: Vec<Value> = written(json_lines).iter().map(|l| serde_json::from_str(l).unwrap()).collect();
        assert_eq!(lines.len(), 3);
        assert_eq!(lines[1]["radio.swr"], 1.25);
        assert_eq!(lines[1]["power.unaccounted_w"], Value::Null);
        assert_eq!(lines[2]["over"]["coax.length"], "40 m");
    }

    #[test]
    fn figures_carry_units_and_what_exists_nowhere_has_no_page() {
        for (name, value, said) in [
            ("shield.entry_current_a", 0.0059, "5.90 mA"),
            ("choke.entry choke.current_a", 8.64e-4, "0.864 mA"),
            ("shield.entry_voltage_v", 12.3, "12.3 V"),
            ("feed.resistance_ohm", 2450.0, "2450 ohm"),
            ("power.radiated_fraction", 0.52, "52 %"),
            ("earth.conductivity_s_per_m", 0.005, "5.00 mS/m"),
            ("radio.swr", 1.25, "1.25"),
            ("earth.permittivity", 13.0, "13.0"),
        ] {
            assert_eq!(figure(name, value), said, "{name}");
        }
        for (typed, said) in [
            ("10.7682166842 m", "10.768 m"),
            ("0.00123456789", "0.0012346"),
            ("10.5 m", "10.5 m"),
            ("dry sand of the yard", "dry sand of the yard"),
        ] {
            assert_eq!(shortened(typed), said);
        }
        let text = table(&outcome());
        assert!(text.contains("nowhere in this station: power.unaccounted_w") && !text.contains("none |"), "{text}");
    }

    #[test]
    fn the_table_says_where_the_extremes_are() {
        let text = table(&outcome());
        assert!(text.contains("coax.length = 4 m, 7.1 MHz, flood"), "{text}");
        assert!(text.contains("2 points, 1 failed, the first at coax.length = 40 m"), "{text}");
        let mut other = outcome();
        (other.points[0].rows[1].values[0], other.points[0].rows[1].frequency_hz) = (Some(4.25), 7.15e6);
        other.points[0].summary = VariedSummary::of(&want(), &other.points[0].rows);
        for said in ["radio.swr (worst is the largest)", "3.50 at 7.1 MHz", "4.25 at 7.15 MHz, flood"] {
            let text = table(&other);
            assert!(text.contains(said), "{said} is missing in {text}");
        }
        other.points = std::iter::repeat_n(other.points[0].clone(), LISTED + 1).collect();
        assert!(table(&other).contains("of each of the 41 points: with --json"), "{}", table(&other));
    }
}
