//! The table of a prediction: every band at its worst edge, nominal and, with variants, worst.

use super::bands::{self, Group};
use super::worst::{Case, Worse, worst_of};
use super::{References, Units, cautions, figures};
use crate::outcome::{FrequencyOutcome, PartOutcome, Prediction, ShieldEnd, ShieldOutcome};
use comfy_table::{Cell, CellAlignment, ContentArrangement, Table, TableComponent, presets};
use num_complex::Complex64;

/// Bands beside each other at most, so that a line stays near a hundred characters.
const ACROSS: usize = 4;

/// Rank of a frequency in one quantity; `None` where it has none.
type Rank<'a> = Box<dyn Fn(&FrequencyOutcome) -> Option<f64> + 'a>;
/// The words for it.
type Say<'a> = Box<dyn Fn(&FrequencyOutcome) -> String + 'a>;

/// One line of the table.
struct Row<'a> {
    title: String,
    /// `None` for the heading of a block.
    content: Option<Content<'a>>,
}

struct Content<'a> {
    rank: Rank<'a>,
    worse: Worse,
    say: Say<'a>,
    /// Value of `rank` beyond which the cell is marked.
    limit: Option<f64>,
    /// Which edge is shown is said in this row.
    named: bool,
}

/// The whole text: heading, table, warnings, cautions.
#[must_use]
pub fn prediction(prediction: &Prediction, references: &References, units: Units) -> String {
    let mut text = heading(prediction);
    let groups = bands::of_outcomes(&prediction.frequencies);
    let rows = rows(prediction, references, units);
    let tables = groups.len().div_ceil(ACROSS).max(1);
    for part in groups.chunks(groups.len().div_ceil(tables).max(1)) {
        text.push('\n');
        text.push_str(&table(prediction, part, &rows));
        text.push('\n');
    }
    text.push_str(&notes(prediction, references));
    if !prediction.warnings.is_empty() {
        text.push_str("\nWarnings\n");
        for warning in &prediction.warnings {
            text.push_str(&format!("  - {}: {}\n", warning.about, warning.message));
        }
    }
    text.push('\n');
    text.push_str(&cautions::paragraph(&[]));
    text
}

fn heading(prediction: &Prediction) -> String {
    let earth = &prediction.earth;
    let said = match earth.kind.as_str() {
        "none" => "free space".to_string(),
        "perfect" => "perfect earth".to_string(),
        kind => {
            let permittivity = earth.permittivity.map(|v| format!(", relative permittivity {}", figures::three(v)));
            let conductivity =
                earth.conductivity_s_per_m.map(|v| format!(", conductivity {} mS/m", figures::three(1e3 * v)));
            format!("{kind}{}{}", permittivity.unwrap_or_default(), conductivity.unwrap_or_default())
        }
    };
    let power = prediction.frequencies.first().map(|f| figures::watts(f.power.input_w)).unwrap_or_default();
    format!("{}\nover {said}; {power} into the line; {} unknowns\n", prediction.station, prediction.unknowns)
}

fn table(prediction: &Prediction, groups: &[Group], rows: &[Row]) -> String {
    let mut table = Table::new();
    table.load_preset(presets::NOTHING).set_content_arrangement(ContentArrangement::Disabled);
    table.set_style(TableComponent::HeaderLines, '─').set_style(TableComponent::MiddleHeaderIntersections, '─');
    let head =
        groups.iter().map(|g| if g.span.is_empty() { g.name.clone() } else { format!("{}\n{}", g.name, g.span) });
    let head = head.map(|text| Cell::new(text).set_alignment(CellAlignment::Right));
    table.set_header(std::iter::once(Cell::new("")).chain(head));
    for row in rows {
        if row.content.is_none() {
            table.add_row([""]);
        }
        let mut cells = vec![Cell::new(&row.title)];
        for group in groups {
            let text = row.content.as_ref().map_or(String::new(), |c| cell(prediction, group, c));
            cells.push(Cell::new(text).set_alignment(CellAlignment::Right));
        }
        table.add_row(cells);
    }
    let lines: Vec<String> = table.to_string().lines().map(|line| line.trim_end().to_string()).collect();
    lines.join("\n")
}

