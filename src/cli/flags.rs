//! Flags that several commands share.

use crate::output::Units;
use crate::quantity::length_m;
use crate::study::cut::MOST_LENGTHS;
use clap::{Args, ValueEnum};
use std::path::PathBuf;

/// The station and changes to it.
#[derive(Debug, Args)]
pub(super) struct StationArgs {
    /// The station file (TOML)
    pub(super) file: PathBuf,
    /// Try a value without editing the file, e.g. --set 'coax.length=12 m' (repeatable)
    #[arg(long = "set", value_name = "PATH=VALUE")]
    pub(super) sets: Vec<String>,
}

/// Units of length in what a person reads.
#[derive(Debug, Clone, Copy, ValueEnum, Default)]
pub(super) enum Length {
    /// Metres
    #[default]
    M,
    /// Feet
    Ft,
}

impl From<Length> for Units {
    fn from(length: Length) -> Self {
        match length {
            Length::M => Units::Metres,
            Length::Ft => Units::Feet,
        }
    }
}

/// Say on standard error which pictures were drawn.
pub(super) fn drew(paths: Vec<PathBuf>) {
    for path in paths {
        eprintln!("drew {}", path.display());
    }
}

/// "4 m .. 25 m by 0.5 m" as lengths in metres, both ends included where the steps reach them.
pub(super) fn lengths(range: &str) -> Result<Vec<f64>, String> {
    let shape = "write it as \"4 m .. 25 m by 0.5 m\"";
    let (from, rest) = range.split_once("..").ok_or_else(|| format!("this is no range; {shape}"))?;
    let (to, step) = rest.split_once("by").ok_or_else(|| format!("the step is missing; {shape}"))?;
    let read = |text: &str| length_m(text.trim()).map_err(|e| e.to_string());
    let (from, to, step) = (read(from)?, read(to)?, read(step)?);
    if step <= 0.0 {
        return Err("the step must be longer than zero".to_owned());
    }
    if from <= 0.0 {
        return Err("a length must be longer than zero".to_owned());
    }
    if to < from {
        return Err(format!("the range is reversed; write the shorter length first: {shape}"));
    }
    let steps = ((to - from) / step + 1e-9).floor();
    if steps >= MOST_LENGTHS as f64 {
        return Err(format!("that is {steps} lengths and {MOST_LENGTHS} are the most; take longer steps"));
    }
    // to the micrometre, so that 10 + 3 × 0.1 reads 10.3
    let at = |n: usize| ((from + step * n as f64) * 1e6).round() / 1e6;
    Ok((0..=steps as usize).map(at).collect())
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    #[test]
    fn ranges_are_read_and_bad_ones_say_why() {
        assert_eq!(lengths("10 m .. 10.4 m by 10 cm").unwrap(), [10.0, 10.1, 10.2, 10.3, 10.4]);
        assert_eq!(lengths("10 ft .. 12 ft by 1 ft").unwrap(), [3.048, 3.3528, 3.6576]);
        for (bad, says) in [
            ("25 m .. 4 m by 1 m", "reversed"),
            ("4 m .. 25 m by 0 m", "step"),
            ("4 m .. 25 m", "step is missing"),
            ("4 m to 25 m by 1 m", "no range"),
            ("0 m .. 25 m by 1 m", "longer than zero"),
            ("4 m .. 25 m by 1 mHz", "length"),
            ("4 m .. 25 m by 1 um", ""),
        ] {
            let error = lengths(bad).unwrap_err();
            assert!(error.contains(says), "{bad}: {error}");
        }
    }
}
