//! Sentences about a choice, for a person who will act on it.

use crate::outcome::place::{PlaceOutcome, WorstCase};
use crate::quantity::engineering;

/// "all five bands", "all 4 frequencies", "7.1 MHz".
pub(super) fn bands(outcome: &PlaceOutcome) -> String {
    let mut bands: Vec<&String> = outcome.bands.iter().flatten().collect();
    bands.dedup();
    let single = outcome.bands.iter().filter(|b| b.is_none()).count();
    match (bands.len(), single) {
        (1, 0) => format!("the {} band", bands[0]),
        (n, 0) => format!("all {} bands", number(n)),
        (0, 1) => outcome.frequencies_hz.first().map_or_else(String::new, |f| megahertz(*f)),
        (0, n) => format!("all {} frequencies", number(n)),
        (n, m) => {
            format!("all {} bands and {} more frequenc{}", number(n), number(m), if m == 1 { "y" } else { "ies" })
        }
    }
}

/// ", nominal and in every variant (flood, dry August)"; nothing without variants.
pub(super) fn variants(outcome: &PlaceOutcome) -> String {
    match outcome.variants.get(1..) {
        None | Some([]) => String::new(),
        Some([one]) => format!(", as written and with \"{one}\""),
        Some(more) => {
            let names: Vec<String> = more.iter().map(|n| format!("\"{n}\"")).collect();
            format!(", as written and in all {} variants ({})", number(more.len()), names.join(", "))
        }
    }
}

/// "5.40 to 6.10 m" or "5.40 m".
pub(super) fn window(window_m: [f64; 2]) -> String {
    if window_m[1] - window_m[0] < 5e-3 {
        format!("{:.2} m", window_m[0])
    } else {
        format!("{:.2} to {:.2} m", window_m[0], window_m[1])
    }
}

/// "the current into the shack is 54 mA (limit 20 mA) at 21 MHz with \"dry August\"".
pub(super) fn case(worst: &WorstCase) -> String {
    let (name, value, limit) = quantity(worst);
    let with = if worst.variant == "nominal" { String::new() } else { format!(" with \"{}\"", worst.variant) };
    format!("{name} is {value} (limit {limit}) at {}{with}", megahertz(worst.frequency_hz))
}

/// A quantity in words, its value, its limit.
pub(super) fn quantity(worst: &WorstCase) -> (&'static str, String, String) {
    let show = |x: f64, unit: &str| if unit.is_empty() { ratio(x) } else { engineering(x, unit) };
    let (name, unit) = match worst.quantity.as_str() {
        "entry_current_a" => ("the current into the shack", "A"),
        "last_metre_current_a" => ("the largest current within a metre of the radio", "A"),
        "end_voltage_v" => ("the voltage of the shield at the radio", "V"),
        _ => ("the standing-wave ratio at the radio", ""),
    };
    (name, show(worst.value, unit), show(worst.limit, unit))
}

/// "14.175 MHz".
pub(super) fn megahertz(frequency_hz: f64) -> String {
    let text = format!("{:.4}", frequency_hz / 1e6);
    format!("{} MHz", text.trim_end_matches('0').trim_end_matches('.'))
}

/// A standing-wave ratio.
fn ratio(value: f64) -> String {
    if value >= 99.5 {
        "over 99".to_string()
    } else if value >= 9.95 {
        format!("{value:.0}")
    } else {
        let text = format!("{value:.2}");
        text.trim_end_matches('0').trim_end_matches('.').to_string()
    }
}

fn number(n: usize) -> String {
    const WORDS: [&str; 10] = ["one", "two", "three", "four", "five", "six", "seven", "eight", "nine", "ten"];
    n.checked_sub(1).and_then(|k| WORDS.get(k)).map_or_else(|| n.to_string(), |w| (*w).to_string())
}