fn cell(prediction: &Prediction, group: &Group, content: &Content) -> String {
    let Case { nominal, worst } = worst_of(prediction, group, &content.rank, content.worse);
    let Some(nominal) = nominal else {
        return figures::MISSING.to_string();
    };
    let mark = |frequency: &FrequencyOutcome| {
        let value = (content.rank)(frequency).unwrap_or(f64::NAN);
        if content.limit.is_some_and(|limit| value > limit) { " !" } else { "" }
    };
    let said = (content.say)(nominal);
    let (first, rest) = said.split_once('\n').map_or((said.as_str(), None), |(first, rest)| (first, Some(rest)));
    let mut text = first.to_string();
    if let Some(edge) = nominal.edge.filter(|_| content.named && group.members.len() > 1) {
        text.push_str(&format!(" {}", bands::edge_word(edge)));
    }
    text.push_str(mark(nominal));
    let frequency = |f: &FrequencyOutcome| format!("at {} MHz", figures::megahertz(f.frequency_hz));
    if group.is_run() {
        text.push_str(&format!("\n{}", frequency(nominal)));
    }
    if let Some(rest) = rest {
        text.push_str(&format!("\n{rest}"));
    }
    if let Some((variant, there)) = worst {
        let said = (content.say)(there);
        text.push_str(&format!("\n{} {variant}{}", said.lines().next().unwrap_or_default(), mark(there)));
        if group.is_run() {
            text.push_str(&format!("\n{}", frequency(there)));
        }
    }
    text
}

fn rows<'a>(prediction: &'a Prediction, references: &'a References, units: Units) -> Vec<Row<'a>> {
    let mut rows = feed_rows(references);
    if prediction.frequencies.iter().any(|f| f.shield.is_some()) {
        rows.extend(shield_rows(prediction, references, units));
    }
    rows.extend(power_rows(prediction));
    rows
}

fn block(title: impl Into<String>) -> Row<'static> {
    Row { title: title.into(), content: None }
}

fn row<'a>(
    title: impl Into<String>,
    worse: Worse,
    rank: impl Fn(&FrequencyOutcome) -> Option<f64> + 'a,
    say: impl Fn(&FrequencyOutcome) -> String + 'a,
) -> Row<'a> {
    let content = Content { rank: Box::new(rank), worse, say: Box::new(say), limit: None, named: true };
    Row { title: format!("  {}", title.into()), content: Some(content) }
}

impl Row<'_> {
    fn limited(mut self, limit: Option<f64>) -> Self {
        if let Some(content) = &mut self.content {
            content.limit = limit;
        }
        self
    }

    fn unnamed(mut self) -> Self {
        if let Some(content) = &mut self.content {
            content.named = false;
        }
        self
    }
}

/// Standing-wave ratio of the feed point seen through the ideal transformer.
fn feed_swr(frequency: &FrequencyOutcome, references: &References) -> f64 {
    let ratio = references.impedance_ratio.unwrap_or(1.0);
    let seen = Complex64::new(frequency.feed.resistance_ohm, frequency.feed.reactance_ohm) / ratio;
    let reference = references.radio_impedance_ohm;
    let reflection = ((seen - reference) / (seen + reference)).norm();
    if reflection < 1.0 { (1.0 + reflection) / (1.0 - reflection) } else { f64::INFINITY }
}

fn feed_rows(references: &References) -> Vec<Row<'_>> {
    let limit = references.limits.map(|l| l.swr);
    let swr = |f: &FrequencyOutcome| Some(f.radio.swr);
    let at = if references.impedance_ratio.is_some() { "SWR at the transformer" } else { "SWR at the feed point" };
    let between = move |f: &FrequencyOutcome| Some(feed_swr(f, references));
    vec![
        block("Match"),
        row("feed point, ohm", Worse::Larger, swr, |f| {
            let error = &f.discretisation;
            format!(
                "{}\n±{}, ±j{}",
                figures::complex_ohm(f.feed.resistance_ohm, f.feed.reactance_ohm),
                figures::three(error.resistance_ohm),
                figures::three(error.reactance_ohm)
            )
        })
        .unnamed(),
        row(at, Worse::Larger, between, move |f| figures::swr(feed_swr(f, references))),
        row(format!("SWR at the radio ({} ohm)", references.radio_impedance_ohm), Worse::Larger, swr, |f| {
            figures::swr(f.radio.swr)
        })
        .limited(limit),
        row("the radio sees, ohm", Worse::Larger, swr, |f| {
            figures::complex_ohm(f.radio.resistance_ohm, f.radio.reactance_ohm)
        })
        .unnamed(),
    ]
}

fn shield_row<'a>(
    title: impl Into<String>,
    value: impl Fn(&ShieldOutcome) -> Option<f64> + Copy + 'a,
    say: impl Fn(f64, &ShieldOutcome) -> String + 'a,
) -> Row<'a> {
    let rank = move |f: &FrequencyOutcome| f.shield.as_ref().and_then(value);
    row(title, Worse::Larger, rank, move |f| match f.shield.as_ref() {
        Some(shield) => value(shield).map_or(figures::MISSING.to_string(), |v| say(v, shield)),
        None => figures::MISSING.to_string(),
    })
}

