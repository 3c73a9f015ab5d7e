//! What `place` says: the verdict, the pick with its window, the runner-up, every band with and without, where to clamp a meter.

use super::bands::{self, Group};
use super::{Units, cautions, figures, lengths_text};
use crate::outcome::place::{OverFrequency, OverPlace, PlaceOutcome, PlacePick, PlaceVerdict, WorstCase};
use comfy_table::{Cell, CellAlignment, ContentArrangement, Table, TableComponent, presets};

/// Share of the power from which heat in a choke is called large.
const LARGE_SHARE: f64 = 0.05;

/// The whole text of a placement study.
#[must_use]
pub fn verdict(place: &PlaceOutcome, units: Units) -> String {
    let mut text = heading(place);
    text.push_str(&format!("\n{}\n", answer(place, units)));
    if let Some(pick) = place.picks.first() {
        text.push_str(&details(place, pick, units));
        text.push_str(&format!("\n{}\n", table(place, pick)));
    }
    if let Some(second) = place.picks.get(1) {
        text.push_str(&format!("\nRunner-up: {}\n{}", choice(second, units), details(place, second, units)));
    }
    text.push_str(&clamp(place, units));
    if let Some(joint) = &place.lengths {
        text.push_str(&lengths_text::paragraphs(joint, units));
    }
    let of_lengths = place.lengths.iter().flat_map(|joint| &joint.warnings);
    text.push_str(&warnings(&place.warnings.iter().chain(of_lengths).cloned().collect::<Vec<_>>()));
    text.push('\n');
    text.push_str(&cautions::paragraph(&[cautions::CHOKE]));
    text
}

fn heading(place: &PlaceOutcome) -> String {
    let variants = place.variants.join(", ");
    format!(
        "{}\n{} chokes at {} places on {} frequencies; variants: {variants}; {} into the line\nlimits: {} into the shack, SWR {}\n",
        place.station,
        place.chokes.len(),
        place.places_m.len(),
        place.frequencies_hz.len(),
        figures::watts(place.power_w),
        figures::round(&figures::amperes(place.limits.entry_current_a)),
        figures::swr(place.limits.swr),
    )
}

fn answer(place: &PlaceOutcome, units: Units) -> String {
    let first = place.picks.first().map(|p| choice(p, units));
    match (place.verdict, first) {
        (PlaceVerdict::NoneNeeded, _) => format!("No choke is needed: {}.", sentence(&place.why)),
        (PlaceVerdict::Place, Some(first)) => format!("Put {first}: {}.", sentence(&place.why)),
        (PlaceVerdict::Place, None) => format!("{}.", sentence(&place.why)),
        (PlaceVerdict::NoPlace, Some(first)) => {
            format!("No place meets the limits: {}.\nThe least bad is {first}.", sentence(&place.why))
        }
        (PlaceVerdict::NoPlace, None) => format!("No place meets the limits: {}.", sentence(&place.why)),
    }
}

/// A reason without its full stop.
fn sentence(text: &str) -> &str {
    text.trim().trim_end_matches('.')
}

fn choice(pick: &PlacePick, units: Units) -> String {
    let [from, to] = pick.window_m;
    format!(
        "choke \"{}\" at {} from the feed point (anywhere from {} {})",
        pick.choke,
        figures::distance(pick.at_m, units),
        figures::distances(from, to, units),
        holds(&pick.worst)
    )
}

/// How a choice stands: how near its worst is to a limit, or how far beyond.
pub(super) fn worst_line(worst: &WorstCase) -> String {
    let how = if worst.value > worst.limit { "furthest beyond a limit" } else { "nearest to a limit" };
    format!("{how}: {}", worst_words(worst))
}

/// "holds", or, where its worst is beyond a limit, "is about as good".
pub(super) fn holds(worst: &WorstCase) -> &'static str {
    if worst.value > worst.limit { "is about as good" } else { "holds" }
}

/// "current into the shack 82 mA of 100 mA at 7 MHz, wet".
pub(super) fn worst_words(worst: &WorstCase) -> String {
    let [value, limit] = [worst.value, worst.limit].map(|v| figures::round(&figures::quantity(&worst.quantity, v)));
    let name = figures::quantity_name(&worst.quantity);
    format!("{name} {value} of {limit} at {} MHz, {}", figures::megahertz(worst.frequency_hz), worst.variant)
}

