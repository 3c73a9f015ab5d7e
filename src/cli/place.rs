//! `braidwise place`.

use super::flags::StationArgs;
use super::load::load;
use super::stop::Stop;
use crate::layout::Layout;
use crate::outcome::place::{PlaceOutcome, PlaceVerdict};
use crate::quantity;
use crate::study::{Candidate, PlaceFailure, PlaceOptions, place};
use clap::Args;
use std::io::Write;

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
}

impl Place {
    pub(super) fn run(&self) -> Result<(), Stop> {
        let options = self.options()?;
        let loaded = load(&self.station)?;
        let variants: Vec<(String, Layout)> = Vec::new();
        let outcome = place(&loaded.layout, &variants, &options)?;
        let mut out = std::io::stdout().lock();
        if self.json {
            serde_json::to_writer(&mut out, &outcome).map_err(|e| Stop::Could(e.to_string()))?;
            writeln!(out)?;
        } else {
            write!(out, "{}", verdict(&outcome))?;
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

/// The answer in a few lines.
fn verdict(outcome: &PlaceOutcome) -> String {
    let said = match outcome.verdict {
        PlaceVerdict::NoneNeeded => "No choke is needed".to_string(),
        PlaceVerdict::Place => format!("Put the {} choke", outcome.picks.first().map_or("first", |p| &p.choke)),
        PlaceVerdict::NoPlace => "No place meets the limits".to_string(),
    };
    let mut text = format!("{}\n\n{said}: {}\n", outcome.station, outcome.why);
    for (n, pick) in outcome.picks.iter().enumerate() {
        text.push_str(&format!("{}. {} at {:.2} m; {}\n", n + 1, pick.choke, pick.at_m, pick.why));
    }
    if !outcome.clamp.is_empty() {
        text.push_str("\nTo verify, clamp a current meter round the coax and expect (RMS, at the operating power):\n");
    }
    for clamp in &outcome.clamp {
        text.push_str(&format!(
            "  {:8.4} MHz at {:.1} m: {:.0} mA ({:.0} to {:.0} mA)\n",
            clamp.frequency_hz / 1e6,
            clamp.at_m,
            1e3 * clamp.current_a,
            1e3 * clamp.range_a[0],
            1e3 * clamp.range_a[1]
        ));
    }
    for warning in &outcome.warnings {
        text.push_str(&format!("\nwarning: {}: {}\n", warning.about, warning.message));
    }
    text.push_str(
        "\nA choke never replaces a bond: bonds, rods and protective conductors stay as they are, and the choke goes around them.\n\
         High voltage stands at the ends of the wire, at the feed point and across the choke whenever you transmit; a choke that \
         takes power gets hot.\n\
         Local electrical codes, licensed practice and a measured survey decide, not this program.\n",
    );
    text
}
