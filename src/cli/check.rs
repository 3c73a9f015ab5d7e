//! `braidwise check`.

use super::flags::StationArgs;
use super::load::load;
use super::stop::Stop;
use crate::quantity::{engineering, metres_and_feet};
use crate::station;
use clap::Args;
use std::io::Write;
use std::path::PathBuf;

/// Arguments of `check`.
#[derive(Debug, Args)]
pub(super) struct Check {
    /// Station files (TOML)
    #[arg(required_unless_present = "schema")]
    files: Vec<PathBuf>,
    /// Try a value without editing the file (repeatable)
    #[arg(long = "set", value_name = "PATH=VALUE")]
    sets: Vec<String>,
    /// Print the JSON Schema of the station file, for editors that complete and check it
    #[arg(long)]
    schema: bool,
    /// One JSON document on standard output, nothing else
    #[arg(long)]
    json: bool,
}

impl Check {
    pub(super) fn run(&self) -> Result<(), Stop> {
        let mut out = std::io::stdout().lock();
        if self.schema {
            let text = serde_json::to_string_pretty(&station::schema()).map_err(|e| Stop::Could(e.to_string()))?;
            writeln!(out, "{text}")?;
            return Ok(());
        }
        Ok(())
    }
}
