//! The committed convergence table keeps the accuracy contract, and a part of it computed afresh agrees.

use crate::cases::{Case, Contract, all};
use crate::refinement::{HEADER, refine};

/// One row of the table as text.
struct Row {
    station: String,
    contract: String,
    values: Vec<Option<f64>>,
}

fn table() -> Vec<Row> {
    let mut reader = csv::Reader::from_path("tests/data/convergence.csv").unwrap();
    let header: Vec<String> = reader.headers().unwrap().iter().map(str::to_string).collect();
    assert_eq!(header.join(","), HEADER.trim());
    reader
        .records()
        .map(|r| {
            let r = r.unwrap();
            Row {
                station: r[0].to_string(),
                contract: r[1].to_string(),
                values: r.iter().skip(2).map(|x| x.parse().ok()).collect(),
            }
        })
        .collect()
}

impl Row {
    /// A column by its name.
    fn get(&self, name: &str) -> Option<f64> {
        self.values[HEADER.trim().split(',').position(|h| h == name).unwrap() - 2]
    }

    fn at(&self, name: &str) -> f64 {
        self.get(name).unwrap()
    }
}

#[test]
fn every_row_keeps_the_contract() {
    let rows = table();
    let stations: std::collections::BTreeSet<&str> = rows.iter().map(|r| r.station.as_str()).collect();
    for case in all() {
        assert!(stations.contains(case.name.as_str()), "{} is missing: regenerate the table", case.name);
    }
    for r in &rows {
        let what = format!("{} at {} MHz", r.station, r.at("frequency_mhz"));
        assert!(r.at("feed_over_allowed") <= 1.0, "{what}: feed");
        let soil = r.contract != "Admittance";
        if let Some(shield) = r.get("shield_over_largest") {
            assert!(shield <= if soil { 0.03 } else { 0.02 }, "{what}: shield {shield}");
        }
        assert!(r.at("radiated_difference").abs() <= 0.01, "{what}: radiated fraction");
        if r.station.starts_with("end-fed") && r.station.contains("without counterpoise") {
            assert!(r.at("unknowns") <= 150.0, "{what}: {} unknowns", r.at("unknowns"));
        }
    }
}

/// Shares of the stated over the true error, resistance and reactance together.
fn stated_over_true(rows: &[Row]) -> Vec<f64> {
    let mut out = Vec::new();
    for r in rows {
        // the finest mesh still carries a sixteenth of the error or so: it can be blamed for a tenth of the difference
        let mut push =
            |stated: f64, fine: f64, plain: f64| out.push(stated / (plain - fine).abs().max(1e-6 * fine.abs()));
        push(r.at("stated_r_ohm"), r.at("r_x4_ohm"), r.at("r_ohm"));
        push(r.at("stated_x_ohm"), r.at("x_x4_ohm"), r.at("x_ohm"));
    }
    out.sort_by(f64::total_cmp);
    out
}

#[test]
fn the_stated_error_covers_the_true_one_and_is_not_far_too_large() {
    let ratios = stated_over_true(&table());
    let covered = ratios.iter().filter(|r| **r >= 1.0).count() as f64 / ratios.len() as f64;
    let median = ratios[ratios.len() / 2];
    assert!(covered >= 0.9, "covered {covered}");
    assert!(median <= 5.0, "median {median}");
}

#[test]
fn rows_computed_afresh_agree_with_the_table() {
    let rows = table();
    let chosen = [
        "dipole 0.5 wavelengths, radius 1 mm",
        "T junction",
        "end-fed, perfect earth, two chokes",
        "dipole 0.05 m over pasture",
    ];
    for case in all().iter().filter(|c| chosen.contains(&c.name.as_str())) {
        agrees(case, &rows);
    }
}

fn agrees(case: &Case, rows: &[Row]) {
    for fresh in refine(case, &[1.0, 2.0]) {
        let row = rows
            .iter()
            .find(|r| r.station == fresh.station && (r.at("frequency_mhz") - fresh.frequency_mhz).abs() < 1e-9)
            .unwrap();
        for (k, names) in [("r_ohm", "x_ohm"), ("r_x2_ohm", "x_x2_ohm")].iter().enumerate() {
            let z = num_complex::Complex64::new(row.at(names.0), row.at(names.1));
            let difference = (z - fresh.feed_ohm[k]).norm() / z.norm();
            assert!(difference < 1e-4, "{} at {} MHz: {difference:e}", fresh.station, fresh.frequency_mhz);
        }
        assert_eq!(row.at("unknowns"), fresh.unknowns[0] as f64, "{}", fresh.station);
        assert!(fresh.contract == Contract::Impedance || fresh.over_allowed() <= 1.0);
    }
}
