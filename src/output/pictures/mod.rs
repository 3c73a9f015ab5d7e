//! Pictures in black and white: SVG and PNG of each, drawn in rectangular axes with plotters.
//!
//! Takes outcomes; gives files. A picture is first a list of marks ([`drawing`]), so that tests can ask whether texts
//! overlap or leave it, and is then painted by plotters' two backends ([`paint`]) in the font carried in the program.

mod along;
mod axes;
mod drawing;
mod font;
mod paint;
mod placer;
mod site;
mod site_key;
mod site_view;
mod site_wires;
mod symbols;

#[cfg(test)]
mod checks;

use super::OutputError;
use crate::outcome::Prediction;
use crate::output::Units;
use std::path::{Path, PathBuf};

/// Draws every picture of a prediction into a folder, which is made if it is not there.
///
/// # Errors
/// [`OutputError`] of the first picture that could not be drawn or written.
pub fn write_all_prediction(prediction: &Prediction, folder: &Path, units: Units) -> Result<Vec<PathBuf>, OutputError> {
    let mut paths = paint::write_both(&site::drawing(prediction, units)?, folder, "site")?;
    paths.extend(paint::write_both(&along::drawing(prediction)?, folder, "along-the-coax")?);
    Ok(paths)
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::output::sample;

    /// Set `BRAIDWISE_PICTURES` to a folder to look at the pictures of the samples.
    fn folder() -> (PathBuf, Option<tempfile::TempDir>) {
        match std::env::var_os("BRAIDWISE_PICTURES") {
            Some(folder) => (PathBuf::from(folder), None),
            None => {
                let folder = tempfile::tempdir().unwrap();
                (folder.path().to_path_buf(), Some(folder))
            }
        }
    }

    #[test]
    fn every_picture_of_a_prediction_is_written_twice() {
        let (folder, _keep) = folder();
        let paths = write_all_prediction(&sample::prediction(), &folder, Units::Metres).unwrap();
        for path in &paths {
            assert!(std::fs::metadata(path).unwrap().len() > 2_000, "{}", path.display());
        }
    }
}
