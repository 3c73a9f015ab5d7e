//! Tables, files and pictures for the person at the site.
//!
//! Takes the plain results of [`crate::outcome`] and nothing else; gives text for the terminal, CSV, Touchstone, SVG and PNG.
//! Computes no physics: what is not in an outcome is not shown. Every file is written whole or not at all.
//! Neighbours: [`crate::study`] fills the outcomes, [`crate::cli`] decides what is written where.

pub mod csv;
pub mod cut_text;
pub mod pictures;
pub mod place_text;
pub mod table;
pub mod touchstone;
pub mod vary;

mod bands;
mod cautions;
mod csv_studies;
mod figures;
mod lengths_text;
mod whole;
mod worst;

#[cfg(test)]
pub(crate) mod sample;
#[cfg(test)]
pub(crate) mod sample_studies;

use crate::outcome::place::LimitsOutcome;
use std::io::Write;
use std::path::{Path, PathBuf};

/// Units of length in what a person reads. Files and JSON are always in metres.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Units {
    /// Metres.
    #[default]
    Metres,
    /// Feet, decimal.
    Feet,
}

/// What results are measured against, known from the station but not part of its results.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct References {
    /// Reference of the standing-wave ratio, ohm.
    pub radio_impedance_ohm: f64,
    /// Impedance ratio of the transformer, antenna side over radio side; `None` without one.
    pub impedance_ratio: Option<f64>,
    /// Limits to mark in tables and pictures, where there are any.
    pub limits: Option<LimitsOutcome>,
}

impl Default for References {
    fn default() -> Self {
        Self { radio_impedance_ohm: 50.0, impedance_ratio: None, limits: None }
    }
}

/// Why something could not be written.
#[derive(Debug, thiserror::Error)]
pub enum OutputError {
    /// The disk refused.
    #[error("cannot write {}: {source}; check that the folder exists, that you may write there and that the disk is not full", path.display())]
    File {
        /// What was to be written.
        path: PathBuf,
        /// The reason.
        source: std::io::Error,
    },
    /// A stream refused.
    #[error("cannot write the result: {0}")]
    Stream(#[from] std::io::Error),
    /// A row could not be written.
    #[error("cannot write the table: {0}")]
    Rows(#[from] ::csv::Error),
    /// The picture could not be drawn.
    #[error("cannot draw {what}: {reason}")]
    Picture {
        /// Which picture.
        what: String,
        /// The reason.
        reason: String,
    },
    /// There is nothing to draw or write.
    #[error("{what} needs {needs}, and this result has none")]
    Nothing {
        /// Which picture or file.
        what: String,
        /// What is missing.
        needs: String,
    },
    /// Two parts of a result do not fit each other.
    #[error("{what}: {reason}")]
    Misfit {
        /// Which array.
        what: String,
        /// The reason.
        reason: String,
    },
}

/// Writes a file whole or not at all: `fill` gets a temporary file of the same folder, which takes the file's place at the end.
///
/// # Errors
/// What `fill` returns, or [`OutputError::File`] when the folder or the disk refuses.
pub fn whole_file(
    path: &Path,
    fill: impl FnOnce(&mut dyn Write) -> Result<(), OutputError>,
) -> Result<(), OutputError> {
    whole::write_with(path, |file| fill(file))
}

/// Removes files that are being written. Only for a process that ends right after: nothing can be written any more.
pub fn remove_unfinished() {
    whole::remove_unfinished();
}
