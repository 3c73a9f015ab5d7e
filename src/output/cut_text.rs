//! What `cut` says: the length with its window, the runner-up, the lengths to avoid, what can be bought, how to trim.

use super::place_text::{holds, warnings, worst_line, worst_words};
use super::{Units, cautions, figures};
use crate::outcome::cut::{CutOutcome, CutPick, CutVerdict, LengthToAvoid, TrimOutcome};

/// What stands under every length.
const LENGTH: &str = "Cut long, measure, trim: a wire is easily shortened, and soil, heights and jackets are never quite those of the file.";

/// The whole text of a length study.
#[must_use]
pub fn verdict(cut: &CutOutcome, units: Units) -> String {
    let mut text = heading(cut, units);
    text.push_str(&format!("\n{}\n", answer(cut, units)));
    if let Some(pick) = cut.picks.first() {
        text.push_str(&details(pick));
    }
    if let Some(second) = cut.picks.get(1) {
        text.push_str(&format!("\nRunner-up: {}\n{}", choice(cut, second, units), details(second)));
    }
    text.push_str(&avoid(cut, units));
    text.push_str(&stock(cut, units));
    text.push_str(&trim(cut));
    text.push_str(&warnings(&cut.warnings));
    text.push('\n');
    text.push_str(&cautions::paragraph(&[LENGTH]));
    text
}

fn heading(cut: &CutOutcome, units: Units) -> String {
    let ends = |lengths: &[f64]| match (lengths.first(), lengths.last()) {
        (Some(from), Some(to)) => figures::distances(*from, *to, units),
        _ => figures::MISSING.to_string(),
    };
    let second = match (&cut.second_conductor, &cut.second_lengths_m) {
        (Some(name), Some(lengths)) => format!(" with {name} from {}", ends(lengths)),
        _ => String::new(),
    };
    format!(
        "{}\n{} from {}{second}; {} moves; now {}\n{} frequencies; variants: {}; {} into the line\nlimits: {} into the shack, SWR {}\n",
        cut.station,
        cut.conductor,
        ends(&cut.lengths_m),
        cut.moving_end,
        figures::distance(cut.present_length_m, units),
        cut.frequencies_hz.len(),
        cut.variants.join(", "),
        figures::watts(cut.power_w),
        figures::round(&figures::amperes(cut.limits.entry_current_a)),
        figures::swr(cut.limits.swr),
    )
}

fn answer(cut: &CutOutcome, units: Units) -> String {
    let why = cut.why.trim().trim_end_matches('.');
    let first = cut.picks.first().map(|p| choice(cut, p, units));
    match (cut.verdict, first) {
        (CutVerdict::Keep, _) => format!("Keep the length as it is: {why}."),
        (CutVerdict::Cut, Some(first)) => format!("Cut {first}: {why}."),
        (CutVerdict::NoLength, Some(first)) => format!("No length meets the limits: {why}.\nThe least bad is {first}."),
        (CutVerdict::NoLength, None) => format!("No length meets the limits: {why}."),
        (CutVerdict::Cut, None) => format!("{why}."),
    }
}

fn choice(cut: &CutOutcome, pick: &CutPick, units: Units) -> String {
    let [from, to] = pick.window_m;
    let second = match (&cut.second_conductor, pick.second_length_m) {
        (Some(name), Some(length_m)) => format!(" and {name} to {}", figures::distance(length_m, units)),
        _ => String::new(),
    };
    format!(
        "{} to {}{second} (anywhere from {} {})",
        cut.conductor,
        figures::distance(pick.length_m, units),
        figures::distances(from, to, units),
        holds(&pick.worst)
    )
}

fn details(pick: &CutPick) -> String {
    format!("  why: {}\n  {}\n", pick.why, worst_line(&pick.worst))
}

/// The lengths to avoid in order of length, each said once with everything that speaks against it.
fn avoid(cut: &CutOutcome, units: Units) -> String {
    if cut.lengths_to_avoid.is_empty() {
        return String::new();
    }
    let mut sorted: Vec<&LengthToAvoid> = cut.lengths_to_avoid.iter().collect();
    sorted.sort_by(|a, b| a.length_m.total_cmp(&b.length_m).then(a.frequency_hz.total_cmp(&b.frequency_hz)));
    let mut text = String::from("\nLengths to avoid, for this route, earth and far end\n");
    let mut last = f64::NAN;
    for length in sorted {
        let same = length.length_m == last;
        last = length.length_m;
        let place = if same { String::new() } else { figures::distance(length.length_m, units) };
        text.push_str(&format!(
            "  {place:>9}  {} {} at {} MHz, {}\n",
            figures::quantity_name(&length.quantity),
            figures::quantity(&length.quantity, length.value),
            figures::megahertz(length.frequency_hz),
            length.variant,
        ));
    }
    text
}

fn stock(cut: &CutOutcome, units: Units) -> String {
    if cut.stock.is_empty() {
        return String::new();
    }
    let mut text = String::from("\nLengths one can buy, best first\n");
    for piece in &cut.stock {
        let verdict = if piece.within_limits { "within all limits" } else { "beyond a limit" };
        let length = figures::distance(piece.length_m, units);
        text.push_str(&format!("  {} ({length}): {verdict}; {}\n", piece.name, worst_words(&piece.worst)));
    }
    text
}

/// Kilohertz per centimetre and per inch (25.4 mm, exact).
fn trim(cut: &CutOutcome) -> String {
    if cut.trim.is_empty() {
        return String::new();
    }
    let mut text = format!("\nTrim rule for the moving end ({})\n", cut.moving_end);
    for TrimOutcome { frequency_hz, hz_per_m } in &cut.trim {
        let way = if *hz_per_m < 0.0 { "higher" } else { "lower" };
        let per = |metres: f64| figures::three((hz_per_m * metres / 1e3).abs());
        text.push_str(&format!(
            "  best match at {} MHz; each centimetre shorter moves it {} kHz {way}, each inch {} kHz\n",
            figures::megahertz(*frequency_hz),
            per(0.01),
            per(0.0254),
        ));
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::output::sample_studies;

    #[test]
    fn the_verdict_names_length_window_avoidance_stock_and_trim() {
        let text = verdict(&sample_studies::cut(), Units::Metres);
        if std::env::var_os("BRAIDWISE_PICTURES").is_some() {
            println!("{text}");
        }
        for said in [
            "Cut coax to 12.25 m (anywhere from 10.90 to 13.10 m holds)",
            "Runner-up: coax to 16.50 m",
            "SWR 1.82 of 2 at 14 MHz, wet",
            "9.90 m  current into the shack 410 mA at 14.175 MHz",
            "50 ft (15.24 m): within all limits",
            // 310 kHz a metre.
            "each centimetre shorter moves it 3.10 kHz higher, each inch 7.87 kHz",
            "the radio's end of the coax moves",
            "Cut long, measure, trim",
        ] {
            assert!(text.contains(said), "{said} is missing in\n{text}");
        }
        assert!(verdict(&sample_studies::cut_two(), Units::Feet).contains("and counterpoise to 7.9 ft"));
    }

    #[test]
    fn no_length_says_so_first() {
        let mut cut = sample_studies::cut();
        cut.verdict = CutVerdict::NoLength;
        assert!(verdict(&cut, Units::Metres).contains("No length meets the limits:"));
        cut.verdict = CutVerdict::Keep;
        assert!(verdict(&cut, Units::Metres).contains("Keep the length as it is:"));
    }
}
