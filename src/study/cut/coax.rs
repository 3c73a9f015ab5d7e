//! Lengths of the coax that can be built, for a study that asks something else of each.

use super::lengths::{self, Axis};
use super::{CutFailure, Lengths, MOST_LENGTHS};
use crate::interaction::Extent;
use crate::layout::{Layout, Warning};
use crate::station::{Refused, Station};

/// Lengths of the coax, checked by the rules of a scan.
#[derive(Debug, Clone)]
pub(in crate::study) struct CoaxLengths(Axis);

impl CoaxLengths {
    /// The lengths asked for that can be built in every variant; the rest is warned of.
    ///
    /// # Errors
    /// [`CutFailure`] when there are too many, when none can be built, or when the station cannot be meant.
    pub(in crate::study) fn of(stations: &[(String, Station)], lengths_m: &[f64]) -> Result<Self, CutFailure> {
        if lengths_m.len() > MOST_LENGTHS {
            let asked = lengths_m.len();
            return Err(CutFailure::Question(format!(
                "that is {asked} lengths and {MOST_LENGTHS} are the most; take longer steps"
            )));
        }
        let asked = Lengths { conductor: "coax".to_owned(), lengths_m: lengths_m.to_vec() };
        Ok(Self(lengths::axis(stations, &asked, None)?))
    }

    /// That can be built, m, ascending, at least one.
    pub(in crate::study) fn lengths_m(&self) -> &[f64] {
        &self.0.lengths_m
    }

    /// In the file, m.
    pub(in crate::study) fn present_m(&self) -> f64 {
        self.0.present_m
    }

    /// What was left out and why.
    pub(in crate::study) fn warnings(&self) -> &[Warning] {
        &self.0.warnings
    }

    /// The space that all these lengths take up, one a variant.
    pub(in crate::study) fn extents(&self) -> &[Extent] {
        &self.0.extents
    }

    /// Which end moves, in words.
    pub(in crate::study) fn moving_end(&self, layout: &Layout) -> String {
        self.0.target.moving_end(layout)
    }

    /// A station with its coax at a length.
    ///
    /// # Errors
    /// [`CutFailure::Refused`] when it cannot be built.
    pub(in crate::study) fn place(&self, station: &Station, length_m: f64) -> Result<Layout, CutFailure> {
        let placed = lengths::place(station, &[(&self.0.target, length_m)]);
        Ok(placed.map_err(|faults| Refused { sources: station.sources.clone(), faults })?)
    }
}