/// Warnings of an outcome as a paragraph.
pub(super) fn warnings(warnings: &[crate::layout::Warning]) -> String {
    if warnings.is_empty() {
        return String::new();
    }
    let lines: Vec<String> = warnings.iter().map(|w| format!("  - {}: {}\n", w.about, w.message)).collect();
    format!("\nWarnings\n{}", lines.concat())
}

/// Indices of a pick in the arrays.
fn indices(place: &PlaceOutcome, pick: &PlacePick) -> Option<(usize, usize)> {
    let choke = place.chokes.iter().position(|c| c.name == pick.choke)?;
    let away = |p: &f64| (p - pick.at_m).abs();
    let nearest = place.places_m.iter().enumerate().min_by(|a, b| away(a.1).total_cmp(&away(b.1)))?;
    Some((choke, nearest.0))
}

/// The largest value at a pick with the variant and the frequency it belongs to.
fn largest(place: &PlaceOutcome, values: &OverPlace<f64>, pick: &PlacePick) -> Option<(f64, usize, usize)> {
    let (choke, at) = indices(place, pick)?;
    let mut found: Option<(f64, usize, usize)> = None;
    for (variant, chokes) in values.iter().enumerate() {
        for (frequency, places) in chokes.get(choke)?.iter().enumerate() {
            let value = *places.get(at)?;
            if found.is_none_or(|(most, _, _)| value > most) {
                found = Some((value, variant, frequency));
            }
        }
    }
    found
}

fn case(place: &PlaceOutcome, variant: usize, frequency: usize) -> String {
    let hz = place.frequencies_hz.get(frequency).copied().unwrap_or(f64::NAN);
    let name = place.variants.get(variant).map_or("", String::as_str);
    format!("{} MHz, {name}", figures::megahertz(hz))
}

fn details(place: &PlaceOutcome, pick: &PlacePick, units: Units) -> String {
    let mut lines = vec![format!("  why: {}", pick.why), format!("  {}", worst_line(&pick.worst))];
    if let Some((watts, variant, frequency)) = largest(place, &place.choke_w, pick) {
        let share = watts / place.power_w;
        let large =
            if share >= LARGE_SHARE { ": a large share of the power, and the choke must get rid of it" } else { "" };
        let (watts, share) = (figures::watts(watts), figures::percent(share));
        lines.push(format!("  heat in it: up to {watts} ({share}) at {}{large}", case(place, variant, frequency)));
    }
    let volts = largest(place, &place.choke_v, pick).map(|v| figures::volts_rms_peak(v.0));
    let amperes = largest(place, &place.choke_a, pick).map(|v| figures::amperes_rms_peak(v.0));
    if let (Some(volts), Some(amperes)) = (volts, amperes) {
        lines.push(format!("  it must stand: {volts} across it, {amperes} through it (RMS / peak)"));
    }
    if place.entry_at_m < pick.at_m {
        let entry = figures::distance(place.entry_at_m, units);
        lines.push(format!("  note: the entry is at {entry}, so this place is inside the shack"));
    }
    lines.push(String::new());
    lines.join("\n")
}

/// Largest over a band, for one variant or for all.
fn band_worst(
    group: &Group,
    variants: std::ops::Range<usize>,
    value: impl Fn(usize, usize) -> Option<f64>,
) -> Option<f64> {
    let cases = variants.flat_map(|v| group.members.iter().map(move |f| (v, *f)));
    cases.filter_map(|(v, f)| value(v, f)).reduce(f64::max)
}

