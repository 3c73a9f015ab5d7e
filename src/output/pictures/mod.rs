//! Pictures in black and white: SVG and PNG of each, drawn in rectangular axes with plotters.
//!
//! Takes outcomes; gives files. A picture is first a list of marks (`drawing`), so that tests can ask whether texts
//! overlap or leave it, and is then painted by plotters' two backends (`paint`) in the font carried in the program.

mod along;
mod axes;
mod curve;
mod drawing;
mod font;
mod joint_maps;
mod length_curves;
mod map;
mod paint;
mod pattern;
mod place_choice;
mod place_maps;
mod placer;
mod site;
mod site_key;
mod site_view;
mod site_wires;
mod symbols;

#[cfg(test)]
mod checks;
#[cfg(test)]
mod hard_cases;

use super::OutputError;
use crate::outcome::Prediction;
use crate::outcome::curve::{CurveBand, CurveOutcome, CurvePoint};
use crate::outcome::cut::CutOutcome;
use crate::outcome::pattern::PatternOutcome;
use crate::outcome::place::PlaceOutcome;
use crate::output::{References, Units};
use std::path::{Path, PathBuf};

/// Stretches beside each other in the picture of the match at most, single frequencies among them.
const MOST_STRETCHES: usize = 12;

/// Draws every picture of a prediction into a folder, which is made if it is not there: the site, current and voltage along
/// the coax (where there is one), impedance and match over `curve`, and over the predicted frequencies where it has nothing.
///
/// # Errors
/// [`OutputError`] of the first picture that could not be drawn or written.
pub fn write_all_prediction(
    prediction: &Prediction,
    curve: Option<&CurveOutcome>,
    references: &References,
    folder: &Path,
    units: Units,
) -> Result<Vec<PathBuf>, OutputError> {
    let mut paths = write(folder, "site", &site::drawing(prediction, units)?)?;
    if prediction.frequencies.iter().any(|f| f.shield.is_some()) {
        paths.extend(write(folder, "along-the-coax", &along::drawing(prediction)?)?);
    }
    let limit = references.limits.map(|l| l.swr);
    let predicted = CurveOutcome::of(prediction, references.radio_impedance_ohm, limit);
    paths.extend(write_curve(&matched(predicted, curve), folder)?);
    Ok(paths)
}

/// What is drawn of the match: the curve, or else the predicted frequencies; predicted frequencies outside all bands stand
/// alone, because a line between them would be made up.
fn matched(predicted: CurveOutcome, curve: Option<&CurveOutcome>) -> CurveOutcome {
    let mut drawn = curve.unwrap_or(&predicted).clone();
    let banded =
        |p: &CurvePoint, bands: &[CurveBand]| bands.iter().any(|b| (b.from_hz..=b.to_hz).contains(&p.frequency_hz));
    let runs_on = curve.is_some_and(|c| !c.points.iter().all(|p| banded(p, &c.bands)));
    let mut single = predicted.points.clone();
    single.retain(|p| !banded(p, &drawn.bands));
    if runs_on || drawn.bands.len() + single.len() > MOST_STRETCHES {
        return drawn;
    }
    let alone = |p: &CurvePoint| CurveBand { name: String::new(), from_hz: p.frequency_hz, to_hz: p.frequency_hz };
    drawn.bands.extend(single.iter().map(alone));
    drawn.bands.sort_by(|a, b| a.from_hz.total_cmp(&b.from_hz));
    drawn.points.extend(single.iter().filter(|_| curve.is_some()));
    drawn.points.sort_by(|a, b| a.frequency_hz.total_cmp(&b.frequency_hz));
    drawn
}

/// Draws impedance and standing-wave ratio against frequency ("match").
///
/// # Errors
/// [`OutputError`] when there is no point or the files cannot be written.
pub fn write_curve(curve: &CurveOutcome, folder: &Path) -> Result<Vec<PathBuf>, OutputError> {
    write(folder, "match", &curve::drawing(curve)?)
}

/// Draws a radiation pattern ("pattern-14.175-MHz").
///
/// # Errors
/// [`OutputError`] when there is no cut or the files cannot be written.
pub fn write_pattern(pattern: &PatternOutcome, folder: &Path) -> Result<Vec<PathBuf>, OutputError> {
    let name = format!("pattern-{}-MHz", super::figures::megahertz(pattern.frequency_hz));
    write(folder, &name, &pattern::drawing(pattern)?)
}

