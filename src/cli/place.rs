//! `braidwise place`.

use super::flags::{Length, StationArgs, drew};
use super::load::load;
use super::stop::Stop;
use crate::output;
use crate::quantity;
use crate::study::{Candidate, PlaceFailure, PlaceOptions, place};
use clap::Args;
use std::io::Write;
use std::path::PathBuf;

/// Arguments of `place`.
#[derive(Debug, Args)]
pub(super) struct Place {
    #[command(flatten)]
    station: StationArgs,
    /// One JSON document on standard output, nothing else
    #[arg(long)]
    json: bool,
    /// Distance between the places tried
    #[arg(long, value_name = "LENGTH", default_value = "1 cm")]
    step: String,
    /// A candidate's resistance, e.g. "2 kohm" (repeatable); without any, and without chokes in the file, 0.5 to 10 kohm
    #[arg(long = "impedance", value_name = "RESISTANCE")]
    impedances: Vec<String>,
    /// A choke of the file that stays where it is, while the others are candidates (repeatable)
    #[arg(long = "keep", value_name = "NAME")]
    keep: Vec<String>,
    /// Write every value as CSV
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
    /// Draw the maps into a folder (SVG and PNG)
    #[arg(long, value_name = "DIR")]
    plots: Option<PathBuf>,
    /// Units of length in the text
    #[arg(long, value_enum, default_value_t)]
    units: Length,
}

impl Place {
    pub(super) fn run(&self) -> Result<(), Stop> {
        let options = self.options()?;
        let loaded = load(&self.station)?;
        let outcome = place(&loaded.layout, &loaded.variants, &options)?;
        if let Some(path) = &self.csv {
            output::whole_file(path, |w| output::csv::place(&outcome, w))?;
        }
        if let Some(folder) = &self.plots {
            drew(output::pictures::write_all_place(&outcome, folder)?);
        }
        let mut out = std::io::stdout().lock();
        if self.json {
            serde_json::to_writer(&mut out, &outcome).map_err(|e| Stop::Could(e.to_string()))?;
            writeln!(out)?;
        } else {
            writeln!(out, "{}", output::place_text::verdict(&outcome, self.units.into()))?;
        }
        Ok(())
    }

    fn options(&self) -> Result<PlaceOptions, Stop> {
        let step_m = quantity::length_m(&self.step).map_err(|e| Stop::Usage(format!("--step: {e}")))?;
        let candidates = self.impedances.iter().map(|text| {
            let ohm = quantity::resistance_ohm(text).map_err(|e| Stop::Usage(format!("--impedance: {e}")))?;
            if ohm > 0.0 && ohm.is_finite() {
                Ok(Candidate::resistance(ohm))
            } else {
                Err(Stop::Usage(format!(
                    "--impedance '{text}': a choke has more than 0 ohm; write for example \"2 kohm\""
                )))
            }
        });
        Ok(PlaceOptions {
            step_m,
            candidates: candidates.collect::<Result<_, Stop>>()?,
            keep: self.keep.clone(),
            ..PlaceOptions::default()
        })
    }
}

impl From<PlaceFailure> for Stop {
    fn from(failure: PlaceFailure) -> Self {
        if failure.is_usage() { Stop::Usage(failure.to_string()) } else { Stop::Could(failure.to_string()) }
    }
}
