//! `braidwise predict`.

use super::flags::{Length, StationArgs};
use super::load::{load, references};
use super::stop::Stop;
use crate::layout::{BandEdge, FrequencyPoint};
use crate::mesh::Density;
use crate::outcome::Prediction;
use crate::output;
use crate::quantity;
use crate::study::{Options, pattern, predict_variants};
use clap::Args;
use num_complex::Complex64;
use std::io::Write;
use std::path::PathBuf;

/// Arguments of `predict`.
#[derive(Debug, Args)]
pub(super) struct Predict {
    #[command(flatten)]
    station: StationArgs,
    /// One JSON document on standard output, nothing else
    #[arg(long)]
    json: bool,
    /// Write one row a frequency as CSV
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
    /// Write the impedance at the radio end as Touchstone (.s1p)
    #[arg(long, value_name = "FILE")]
    touchstone: Option<PathBuf>,
    /// Draw the site, the coax and the curves into a folder (SVG and PNG)
    #[arg(long, value_name = "DIR")]
    plots: Option<PathBuf>,
    /// Radiation pattern at the middle of every band (in --json; drawn with --plots)
    #[arg(long)]
    pattern: bool,
    /// Units of length in tables and pictures
    #[arg(long, value_enum, default_value_t)]
    units: Length,
    /// Lowest frequency of a curve instead of the station's own frequencies, e.g. "3 MHz"
    #[arg(long, value_name = "FREQUENCY", requires = "to")]
    from: Option<String>,
    /// Highest frequency of the curve
    #[arg(long, value_name = "FREQUENCY", requires = "from")]
    to: Option<String>,
    /// Points of the curve
    #[arg(long, value_name = "N", default_value_t = 201, requires = "from")]
    points: usize,
    /// Finer (above 1) or coarser mesh, to see how much it matters
    #[arg(long, value_name = "FACTOR", default_value_t = 1.0)]
    density: f64,
}

impl Predict {
    pub(super) fn run(&self) -> Result<(), Stop> {
        if !(0.3..=20.0).contains(&self.density) {
            return Err(Stop::Usage(format!("--density {} is outside 0.3 to 20", self.density)));
        }
        let loaded = load(&self.station)?;
        let options = Options { density: Density { factor: self.density }, frequencies: self.curve()? };
        let mut prediction = predict_variants(&loaded.layout, &loaded.variants, &options)?;
        if self.pattern || self.plots.is_some() {
            for frequency_hz in pattern_frequencies(&prediction) {
                prediction.patterns.push(pattern(&loaded.layout, frequency_hz)?);
            }
        }
        if let Some(path) = &self.csv {
            output::whole_file(path, |w| output::csv::prediction(&prediction, w))?;
        }
        if let Some(path) = &self.touchstone {
            let points: Vec<(f64, Complex64)> = prediction
                .frequencies
                .iter()
                .map(|f| (f.frequency_hz, Complex64::new(f.radio.resistance_ohm, f.radio.reactance_ohm)))
                .collect();
            output::whole_file(path, |w| output::touchstone::s1p(&points, loaded.layout.radio.impedance_ohm, w))?;
        }
        if let Some(folder) = &self.plots {
            let references = references(&loaded.layout);
            let mut drawn =
                output::pictures::write_all_prediction(&prediction, &references, folder, self.units.into())?;
            for pattern in &prediction.patterns {
                drawn.extend(output::pictures::write_pattern(pattern, folder)?);
            }
            for path in drawn {
                eprintln!("drew {}", path.display());
            }
        }
        if self.json {
            let text = serde_json::to_string(&prediction).map_err(|e| Stop::Could(e.to_string()))?;
            writeln!(std::io::stdout().lock(), "{text}")?;
        } else {
            let table = output::table::prediction(&prediction, &references(&loaded.layout), self.units.into());
            writeln!(std::io::stdout().lock(), "{table}")?;
        }
        Ok(())
    }

    /// Equally spaced frequencies where a curve was asked for.
    fn curve(&self) -> Result<Option<Vec<FrequencyPoint>>, Stop> {
        let (Some(from), Some(to)) = (&self.from, &self.to) else { return Ok(None) };
        let read = |text: &String| quantity::frequency_hz(text).map_err(|e| Stop::Usage(e.to_string()));
        let (low, high) = (read(from)?, read(to)?);
        if low >= high || self.points < 2 {
            return Err(Stop::Usage(format!(
                "--from {from} --to {to}: the range is empty or reversed; --points needs 2 or more"
            )));
        }
        let step = (high - low) / (self.points - 1) as f64;
        let point = |n: usize| FrequencyPoint { frequency_hz: low + step * n as f64, band: None, edge: None };
        Ok(Some((0..self.points).map(point).collect()))
    }
}

/// One frequency a band: its middle, or the first that was asked for.
fn pattern_frequencies(prediction: &Prediction) -> Vec<f64> {
    let mut out: Vec<(Option<&str>, f64)> = Vec::new();
    for f in &prediction.frequencies {
        let room = out.len() < 12;
        match out.iter_mut().find(|(band, _)| band.is_some() && *band == f.band.as_deref()) {
            Some(known) if f.edge == Some(BandEdge::Middle) => known.1 = f.frequency_hz,
            Some(_) => {}
            None if f.band.is_some() || room => out.push((f.band.as_deref(), f.frequency_hz)),
            None => {}
        }
    }
    out.into_iter().map(|(_, frequency_hz)| frequency_hz).collect()
}