/// Draws every picture of a placement study into a folder; where the length of the coax was free, the joint maps of length and place too.
///
/// # Errors
/// [`OutputError`] when the arrays do not fit their axes or the files cannot be written.
pub fn write_all_place(place: &PlaceOutcome, folder: &Path) -> Result<Vec<PathBuf>, OutputError> {
    let mut paths = write(folder, "choice", &place_choice::drawing(place)?)?;
    for (index, choke) in place.chokes.iter().enumerate() {
        let name = format!("shield-current-{}", file_name(&choke.name));
        paths.extend(write(folder, &name, &place_maps::current(place, index)?)?);
    }
    let picked = place.picks.first().and_then(|p| place.chokes.iter().position(|c| c.name == p.choke)).unwrap_or(0);
    paths.extend(write(folder, "volts", &place_maps::volts(place, picked)?)?);
    paths.extend(write(folder, "watts", &place_maps::watts(place, picked)?)?);
    if place.lengths.as_ref().is_some_and(|l| l.lengths_m.len() > 1 && l.places_m.len() > 1) {
        for (index, choke) in place.chokes.iter().enumerate() {
            let name = format!("length-and-place-{}", file_name(&choke.name));
            paths.extend(write(folder, &name, &joint_maps::length_by_place(place, index)?)?);
        }
    }
    Ok(paths)
}

/// Draws every picture of a length study into a folder: curves over one length, a map over two.
///
/// # Errors
/// [`OutputError`] when there is nothing to draw or the files cannot be written.
pub fn write_all_cut(cut: &CutOutcome, folder: &Path) -> Result<Vec<PathBuf>, OutputError> {
    if cut.second_lengths_m.is_some() {
        return write(folder, "two-lengths", &joint_maps::lengths(cut)?);
    }
    let mut paths = Vec::new();
    for (index, drawing) in length_curves::drawings(cut)?.iter().enumerate() {
        let name = if index == 0 { "length".to_string() } else { format!("length-{}", index + 1) };
        paths.extend(write(folder, &name, drawing)?);
    }
    Ok(paths)
}

/// A name that every file system takes.
fn file_name(name: &str) -> String {
    name.chars().map(|c| if c.is_alphanumeric() || c == '.' { c } else { '-' }).collect()
}

fn write(folder: &Path, name: &str, drawing: &drawing::Drawing) -> Result<Vec<PathBuf>, OutputError> {
    std::fs::create_dir_all(folder).map_err(|source| OutputError::File { path: folder.to_path_buf(), source })?;
    paint::write_both(drawing, folder, name)
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::output::{sample, sample_studies};

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
    fn every_picture_of_a_placement_is_written_twice() {
        let (folder, _keep) = folder();
        let paths = write_all_place(&sample_studies::place(), &folder.join("place")).unwrap();
        assert_eq!(paths.len(), 12);
    }

    #[test]
    fn every_picture_of_lengths_is_written_twice() {
        let (folder, _keep) = folder();
        let folder = folder.join("cut");
        let mut paths = write_all_cut(&sample_studies::cut(), &folder).unwrap();
        paths.extend(write_all_cut(&sample_studies::cut_two(), &folder).unwrap());
        assert_eq!(paths.len(), 4);
        paths = write_all_place(&sample_studies::joint(), &folder.join("joint")).unwrap();
        assert_eq!(paths.len(), 12 + 6);
    }

    #[test]
    fn the_match_follows_the_curve_and_keeps_frequencies_of_their_own() {
        let mut prediction = sample::prediction();
        for frequency in &mut prediction.frequencies[..3] {
            (frequency.band, frequency.edge) = (None, None);
        }
        let of = |curve: Option<&CurveOutcome>| matched(CurveOutcome::of(&prediction, 50.0, None), curve);
        let predicted = of(None);
        assert_eq!((predicted.bands.len(), predicted.points.len()), (4 + 3, 15));
        checks::texts_are_clear(&curve::drawing(&predicted).unwrap());
        let mut through = CurveOutcome::of(&prediction, 50.0, None);
        let bands = through.bands.clone();
        through.points.retain(|p| bands.iter().any(|b| (b.from_hz..=b.to_hz).contains(&p.frequency_hz)));
        let between: Vec<_> = through.bands.iter().map(|b| 0.3 * b.from_hz + 0.7 * b.to_hz).collect();
        let like = through.points[0];
        through.points.extend(between.iter().map(|hz| CurvePoint { frequency_hz: *hz, ..like }));
        through.points.sort_by(|a, b| a.frequency_hz.total_cmp(&b.frequency_hz));
        let drawn = of(Some(&through));
        assert_eq!((drawn.bands.len(), drawn.points.len()), (4 + 3, 12 + 4 + 3));
        assert!(between.iter().all(|hz| drawn.points.iter().any(|p| p.frequency_hz == *hz)));
        checks::texts_are_clear(&curve::drawing(&drawn).unwrap());
        assert_eq!(of(Some(&sample::curve())), sample::curve(), "a whole run is left as it is");
    }

    #[test]
    fn every_picture_of_a_prediction_is_written_twice() {
        let (folder, _keep) = folder();
        let references = References { impedance_ratio: Some(49.0), ..References::default() };
        let mut paths = write_all_prediction(&sample::prediction(), None, &references, &folder, Units::Metres).unwrap();
        paths.extend(write_curve(&sample::curve(), &folder.join("run")).unwrap());
        paths.extend(write_pattern(&sample::pattern(), &folder).unwrap());
        assert_eq!(paths.len(), 10);
        for path in &paths {
            assert!(std::fs::metadata(path).unwrap().len() > 2_000, "{}", path.display());
        }
    }
}