/// Every band: without a choke, and with the pick nominal and worst.
fn table(place: &PlaceOutcome, pick: &PlacePick) -> String {
    let Some((choke, at)) = indices(place, pick) else {
        return String::new();
    };
    let with = |values: &OverPlace<f64>, v: usize, f: usize| values.get(v)?.get(choke)?.get(f)?.get(at).copied();
    let maybe = |values: &OverPlace<Option<f64>>, v: usize, f: usize| *values.get(v)?.get(choke)?.get(f)?.get(at)?;
    let bare = |values: &OverFrequency<f64>, v: usize, f: usize| values.get(v)?.get(f).copied();
    let all = 0..place.variants.len();
    let said = |value: Option<f64>, say: fn(f64) -> String| value.map_or(figures::MISSING.to_string(), say);
    let mut table = Table::new();
    table.load_preset(presets::NOTHING).set_content_arrangement(ContentArrangement::Disabled);
    table.set_style(TableComponent::HeaderLines, '─').set_style(TableComponent::MiddleHeaderIntersections, '─');
    let heads = [
        "",
        "no choke\ninto shack",
        "with it, nominal\ninto shack",
        "with it, worst\ninto shack",
        "\nlast metre",
        "\nat the radio",
        "\nSWR",
        "\nheat",
    ];
    table.set_header(heads.map(|h| Cell::new(h).set_alignment(CellAlignment::Right)));
    for group in bands::of_axes(&place.frequencies_hz, &place.bands) {
        let worst = |values: &OverPlace<f64>| band_worst(&group, all.clone(), |v, f| with(values, v, f));
        let over = |value: Option<f64>, limit: f64| if value.is_some_and(|v| v > limit) { " !" } else { "" };
        let without = band_worst(&group, all.clone(), |v, f| bare(&place.without.entry_current_a, v, f));
        let nominal = band_worst(&group, 0..1, |v, f| with(&place.entry_current_a, v, f));
        let (current, swr) = (worst(&place.entry_current_a), worst(&place.swr));
        let volts = band_worst(&group, all.clone(), |v, f| maybe(&place.end_voltage_v, v, f));
        let mark = |value: Option<f64>| over(value, place.limits.entry_current_a);
        let cells = [
            group.name.clone(),
            said(without, figures::amperes) + mark(without),
            said(nominal, figures::amperes) + mark(nominal),
            said(current, figures::amperes) + mark(current),
            said(worst(&place.last_metre_current_a), figures::amperes),
            said(volts, figures::volts),
            said(swr, figures::swr) + over(swr, place.limits.swr),
            said(worst(&place.choke_w), figures::watts),
        ];
        table.add_row(cells.map(|c| Cell::new(c).set_alignment(CellAlignment::Right)));
    }
    let lines: Vec<String> = table.to_string().lines().map(|line| line.trim_end().to_string()).collect();
    format!(
        "{}\nRMS; largest of each band; all but the third column worst of the variants; ! is beyond its limit.",
        lines.join("\n")
    )
}

fn clamp(place: &PlaceOutcome, units: Units) -> String {
    if place.clamp.is_empty() {
        return String::new();
    }
    let mut text = String::from("\nTo verify, clamp a current meter around the coax\n");
    for clamp in &place.clamp {
        let [low, high] = clamp.range_a.map(figures::amperes);
        text.push_str(&format!(
            "  {} MHz: at {}, expect {} ({low} to {high} over the variants)\n",
            figures::megahertz(clamp.frequency_hz),
            figures::distance(clamp.at_m, units),
            figures::amperes(clamp.current_a),
        ));
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::output::sample_studies;

    #[test]
    fn the_verdict_names_choke_place_window_heat_and_where_to_measure() {
        let place = sample_studies::place();
        let text = verdict(&place, Units::Metres);
        if std::env::var_os("BRAIDWISE_PICTURES").is_some() {
            println!("{text}");
        }
        for said in [
            "Put choke \"5 kohm\" at 5.70 m from the feed point (anywhere from 5.40 to 6.10 m holds)",
            "current into the shack 82 mA of 100 mA at 7 MHz, wet",
            "a large share of the power",
            "Runner-up: choke \"2 kohm\"",
            "clamp a current meter",
            "A choke never replaces a bond",
            "Local electrical codes",
        ] {
            assert!(text.contains(said), "{said} is missing in\n{text}");
        }
        assert!(verdict(&place, Units::Feet).contains("at 18.7 ft"));
        let text = verdict(&sample_studies::joint(), Units::Metres);
        assert!(text.contains("Take 11.40 m of coax") && text.contains("the range begins at 9 m"), "{text}");
    }

    #[test]
    fn none_needed_and_no_place_say_so_first() {
        let mut place = sample_studies::place();
        place.verdict = PlaceVerdict::NoneNeeded;
        place.why = "the entry carries 4 mA at most.".into();
        assert!(verdict(&place, Units::Metres).contains("No choke is needed: the entry carries 4 mA at most.\n"));
        place.verdict = PlaceVerdict::NoPlace;
        assert!(verdict(&place, Units::Metres).contains("The least bad is choke"));
        place.picks.clear();
        assert!(!verdict(&place, Units::Metres).contains("least bad"));
    }

    #[test]
    fn the_heat_is_the_largest_at_the_pick_over_everything() {
        let place = sample_studies::place();
        let pick = &place.picks[0];
        let at = 285;
        assert!((place.places_m[at] - pick.at_m).abs() < 1e-9);
        let most = place.choke_w.iter().flat_map(|v| v[2].iter().map(|f| f[at])).fold(0.0, f64::max);
        assert_eq!(largest(&place, &place.choke_w, pick).map(|l| l.0), Some(most));
    }
}
