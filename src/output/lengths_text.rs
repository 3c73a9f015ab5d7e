//! What `place` says when the length of the coax was free too: the pair of length and place, its windows, the runner-up.

use super::place_text::worst_line;
use super::{Units, figures};
use crate::outcome::joint::{LengthPick, LengthsOutcome};
use crate::outcome::place::PlaceVerdict;

/// The paragraphs on lengths, behind those on places.
pub(super) fn paragraphs(joint: &LengthsOutcome, units: Units) -> String {
    let mut text = format!("\nLength of the coax and place of the choke together\n{}\n", heading(joint, units));
    text.push_str(&format!("\n{}\n", answer(joint, units)));
    if let Some(pick) = joint.picks.first() {
        text.push_str(&details(pick));
    }
    if let Some(second) = joint.picks.get(1) {
        text.push_str(&format!("\nRunner-up: {}\n{}", choice(second, units), details(second)));
    }
    text
}

fn heading(joint: &LengthsOutcome, units: Units) -> String {
    let range = match (joint.lengths_m.first(), joint.lengths_m.last()) {
        (Some(from), Some(to)) => figures::distances(*from, *to, units),
        _ => figures::MISSING.to_string(),
    };
    let (lengths, places) = (joint.lengths_m.len(), joint.places_m.len());
    let now = figures::distance(joint.present_length_m, units);
    format!(
        "coax from {range}, {lengths} length{} and up to {places} places; {} moves; now {now}",
        if lengths == 1 { "" } else { "s" },
        joint.moving_end
    )
}

fn answer(joint: &LengthsOutcome, units: Units) -> String {
    let why = joint.why.trim().trim_end_matches('.');
    match (joint.verdict, joint.picks.first().map(|p| choice(p, units))) {
        (PlaceVerdict::NoneNeeded, first) => {
            let first = first.map_or_else(String::new, |f| format!("\nThe best pair with one is {f}."));
            format!("No choke is needed: {why}.{first}")
        }
        (PlaceVerdict::Place, Some(first)) => format!("Take {first}."),
        (PlaceVerdict::NoPlace, Some(first)) => {
            format!("No length and place meet the limits: {why}.\nThe least bad is {first}.")
        }
        (_, None) => format!("No length and place meet the limits: {why}."),
    }
}

fn choice(pick: &LengthPick, units: Units) -> String {
    let within = |[from, to]: [f64; 2], what: &str| match to - from {
        width if width < 5e-3 => "no other".to_string(),
        _ => format!("{what} from {}", figures::distances(from, to, units)),
    };
    let good = if pick.worst.value > pick.worst.limit { "about as good" } else { "that hold" };
    format!(
        "{} of coax with choke \"{}\" at {} from the feed point (places {good} at that length: {}; lengths {good} with the choke \
         there: {})",
        figures::distance(pick.length_m, units),
        pick.choke,
        figures::distance(pick.at_m, units),
        within(pick.window_m, "anywhere"),
        within(pick.length_window_m, "any")
    )
}

fn details(pick: &LengthPick) -> String {
    format!("  why: {}\n  {}\n", pick.why, worst_line(&pick.worst))
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;
    use crate::output::sample_studies;

    #[test]
    fn the_pair_comes_with_both_windows_and_a_runner_up() {
        let mut joint = sample_studies::joint().lengths.unwrap();
        let text = paragraphs(&joint, Units::Metres);
        for said in [
            "coax from 9.00 to 25.00 m, 41 lengths",
            "Take 11.40 m of coax with choke \"5 kohm\" at 5.70 m",
            "hold at that length: anywhere from 5.40 to 5.90 m; lengths that hold with the choke there: any from 10.80 to 11.80 m",
            "Runner-up: 15.20 m of coax with choke \"2 kohm\"",
        ] {
            assert!(text.contains(said), "{said} is missing in\n{text}");
        }
        assert!(paragraphs(&joint, Units::Feet).contains("Take 37.4 ft of coax"));
        joint.picks[0].length_window_m = [11.4, 11.4];
        assert!(paragraphs(&joint, Units::Metres).contains("with the choke there: no other)"));
        joint.verdict = PlaceVerdict::NoneNeeded;
        joint.why = "with 10 m of coax the station keeps its limits without a choke".into();
        let text = paragraphs(&joint, Units::Metres);
        assert!(
            text.contains("No choke is needed: with 10 m of coax") && text.contains("The best pair with one is"),
            "{text}"
        );
        joint.verdict = PlaceVerdict::NoPlace;
        joint.picks.clear();
        assert!(paragraphs(&joint, Units::Metres).contains("No length and place meet the limits"));
    }
}
