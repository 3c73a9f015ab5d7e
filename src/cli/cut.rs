//! `braidwise cut`.

use super::flags::{Length, StationArgs, drew, lengths};
use super::load::load;
use super::progress::watched;
use super::stop::Stop;
use crate::mesh::Density;
use crate::output;
use crate::quantity::length_m;
use crate::station::Embedded;
use crate::study::cut::{self, CutFailure, Lengths, Method, Question};
use clap::Args;
use std::io::Write;
use std::path::PathBuf;

/// Arguments of `cut`.
#[derive(Debug, Args)]
pub(super) struct Cut {
    #[command(flatten)]
    station: StationArgs,
    /// Whose length is scanned: "coax", a wire or a star of radials by name
    #[arg(long, value_name = "NAME")]
    conductor: String,
    /// Its lengths, e.g. "4 m .. 25 m by 0.5 m" or "41 ft .. 66 ft by 1 ft"
    #[arg(long, value_name = "RANGE", allow_hyphen_values = true)]
    range: String,
    /// A second conductor scanned jointly
    #[arg(long, value_name = "NAME", requires = "with_range")]
    with: Option<String>,
    /// The lengths of the second
    #[arg(long, value_name = "RANGE", requires = "with", allow_hyphen_values = true)]
    with_range: Option<String>,
    /// Lengths one can buy, e.g. "25, 33, 50 ft"
    #[arg(long, value_name = "LENGTHS", allow_hyphen_values = true)]
    stock: Option<String>,
    /// One JSON document on standard output, nothing else
    #[arg(long)]
    json: bool,
    /// Write every value as CSV
    #[arg(long, value_name = "FILE")]
    csv: Option<PathBuf>,
    /// Draw the scan into a folder (SVG and PNG)
    #[arg(long, value_name = "DIR")]
    plots: Option<PathBuf>,
    /// Units of length in the text
    #[arg(long, value_enum, default_value_t)]
    units: Length,
}

impl Cut {
    pub(super) fn run(&self) -> Result<(), Stop> {
        let question = self.question()?;
        let loaded = load(&self.station)?;
        let stations = cut::variants_of(&loaded.document, &Embedded)?;
        let outcome = watched("steps", |watch| cut::cut_watched(&stations, &question, watch))?;
        if let Some(path) = &self.csv {
            output::whole_file(path, |w| output::csv::cut(&outcome, w))?;
        }
        if let Some(folder) = &self.plots {
            drew(output::pictures::write_all_cut(&outcome, folder)?);
        }
        let text = if self.json {
            serde_json::to_string(&outcome).map_err(|e| Stop::Could(e.to_string()))?
        } else {
            output::cut_text::verdict(&outcome, self.units.into())
        };
        writeln!(std::io::stdout().lock(), "{text}")?;
        Ok(())
    }

    fn question(&self) -> Result<Question, Stop> {
        let lengths = |conductor: &str, range: &str, flag: &str| -> Result<Lengths, Stop> {
            let lengths_m = lengths(range).map_err(|e| Stop::Usage(format!("{flag} \"{range}\": {e}")))?;
            Ok(Lengths { conductor: conductor.to_owned(), lengths_m })
        };
        Ok(Question {
            first: lengths(&self.conductor, &self.range, "--range")?,
            second: match (&self.with, &self.with_range) {
                (Some(name), Some(range)) => Some(lengths(name, range, "--with-range")?),
                _ => None,
            },
            stock: self.stock.as_deref().map_or(Ok(Vec::new()), stock).map_err(Stop::Usage)?,
            method: Method::default(),
            density: Density::default(),
            trim: true,
        })
    }
}

impl From<CutFailure> for Stop {
    fn from(failure: CutFailure) -> Self {
        match failure {
            CutFailure::Question(text) => Stop::Usage(text),
            CutFailure::Refused(refused) => Stop::Refused(refused),
            CutFailure::Solving(failure) => failure.into(),
        }
    }
}

/// "25, 33, 50 ft" as names and metres; a bare number takes the unit of the last.
fn stock(text: &str) -> Result<Vec<(String, f64)>, String> {
    let parts: Vec<&str> = text.split(',').map(str::trim).collect();
    let unit = parts.last().map_or("", |last| last.trim_start_matches(|c: char| c.is_ascii_digit() || c == '.')).trim();
    let read = |part: &&str| {
        let bare = part.parse::<f64>().is_ok() && !unit.is_empty();
        let name = if bare { format!("{part} {unit}") } else { (*part).to_owned() };
        match length_m(&name) {
            Ok(length) if length > 0.0 => Ok((name, length)),
            Ok(_) => Err(format!("--stock \"{part}\": a length must be longer than zero")),
            Err(e) => Err(format!("--stock \"{part}\": {e}")),
        }
    };
    parts.iter().map(read).collect()
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn a_stock_takes_the_unit_of_its_last() {
        let read = stock("25, 33, 50 ft").unwrap();
        assert_eq!(read[0].0, "25 ft");
        assert!((read[1].1 - 33.0 * 0.3048).abs() < 1e-12);
        assert!(stock("25, 33, 50").is_err());
    }
}
