//! The worst edge of a band and the worst variant, in one quantity.

use super::bands::Group;
use crate::outcome::{FrequencyOutcome, Prediction};

/// Which way a quantity gets worse.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Worse {
    Larger,
    Smaller,
}

impl Worse {
    /// A number that is larger the worse the value.
    fn badness(self, value: f64) -> f64 {
        match self {
            Self::Larger => value,
            Self::Smaller => -value,
        }
    }
}

/// A band in one quantity.
pub(super) struct Case<'a> {
    /// The station as written, at its worst edge.
    pub(super) nominal: Option<&'a FrequencyOutcome>,
    /// The worst variant and its frequency, where it is worse than nominal by more than half a percent.
    pub(super) worst: Option<(&'a str, &'a FrequencyOutcome)>,
}

/// Looks for the worst frequency of a group. Frequencies without the quantity are passed over; one that is not a number
/// counts as the worst.
pub(super) fn worst_of<'a>(
    prediction: &'a Prediction,
    group: &Group,
    rank: &dyn Fn(&FrequencyOutcome) -> Option<f64>,
    worse: Worse,
) -> Case<'a> {
    let badness = |f: &FrequencyOutcome| rank(f).map(|v| worse.badness(v));
    let among = |frequencies: &'a [FrequencyOutcome]| {
        let members = group.members.iter().filter_map(|i| frequencies.get(*i));
        let ranked = members.filter_map(|f| badness(f).map(|b| (b, f)));
        ranked.max_by(|a, b| a.0.total_cmp(&b.0))
    };
    let nominal = among(&prediction.frequencies);
    let variants =
        prediction.variants.iter().filter_map(|v| among(&v.frequencies).map(|(b, f)| (b, v.name.as_str(), f)));
    let worst = variants.max_by(|a, b| a.0.total_cmp(&b.0));
    let noticeable = |bad: f64| nominal.is_none_or(|(base, _)| bad > base + 0.005 * base.abs());
    Case {
        nominal: nominal.map(|(_, f)| f),
        worst: worst.filter(|(bad, _, _)| noticeable(*bad)).map(|(_, name, f)| (name, f)),
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::output::{bands, sample};

    #[test]
    fn the_worst_edge_is_found_and_a_better_variant_is_not_called_worst() {
        let prediction = sample::prediction();
        let group = &bands::of_outcomes(&prediction.frequencies)[1];
        let current = |f: &FrequencyOutcome| f.shield.as_ref().map(|s| s.largest_current_a);
        let case = worst_of(&prediction, group, &current, Worse::Larger);
        let most = prediction.frequencies[3..6].iter().filter_map(current).fold(0.0, f64::max);
        assert_eq!(current(case.nominal.unwrap()), Some(most));
        assert_eq!(case.worst.unwrap().0, "wet");
        assert!(worst_of(&prediction, group, &current, Worse::Smaller).worst.is_none());
    }
}