fn shield_rows<'a>(prediction: &Prediction, references: &'a References, units: Units) -> Vec<Row<'a>> {
    let first = prediction.frequencies.iter().find_map(|f| f.shield.as_ref());
    let entry = first.map_or(String::new(), |s| format!(" ({})", figures::distance(s.entry_at_m, units)));
    let end = match first.map(|s| s.end) {
        Some(ShieldEnd::Open) => " (open end)",
        Some(ShieldEnd::Body) => " (on its case)",
        _ => " (joined)",
    };
    let limit = references.limits.map(|l| l.entry_current_a);
    let current = |v: f64, _: &ShieldOutcome| figures::amperes_rms_peak(v);
    let voltage = |v: f64, _: &ShieldOutcome| figures::volts_rms_peak(v);
    let at = move |m: f64| figures::distance(m, units);
    vec![
        block("Outside of the coax, RMS / peak"),
        shield_row(format!("current at the entry{entry}"), |s| Some(s.entry_current_a), current).limited(limit),
        shield_row("voltage at the entry", |s| s.entry_voltage_v, voltage),
        shield_row(format!("current at the radio{end}"), |s| Some(s.end_current_a), current),
        shield_row("largest current in the last metre", |s| Some(s.last_metre_current_a), current).limited(limit),
        shield_row("voltage at the radio", |s| s.end_voltage_v, voltage),
        shield_row(
            "largest current anywhere",
            |s| Some(s.largest_current_a),
            move |v, s| format!("{}\nat {}", figures::amperes_rms_peak(v), at(s.largest_at_m)),
        )
        .unnamed(),
        shield_row(
            "largest voltage anywhere",
            |s| s.largest_voltage_v,
            move |v, s| {
                let place = s.largest_voltage_at_m.map_or(String::new(), |m| format!("\nat {}", at(m)));
                format!("{}{place}", figures::volts_rms_peak(v))
            },
        )
        .unnamed(),
    ]
}

fn efficiency(frequency: &FrequencyOutcome) -> Option<f64> {
    let power = &frequency.power;
    (power.input_w > 0.0).then(|| power.radiated_w / power.input_w)
}

/// A loss with the decibels it alone would cost.
fn loss(watts: f64, frequency: &FrequencyOutcome) -> String {
    let left = 1.0 - watts / frequency.power.input_w;
    format!("{}, {}", figures::watts(watts), figures::decibels(left).trim_start_matches('-'))
}

fn power_rows(prediction: &Prediction) -> Vec<Row<'static>> {
    // All at the edge that radiates least, so that the column adds up.
    let least = |title: &str, say: Box<dyn Fn(&FrequencyOutcome) -> String>| {
        row(title, Worse::Smaller, efficiency, say).unnamed()
    };
    let where_least = if columns(prediction).0 { "frequency" } else { "edge" };
    let mut rows = vec![
        block(format!("Power at the {where_least} that radiates least")),
        row("efficiency (radiated / input)", Worse::Smaller, efficiency, |f| {
            let fraction = efficiency(f).unwrap_or(f64::NAN);
            format!("{}, {}", figures::percent(fraction), figures::decibels(fraction))
        }),
        least("radiated", Box::new(|f| figures::watts(f.power.radiated_w))),
        least("lost in the earth", Box::new(|f| loss(f.power.earth_w, f))),
        least("lost in metal", Box::new(|f| loss(f.power.metal_w, f))),
        least("lost in the line", Box::new(|f| loss(f.power.line_w, f))),
        least("lost in the transformer", Box::new(|f| loss(f.power.transformer_w, f))),
    ];
    if let Some(first) = prediction.frequencies.first() {
        for part in first.power.chokes.iter().chain(&first.power.inline) {
            let name = part.name.clone();
            rows.push(least(
                &format!("lost in {}", part.name),
                Box::new(move |f| {
                    part_named(f, &name).map_or(figures::MISSING.to_string(), |p| loss(p.dissipated_w, f))
                }),
            ));
        }
    }
    rows.push(least(
        "not accounted for",
        Box::new(|f| f.power.unaccounted_w.map_or("see note".to_string(), figures::watts)),
    ));
    rows
}

/// Whether any column stands for a run of frequencies, and whether any stands for a band.
fn columns(prediction: &Prediction) -> (bool, bool) {
    let groups = bands::of_outcomes(&prediction.frequencies);
    (groups.iter().any(Group::is_run), groups.iter().any(|g| !g.span.is_empty()))
}

/// Which of its frequencies a column shows.
fn shown_at(prediction: &Prediction) -> &'static str {
    match columns(prediction) {
        (false, true) => "Each band is shown at its worst edge (low, mid or high), for each quantity on its own.",
        (false, false) => "Each frequency is shown as it is.",
        (true, false) => {
            "The run is shown at the frequency worst for each quantity on its own; --csv and --json have all."
        }
        (true, true) => {
            "Each band is shown at its worst edge and each run at its worst frequency, for each quantity on its own."
        }
    }
}

