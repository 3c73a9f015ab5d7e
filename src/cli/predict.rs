//! `braidwise predict`.

use super::flags::{Length, StationArgs, drew};
use super::load::{load, references};
use super::progress::watched;
use super::stop::Stop;
use crate::layout::{BandEdge, FrequencyPoint, Layout};
use crate::mesh::Density;
use crate::outcome::Prediction;
use crate::outcome::curve::InterpolatedCurve;
use crate::output;
use crate::quantity;
use crate::study::curve::{CurveOptions, PortCurve, bands, of_bands_watched, spaced};
use crate::study::{Failure, Options, Watch, pattern, predict_variants_watched};
use clap::Args;
use num_complex::Complex64;
use serde::Serialize;
use std::io::Write;
use std::path::PathBuf;

/// Points of a curve over a range.
const CURVE_POINTS: usize = 541;
/// Points of a curve over a band.
const BAND_POINTS: usize = 41;

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
    /// Draw the site, the coax and the match through each band into a folder (SVG and PNG)
    #[arg(long, value_name = "DIR")]
    plots: Option<PathBuf>,
    /// Radiation pattern at the middle of every band (in --json; drawn with --plots)
    #[arg(long)]
    pattern: bool,
    /// Units of length in tables and pictures
    #[arg(long, value_enum, default_value_t)]
    units: Length,
    /// Lowest frequency of a curve instead of the station's own frequencies, e.g. "3 MHz"
    #[arg(long, value_name = "FREQUENCY", requires = "to", conflicts_with = "curve", allow_hyphen_values = true)]
    from: Option<String>,
    /// Highest frequency of the curve
    #[arg(long, value_name = "FREQUENCY", requires = "from", allow_hyphen_values = true)]
    to: Option<String>,
    /// Frequencies of the range to solve in full beside the curve, equally spaced
    #[arg(long, value_name = "N", default_value_t = 21, requires = "from")]
    points: usize,
    /// Add a curve through each of the station's bands (--plots draws it without this)
    #[arg(long)]
    curve: bool,
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
        let range = self.range()?;
        let density = Density { factor: self.density };
        let options = Options { density, frequencies: range.map(|(low, high)| full(low, high, self.points)) };
        let (prediction, curve) = watched("steps", |watch| -> Result<_, Failure> {
            let mut prediction = predict_variants_watched(&loaded.layout, &loaded.variants, &options, watch)?;
            if self.pattern {
                for frequency_hz in pattern_frequencies(&prediction) {
                    if watch.stop() {
                        return Err(Failure::Stopped);
                    }
                    prediction.patterns.push(pattern(&loaded.layout, frequency_hz)?);
                }
            }
            Ok((prediction, self.curve(&loaded.layout, range, watch)?))
        })?;
        // what pictures need beyond what was asked for is theirs alone
        let asked = curve.as_ref().filter(|_| self.curve || range.is_some());
        if let Some(path) = &self.csv {
            output::whole_file(path, |w| output::csv::prediction(&prediction, w))?;
        }
        if let Some(path) = &self.touchstone {
            let points = at_the_radio(&prediction, asked);
            output::whole_file(path, |w| output::touchstone::s1p(&points, loaded.layout.radio.impedance_ohm, w))?;
        }
        if let Some(folder) = &self.plots {
            let references = references(&loaded.layout);
            let along = curve.as_ref().map(|c| &c.curve);
            let units = self.units.into();
            let mut drawn = output::pictures::write_all_prediction(&prediction, along, &references, folder, units)?;
            for pattern in &prediction.patterns {
                drawn.extend(output::pictures::write_pattern(pattern, folder)?);
            }
            drew(drawn);
        }
        if self.json {
            let document = Document { prediction: &prediction, curve: asked };
            let text = serde_json::to_string(&document).map_err(|e| Stop::Could(e.to_string()))?;
            writeln!(std::io::stdout().lock(), "{text}")?;
        } else {
            let table = output::table::prediction(&prediction, &references(&loaded.layout), self.units.into());
            let mut out = std::io::stdout().lock();
            writeln!(out, "{table}")?;
            if let Some(curve) = asked {
                writeln!(out, "\n{}", of_the_curve(curve))?;
            }
        }
        Ok(())
    }

    /// The interpolated curve where one was asked for or is drawn.
    fn curve(
        &self,
        layout: &Layout,
        range: Option<(f64, f64)>,
        watch: &dyn Watch,
    ) -> Result<Option<InterpolatedCurve>, Failure> {
        let options = CurveOptions { density: Density { factor: self.density }, ..CurveOptions::default() };
        Ok(match range {
            Some((low, high)) => {
                let curve = PortCurve::watched(layout, (low, high), options, watch)?;
                Some(curve.outcome(&spaced(low, high, CURVE_POINTS))?)
            }
            None if self.curve || (self.plots.is_some() && !bands(layout).is_empty()) => {
                Some(of_bands_watched(layout, BAND_POINTS, options, watch)?)
            }
            None => None,
        })
    }

    /// Ends of the range where a curve was asked for, Hz.
    fn range(&self) -> Result<Option<(f64, f64)>, Stop> {
        let (Some(from), Some(to)) = (&self.from, &self.to) else { return Ok(None) };
        let read = |text: &String| quantity::frequency_hz(text).map_err(|e| Stop::Usage(e.to_string()));
        let (low, high) = (read(from)?, read(to)?);
        if low <= 0.0 || low >= high || self.points < 2 {
            return Err(Stop::Usage(format!(
                "--from {from} --to {to}: the range is empty or reversed; --points needs 2 or more"
            )));
        }
        Ok(Some((low, high)))
    }
}

/// What `--json` prints: the prediction, and the curve where one was asked for.
#[derive(Serialize)]
struct Document<'a> {
    #[serde(flatten)]
    prediction: &'a Prediction,
    #[serde(skip_serializing_if = "Option::is_none")]
    curve: Option<&'a InterpolatedCurve>,
}

fn full(low_hz: f64, high_hz: f64, points: usize) -> Vec<FrequencyPoint> {
    let point = |frequency_hz| FrequencyPoint { frequency_hz, band: None, edge: None };
    spaced(low_hz, high_hz, points).into_iter().map(point).collect()
}

/// What the radio sees: along the curve where there is one, else at the frequencies solved.
fn at_the_radio(prediction: &Prediction, curve: Option<&InterpolatedCurve>) -> Vec<(f64, Complex64)> {
    match curve {
        Some(curve) => curve.curve.points.iter().map(|p| (p.frequency_hz, p.radio_ohm)).collect(),
        None => {
            let solved = prediction.frequencies.iter();
            solved.map(|f| (f.frequency_hz, Complex64::new(f.radio.resistance_ohm, f.radio.reactance_ohm))).collect()
        }
    }
}

/// One line on how the curve was made and how far it can be trusted.
fn of_the_curve(curve: &InterpolatedCurve) -> String {
    let points = &curve.curve.points;
    let ends =
        points.first().zip(points.last()).map_or((0.0, 0.0), |(a, b)| (a.frequency_hz / 1e6, b.frequency_hz / 1e6));
    let short = if curve.converged { "" } else { "; the solves ran out before it was met, so take a shorter range" };
    format!(
        "Curve from {:.4} to {:.4} MHz: interpolated from {} solves, largest error estimated at {:.2} % ({:.2} % aimed at{short})",
        ends.0,
        ends.1,
        curve.solves,
        100.0 * curve.error_estimate,
        100.0 * curve.tolerance,
    )
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
