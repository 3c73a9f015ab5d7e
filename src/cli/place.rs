//! `braidwise place`.

use super::flags::{self, Length, StationArgs, drew};
use super::load::{Loaded, load};
use super::progress::watched;
use super::stop::Stop;
use crate::outcome::joint::LengthsOutcome;
use crate::outcome::place::PlaceOutcome;
use crate::output;
use crate::quantity;
use crate::station::Embedded;
use crate::study::cut::variants_of;
use crate::study::{Candidate, PlaceFailure, PlaceOptions, Watch, place_over_lengths, place_watched};
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
    /// Distance between the places tried [default: 1 cm, and 5 cm where --lengths has them tried on every length]
    #[arg(long, value_name = "LENGTH", allow_hyphen_values = true)]
    step: Option<String>,
    /// Try these lengths of the coax too, and choose length and place together, e.g. "5 m .. 25 m by 0.5 m"
    #[arg(long, value_name = "RANGE", allow_hyphen_values = true)]
    lengths: Option<String>,
    /// A candidate's resistance, e.g. "2 kohm" (repeatable); without any, and without chokes in the file, 0.5 to 10 kohm
    #[arg(long = "impedance", value_name = "RESISTANCE", allow_hyphen_values = true)]
    impedances: Vec<String>,
    /// A choke of the file that stays where it is, while the others are candidates (repeatable)
    #[arg(long = "keep", value_name = "NAME")]
    keep: Vec<String>,
    /// Write every value at the length in the file as CSV
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
    /// Draw the maps into a folder (SVG and PNG)
    #[arg(long, value_name = "DIR")]
    plots: Option<PathBuf>,
    /// Units of length in the text
    #[arg(long, value_enum, default_value_t)]
    units: Length,
}

/// Distance between places on one length, m.
const STEP_M: f64 = 0.01;
/// Distance between places where every length has them, m: as far as a hand may set a choke beside the mark.
const STEP_OVER_LENGTHS_M: f64 = 0.05;

impl Place {
    pub(super) fn run(&self) -> Result<(), Stop> {
        let options = self.options(STEP_M)?;
        let range = self
            .lengths
            .as_deref()
            .map(|range| flags::lengths(range).map_err(|e| Stop::Usage(format!("--lengths \"{range}\": {e}"))));
        let range = range.transpose()?;
        let loaded = load(&self.station)?;
        let outcome = watched("steps", |watch| -> Result<PlaceOutcome, Stop> {
            let lengths = range.map(|lengths_m| self.over_lengths(&loaded, &lengths_m, watch)).transpose()?;
            let placed = place_watched(&loaded.layout, &loaded.variants, &options, watch)?;
            Ok(PlaceOutcome { lengths, ..placed })
        })?;
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

    fn over_lengths(&self, loaded: &Loaded, lengths_m: &[f64], watch: &dyn Watch) -> Result<LengthsOutcome, Stop> {
        let stations = variants_of(&loaded.document, &Embedded)?;
        Ok(place_over_lengths(&stations, lengths_m, &self.options(STEP_OVER_LENGTHS_M)?, watch)?)
    }

    fn options(&self, usual_step_m: f64) -> Result<PlaceOptions, Stop> {
        let step_m = match &self.step {
            Some(step) => quantity::length_m(step).map_err(|e| Stop::Usage(format!("--step: {e}")))?,
            None => usual_step_m,
        };
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
        let mut chosen: Vec<Candidate> = Vec::new();
        for candidate in candidates {
            let candidate = candidate?;
            // "2 kohm" and "2000 ohm" are one choke
            if !chosen.contains(&candidate) {
                chosen.push(candidate);
            }
        }
        Ok(PlaceOptions { step_m, candidates: chosen, keep: self.keep.clone(), ..PlaceOptions::default() })
    }
}

impl From<PlaceFailure> for Stop {
    fn from(failure: PlaceFailure) -> Self {
        match failure {
            PlaceFailure::Refused(refused) => Stop::Refused(refused),
            PlaceFailure::Study(failure) => failure.into(),
            _ => Stop::Usage(failure.to_string()),
        }
    }
}
