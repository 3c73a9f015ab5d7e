//! One station on the default mesh and on finer ones, as a row of the convergence table.

use crate::cases::{Case, Contract};
use braidwise::mesh::Density;
use braidwise::outcome::{FrequencyOutcome, Prediction};
use braidwise::study::{Options, predict};
use num_complex::Complex64;
use std::f64::consts::PI;

/// First line of the table.
pub(crate) const HEADER: &str = "station,contract,frequency_mhz,unknowns,unknowns_x2,unknowns_x4,r_ohm,x_ohm,r_x2_ohm,x_x2_ohm,r_x4_ohm,x_x4_ohm,\
stated_r_ohm,stated_x_ohm,feed_over_allowed,shield_over_largest,radiated_difference\n";

/// One station at one frequency.
#[derive(Debug, Clone)]
pub(crate) struct Row {
    /// Name of the station.
    pub(crate) station: String,
    /// What it must keep.
    pub(crate) contract: Contract,
    /// MHz.
    pub(crate) frequency_mhz: f64,
    /// Unknowns at each density.
    pub(crate) unknowns: Vec<usize>,
    /// Feed impedance at each density, ohm.
    pub(crate) feed_ohm: Vec<Complex64>,
    /// Stated error of the default mesh, ohm.
    pub(crate) stated_ohm: (f64, f64),
    /// Difference of the shield currents of the default and the finest mesh over their largest, for equal power (for 1 A over soil).
    pub(crate) shield: Option<f64>,
    /// Difference of the radiated fractions.
    pub(crate) radiated: f64,
}

/// The station at each density.
pub(crate) fn refine(case: &Case, factors: &[f64]) -> Vec<Row> {
    let layout = case.layout();
    let runs: Vec<Prediction> = factors
        .iter()
        .map(|&factor| predict(&layout, &Options { density: Density { factor }, ..Options::default() }).unwrap())
        .collect();
    (0..runs[0].frequencies.len())
        .map(|k| {
            let at: Vec<&FrequencyOutcome> = runs.iter().map(|r| &r.frequencies[k]).collect();
            let last = at[at.len() - 1];
            Row {
                station: case.name.clone(),
                contract: case.contract,
                frequency_mhz: at[0].frequency_hz / 1e6,
                unknowns: runs.iter().map(|r| r.unknowns).collect(),
                feed_ohm: at.iter().map(|f| feed(f)).collect(),
                stated_ohm: (at[0].discretisation.resistance_ohm, at[0].discretisation.reactance_ohm),
                shield: layout.coax.as_ref().map(|c| shield(at[0], last, c.conductor, case.contract)),
                radiated: radiated(at[0]) - radiated(last),
            }
        })
        .collect()
}

fn feed(f: &FrequencyOutcome) -> Complex64 {
    Complex64::new(f.feed.resistance_ohm, f.feed.reactance_ohm)
}

fn radiated(f: &FrequencyOutcome) -> f64 {
    f.power.radiated_w / f.power.input_w
}

/// Largest difference of the shield currents over the largest of the finer mesh.
fn shield(one: &FrequencyOutcome, two: &FrequencyOutcome, conductor: usize, contract: Contract) -> f64 {
    let scale = |f: &FrequencyOutcome| match contract {
        Contract::Admittance => Complex64::from((f.feed.voltage_v * f.feed.current_a.conj()).re.sqrt()),
        _ => f.feed.current_a,
    };
    let points = |f: &FrequencyOutcome, joins: bool| -> Vec<(f64, Complex64)> {
        let s = scale(f);
        let all = f.conductors[conductor].points.iter();
        all.filter(|p| joins || p.side.is_none()).map(|p| (p.distance_m, p.current_a / s)).collect()
    };
    // where it does not jump, at the points of the coarser solution; the finer one has points as dense as its elements near gaps and joins
    let (a, b) = (points(one, false), points(two, true));
    let largest = b.iter().map(|p| p.1.norm()).fold(0.0, f64::max);
    a.iter().map(|p| (p.1 - between(&b, p.0)).norm()).fold(0.0, f64::max) / largest
}

/// Linear interpolation.
fn between(points: &[(f64, Complex64)], x: f64) -> Complex64 {
    let k = points.partition_point(|p| p.0 < x).clamp(1, points.len() - 1);
    let (p, q) = (points[k - 1], points[k]);
    let t = if q.0 > p.0 { (x - p.0) / (q.0 - p.0) } else { 1.0 };
    p.1 * (1.0 - t) + q.1 * t
}

impl Row {
    /// |ΔY| over what is allowed, or its like over soil; at most 1 keeps the contract.
    pub(crate) fn over_allowed(&self) -> f64 {
        let (z, zr) = (self.feed_ohm[0], self.feed_ohm[self.feed_ohm.len() - 1]);
        match self.contract {
            Contract::Admittance => {
                let slack = 2e6 * PI * self.frequency_mhz * 0.1e-12;
                (z.inv() - zr.inv()).norm() / (0.01 / zr.norm() + slack)
            }
            Contract::Reflection => {
                let gamma = |z: Complex64| (z - 2450.0) / (z + 2450.0);
                (gamma(z) - gamma(zr)).norm() / 0.01
            }
            Contract::Impedance => (z - zr).norm() / (0.01 * zr.norm() + 0.5),
        }
    }

    /// True error of the default mesh in resistance and reactance, ohm.
    pub(crate) fn error_ohm(&self) -> (f64, f64) {
        let d = self.feed_ohm[0] - self.feed_ohm[self.feed_ohm.len() - 1];
        (d.re.abs(), d.im.abs())
    }

    /// One line for the terminal.
    pub(crate) fn summary(&self) -> String {
        let e = self.error_ohm();
        format!(
            "{:45} {:6.2} MHz n={:?} Z={:.5}{:+.5}j x4 {:.5}{:+.5}j over={:.3} (x2/x4 {:.3}) shield={:.4} rad={:+.4} true=({:.3},{:.3}) stated=({:.3},{:.3})",
            self.station,
            self.frequency_mhz,
            self.unknowns,
            self.feed_ohm[0].re,
            self.feed_ohm[0].im,
            self.feed_ohm[self.feed_ohm.len() - 1].re,
            self.feed_ohm[self.feed_ohm.len() - 1].im,
            self.over_allowed(),
            Row { feed_ohm: self.feed_ohm[1..].to_vec(), ..self.clone() }.over_allowed(),
            self.shield.unwrap_or(0.0),
            self.radiated,
            e.0,
            e.1,
            self.stated_ohm.0,
            self.stated_ohm.1
        )
    }

    /// One line of the table.
    pub(crate) fn csv(&self) -> String {
        let z: Vec<String> = self.feed_ohm.iter().map(|z| format!("{:.5},{:.5}", z.re, z.im)).collect();
        let n: Vec<String> = self.unknowns.iter().map(ToString::to_string).collect();
        format!(
            "\"{}\",{:?},{},{},{},{:.5},{:.5},{:.4},{},{:.5}\n",
            self.station,
            self.contract,
            self.frequency_mhz,
            n.join(","),
            z.join(","),
            self.stated_ohm.0,
            self.stated_ohm.1,
            self.over_allowed(),
            self.shield.map_or(String::new(), |s| format!("{s:.5}")),
            self.radiated
        )
    }
}
