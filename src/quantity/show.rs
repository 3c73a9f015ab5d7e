//! Numbers as people read them.

/// Metres in an international foot (exact: 0.3048 m, 1959 agreement).
pub const METRES_PER_FOOT: f64 = 0.3048;

/// A length in metres with as many places as a tape measure needs: "12.35 m", "3.2 mm" below a centimetre.
#[must_use]
pub fn metres(length_m: f64) -> String {
    if length_m != 0.0 && length_m.abs() < 0.01 {
        format!("{} mm", trimmed(length_m * 1e3, 2))
    } else {
        format!("{} m", trimmed(length_m, 2))
    }
}

/// A length in feet and whole inches: "40 ft 6 in".
#[must_use]
pub fn feet_and_inches(length_m: f64) -> String {
    let inches = (length_m.abs() / METRES_PER_FOOT * 12.0).round();
    let sign = if length_m < 0.0 && inches > 0.0 { "-" } else { "" };
    let (feet, rest) = ((inches / 12.0).floor(), inches % 12.0);
    match (feet > 0.0, rest > 0.0) {
        (true, true) => format!("{sign}{feet} ft {rest} in"),
        (true, false) => format!("{sign}{feet} ft"),
        _ => format!("{sign}{rest} in"),
    }
}

/// Both: "12.35 m (40 ft 6 in)".
#[must_use]
pub fn metres_and_feet(length_m: f64) -> String {
    format!("{} ({})", metres(length_m), feet_and_inches(length_m))
}

/// A value with three significant figures and an SI prefix: `engineering(7.1e6, "Hz")` is "7.1 MHz".
/// `unit` is the unit without prefix; zero and values beyond the prefixes stay plain.
#[must_use]
pub fn engineering(value: f64, unit: &str) -> String {
    const PREFIXES: [(f64, &str); 8] =
        [(1e9, "G"), (1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "u"), (1e-9, "n"), (1e-12, "p")];
    let size = value.abs();
    // 0.9995 of a prefix rounds up into it.
    let (scale, prefix) = PREFIXES.iter().find(|(s, _)| size >= 0.9995 * s).copied().unwrap_or((1.0, ""));
    let scaled = value / scale;
    let places = if scaled.abs() >= 99.95 {
        0
    } else if scaled.abs() >= 9.995 {
        1
    } else {
        2
    };
    format!("{} {prefix}{unit}", trimmed(scaled, places))
}

fn trimmed(value: f64, places: usize) -> String {
    let text = format!("{value:.places$}");
    let text = if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { &text };
    if text == "-0" { "0".to_owned() } else { text.to_owned() }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lengths_read_as_on_a_tape() {
        assert_eq!(metres_and_feet(12.35), "12.35 m (40 ft 6 in)");
        assert_eq!(metres_and_feet(0.3048), "0.3 m (1 ft)");
        assert_eq!(metres(0.0032), "3.2 mm");
        assert_eq!(metres(0.0), "0 m");
        assert_eq!(feet_and_inches(-0.0254 * 18.0), "-1 ft 6 in");
        assert_eq!(feet_and_inches(0.3047), "1 ft", "eleven point nine inches carry into a foot");
    }

    #[test]
    fn prefixes_follow_the_size() {
        assert_eq!(engineering(7.1e6, "Hz"), "7.1 MHz");
        assert_eq!(engineering(2450.0, "ohm"), "2.45 kohm");
        assert_eq!(engineering(999.96, "ohm"), "1 kohm");
        assert_eq!(engineering(0.0, "W"), "0 W");
        assert_eq!(engineering(120e-12, "F"), "120 pF");
    }
}
