//! Frequencies gathered into what a person calls one thing: a band with its edges, or a frequency of its own.

use super::figures::megahertz;
use crate::layout::BandEdge;
use crate::outcome::FrequencyOutcome;

/// Single frequencies beyond this number are one curve, not so many columns.
const SINGLE_AT_MOST: usize = 12;

/// Frequencies that belong together, by index.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Group {
    /// "40 m", or the frequency itself.
    pub(super) name: String,
    /// "7 to 7.2 MHz"; empty for one frequency.
    pub(super) span: String,
    /// Indices into the frequencies.
    pub(super) members: Vec<usize>,
}

impl Group {
    /// A run of frequencies that are no band: which one a value belongs to is not said by an edge.
    pub(super) fn is_run(&self) -> bool {
        self.span.is_empty() && self.members.len() > 1
    }
}

/// Groups the frequencies of a prediction.
pub(super) fn of_outcomes(frequencies: &[FrequencyOutcome]) -> Vec<Group> {
    let hertz: Vec<f64> = frequencies.iter().map(|f| f.frequency_hz).collect();
    let bands: Vec<Option<String>> = frequencies.iter().map(|f| f.band.clone()).collect();
    of_axes(&hertz, &bands)
}

/// Groups the frequencies of a study; `bands` is empty or as long.
pub(super) fn of_axes(frequencies_hz: &[f64], bands: &[Option<String>]) -> Vec<Group> {
    let band = |index: usize| bands.get(index).and_then(Option::as_ref);
    let singles = (0..frequencies_hz.len()).filter(|i| band(*i).is_none()).count();
    let mut groups: Vec<Group> = Vec::new();
    let mut last: Option<Option<&String>> = None;
    for index in 0..frequencies_hz.len() {
        let this = band(index);
        let joins = last == Some(this) && (this.is_some() || singles > SINGLE_AT_MOST);
        match groups.last_mut() {
            Some(group) if joins => group.members.push(index),
            _ => groups.push(Group { name: String::new(), span: String::new(), members: vec![index] }),
        }
        last = Some(this);
    }
    for group in &mut groups {
        name(group, frequencies_hz, band(group.members[0]));
    }
    groups
}

fn name(group: &mut Group, frequencies_hz: &[f64], band: Option<&String>) {
    let each = || group.members.iter().map(|i| frequencies_hz[*i]);
    let (low, high) = each().fold((f64::INFINITY, 0.0_f64), |(l, h), f| (l.min(f), h.max(f)));
    let span = if high > low {
        format!("{} to {} MHz", megahertz(low), megahertz(high))
    } else {
        format!("{} MHz", megahertz(low))
    };
    match band {
        Some(band) => (group.name, group.span) = (band.clone(), span),
        None => group.name = span,
    }
}

/// A frequency said shortly: "40 m low" or "7.1 MHz".
pub(super) fn short(frequency: &FrequencyOutcome) -> String {
    match (&frequency.band, frequency.edge) {
        (Some(band), Some(edge)) => format!("{band} {}", edge_word(edge)),
        (Some(band), None) => format!("{band}, {} MHz", megahertz(frequency.frequency_hz)),
        _ => format!("{} MHz", megahertz(frequency.frequency_hz)),
    }
}

/// One short word for an edge.
pub(super) fn edge_word(edge: BandEdge) -> &'static str {
    match edge {
        BandEdge::Low => "low",
        BandEdge::Middle => "mid",
        BandEdge::High => "high",
    }
}

/// An edge as the JSON has it.
pub(super) fn edge_name(edge: BandEdge) -> &'static str {
    match edge {
        BandEdge::Low => "low",
        BandEdge::Middle => "middle",
        BandEdge::High => "high",
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn edges_of_a_band_are_one_group_and_single_frequencies_stay_alone() {
        let bands = [Some("40 m".to_string()), Some("40 m".to_string()), None, None];
        let groups = of_axes(&[7.0e6, 7.2e6, 10.12e6, 14.1e6], &bands);
        let members: Vec<_> = groups.iter().map(|g| g.members.clone()).collect();
        assert_eq!(members, vec![vec![0, 1], vec![2], vec![3]]);
        assert_eq!((groups[0].name.as_str(), groups[0].span.as_str()), ("40 m", "7 to 7.2 MHz"));
        assert_eq!(groups[1].name, "10.12 MHz");
        let curve: Vec<f64> = (0..50).map(|i| 3e6 + 1e5 * f64::from(i)).collect();
        assert_eq!(of_axes(&curve, &[]).len(), 1);
        assert!(of_axes(&curve, &[])[0].is_run() && groups.iter().all(|g| !g.is_run()));
    }
}
