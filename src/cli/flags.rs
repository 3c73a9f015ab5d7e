//! Flags that several commands share.

use crate::output::Units;
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