fn part_named<'a>(frequency: &'a FrequencyOutcome, name: &str) -> Option<&'a PartOutcome> {
    frequency.power.chokes.iter().chain(&frequency.power.inline).find(|p| p.name == name)
}

fn notes(prediction: &Prediction, references: &References) -> String {
    let mut notes = vec![
        shown_at(prediction).to_string(),
        "± is the solver's estimate of its own discretisation error; soil, heights and parts add theirs.".to_string(),
        "Peak is √2 times RMS, at the operating power as carrier or peak envelope.".to_string(),
        "The dB of a loss are what it alone would take from the input.".to_string(),
    ];
    if !prediction.variants.is_empty() {
        let names: Vec<&str> = prediction.variants.iter().map(|v| v.name.as_str()).collect();
        notes.push(format!("Below it stands the worst over the variants ({}), where that is worse.", names.join(", ")));
    }
    if let Some(limits) = references.limits {
        let current = figures::amperes(limits.entry_current_a);
        notes.push(format!("! is beyond the limit: {current} into the shack, SWR {}.", figures::swr(limits.swr)));
    }
    if prediction.frequencies.iter().any(|f| f.power.unaccounted_w.is_none()) {
        notes.push(
            "With conductors below the surface the loss in the earth is the remainder, so nothing is left to check."
                .into(),
        );
    }
    let open = |f: &FrequencyOutcome| f.shield.as_ref().is_some_and(|s| s.end == ShieldEnd::Open);
    if prediction.frequencies.iter().any(open) {
        notes.push(
            "An open end carries no current by definition: judge it by its voltage and by its last metre.".into(),
        );
    }
    format!("\n{}\n", notes.join("\n"))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::outcome::place::LimitsOutcome;
    use crate::output::sample;

    fn references() -> References {
        let limits = Some(LimitsOutcome { entry_current_a: 0.02, swr: 2.0 });
        References { radio_impedance_ohm: 50.0, impedance_ratio: Some(49.0), limits }
    }

    #[test]
    fn the_table_says_what_a_practitioner_asks() {
        let text = prediction(&sample::prediction(), &references(), Units::Metres);
        if std::env::var_os("BRAIDWISE_PICTURES").is_some() {
            println!("{text}");
        }
        for said in [
            "SWR at the transformer",
            "current at the entry (7.84 m)",
            "lost in entry choke",
            " wet !",
            "47",
            "power lines",
            "Local electrical codes",
            "the jacket lies on the surface",
            "beyond the limit: 20.0 mA",
        ] {
            assert!(text.contains(said), "{said} is missing in\n{text}");
        }
        assert!(text.lines().filter(|l| !l.starts_with("  - ")).all(|line| line.chars().count() <= 112), "{text}");
        assert!(!text.contains("NaN"));
    }

    #[test]
    fn the_transformer_turns_2450_ohm_into_a_match() {
        let mut one = sample::prediction().frequencies.remove(0);
        (one.feed.resistance_ohm, one.feed.reactance_ohm) = (2450.0, 0.0);
        assert!((feed_swr(&one, &references()) - 1.0).abs() < 1e-12);
        one.feed.resistance_ohm = 4900.0;
        assert!((feed_swr(&one, &references()) - 2.0).abs() < 1e-12);
        // Without the ratio the same feed point is a bad match: the ratio is really used.
        let bare = References { impedance_ratio: None, ..references() };
        assert!(feed_swr(&one, &bare) > 90.0);
    }

    #[test]
    fn a_run_of_frequencies_names_the_one_that_is_worst() {
        let mut sample = sample::prediction();
        let variants = sample.variants.iter_mut().flat_map(|v| v.frequencies.iter_mut());
        for frequency in sample.frequencies.iter_mut().chain(variants) {
            (frequency.band, frequency.edge) = (None, None);
        }
        let worst =
            sample.frequencies.iter().max_by(|a, b| a.radio.swr.total_cmp(&b.radio.swr)).map(|f| f.frequency_hz);
        let text = prediction(&sample, &references(), Units::Metres);
        let lines: Vec<&str> = text.lines().collect();
        let row = lines.iter().position(|l| l.contains("SWR at the radio")).unwrap_or(0);
        let said = format!("at {} MHz", figures::megahertz(worst.unwrap_or(0.0)));
        assert!(lines[row + 1].trim() == said, "{said} is missing below {}\n{text}", lines[row]);
        assert!(!text.contains("edge"), "{text}");
    }

    #[test]
    fn feet_and_missing_shield_are_said() {
        let mut sample = sample::prediction();
        assert!(prediction(&sample, &references(), Units::Feet).contains("current at the entry (25.7 ft)"));
        for frequency in &mut sample.frequencies {
            frequency.shield = None;
        }
        assert!(!prediction(&sample, &references(), Units::Feet).contains("Outside of the coax"));
    }
}
