//! Quantities as a person writes them: a number and its unit, or feet with inches.

use std::fmt;

/// Why a text is no quantity of the kind wanted, and what to write.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Misread {
    /// What is wrong with it.
    pub reason: String,
    /// What to write instead.
    pub mend: String,
}

impl fmt::Display for Misread {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}: {}", self.reason, self.mend)
    }
}

impl std::error::Error for Misread {}

/// A kind of quantity: what it is called, the way to write one, its units in SI.
struct Kind {
    what: &'static str,
    example: &'static str,
    /// Base units that take SI prefixes; compared without regard to case.
    bases: &'static [&'static str],
    /// Units with a factor of their own, compared without regard to case.
    plain: &'static [(&'static str, f64)],
    /// "mHz" can only be meant as MHz.
    m_is_mega: bool,
}

const LENGTH: Kind = Kind {
    what: "length",
    example: "\"12.5 m\", \"41 ft\", \"16 ft 3 in\" or \"1.6 mm\"",
    bases: &[],
    plain: &[
        ("m", 1.0),
        ("metre", 1.0),
        ("metres", 1.0),
        ("meter", 1.0),
        ("meters", 1.0),
        ("km", 1e3),
        ("cm", 1e-2),
        ("mm", 1e-3),
        ("um", 1e-6),
        ("ft", 0.3048),
        ("foot", 0.3048),
        ("feet", 0.3048),
        ("'", 0.3048),
        ("in", 0.0254),
        ("inch", 0.0254),
        ("inches", 0.0254),
        ("\"", 0.0254),
        ("yd", 0.9144),
        ("yard", 0.9144),
        ("yards", 0.9144),
    ],
    m_is_mega: false,
};
const FREQUENCY: Kind = Kind { what: "frequency", example: "\"7.1 MHz\"", bases: &["Hz"], plain: &[], m_is_mega: true };
const POWER: Kind =
    Kind { what: "power", example: "\"100 W\"", bases: &["W", "watt", "watts"], plain: &[], m_is_mega: false };
const RESISTANCE: Kind = Kind {
    what: "resistance",
    example: "\"50 ohm\" or \"2.45 kohm\"",
    bases: &["ohm", "ohms", "Ω"],
    plain: &[],
    m_is_mega: false,
};
const CONDUCTIVITY: Kind =
    Kind { what: "conductivity", example: "\"5 mS/m\" or \"58 MS/m\"", bases: &["S/m"], plain: &[], m_is_mega: false };
const CAPACITANCE: Kind =
    Kind { what: "capacitance", example: "\"120 pF\"", bases: &["F"], plain: &[], m_is_mega: false };
const INDUCTANCE: Kind =
    Kind { what: "inductance", example: "\"3.3 uH\"", bases: &["H"], plain: &[], m_is_mega: false };
const CURRENT: Kind = Kind { what: "current", example: "\"20 mA\"", bases: &["A"], plain: &[], m_is_mega: false };
const DECIBEL: Kind =
    Kind { what: "loss in dB", example: "\"4.6 dB\"", bases: &[], plain: &[("dB", 1.0)], m_is_mega: false };
const ANGLE: Kind = Kind {
    what: "angle",
    example: "20 or \"20 deg\"",
    bases: &[],
    plain: &[("deg", 1.0), ("°", 1.0), ("degree", 1.0), ("degrees", 1.0)],
    m_is_mega: false,
};
const FRACTION: Kind =
    Kind { what: "share", example: "0.66 or \"66 %\"", bases: &[], plain: &[("%", 0.01)], m_is_mega: false };
const AREA: Kind = Kind {
    what: "cross-section",
    example: "\"1.5 mm2\"",
    bases: &[],
    plain: &[("mm2", 1e-6), ("mm²", 1e-6), ("mm^2", 1e-6)],
    m_is_mega: false,
};
const GAUGE: Kind =
    Kind { what: "wire gauge", example: "\"14 AWG\"", bases: &[], plain: &[("AWG", 1.0)], m_is_mega: false };
const KINDS: [&Kind; 13] = [
    &LENGTH,
    &FREQUENCY,
    &POWER,
    &RESISTANCE,
    &CONDUCTIVITY,
    &CAPACITANCE,
    &INDUCTANCE,
    &CURRENT,
    &DECIBEL,
    &ANGLE,
    &FRACTION,
    &AREA,
    &GAUGE,
];

impl Kind {
    fn factor(&self, unit: &str) -> Option<f64> {
        if let Some((_, factor)) = self.plain.iter().find(|(name, _)| unit.eq_ignore_ascii_case(name)) {
            return Some(*factor);
        }
        self.bases.iter().find_map(|base| {
            let at = unit.len().checked_sub(base.len())?;
            let (prefix, tail) = (unit.get(..at)?, unit.get(at..)?);
            if !tail.eq_ignore_ascii_case(base) {
                return None;
            }
            match prefix {
                "" => Some(1.0),
                "m" | "M" if self.m_is_mega => Some(1e6),
                "g" if self.m_is_mega => Some(1e9),
                "G" => Some(1e9),
                "M" => Some(1e6),
                "k" | "K" => Some(1e3),
                "m" => Some(1e-3),
                "u" | "µ" | "μ" => Some(1e-6),
                "n" => Some(1e-9),
                "p" => Some(1e-12),
                _ => None,
            }
        })
    }

    fn misread(&self, reason: String) -> Misread {
        Misread { reason, mend: format!("write {}", self.example) }
    }

    /// One number with one unit.
    fn read(&self, text: &str) -> Result<f64, Misread> {
        match self.parts(text)?.as_slice() {
            [(number, unit)] => self.value(text, *number, unit),
            _ => Err(self.misread(format!("`{text}` is more than one quantity"))),
        }
    }

    fn value(&self, text: &str, number: f64, unit: &str) -> Result<f64, Misread> {
        if unit.is_empty() {
            return Err(self.misread(format!("`{text}` has no unit")));
        }
        let Some(factor) = self.factor(unit) else {
            let reason = match KINDS.iter().find(|kind| kind.factor(unit).is_some()) {
                Some(other) => format!("`{text}` is {}, not {}", with_article(other.what), with_article(self.what)),
                None => format!("`{unit}` is not a unit of {}", self.what),
            };
            return Err(self.misread(reason));
        };
        let value = number * factor;
        if value.is_finite() { Ok(value) } else { Err(self.misread(format!("`{text}` is too large"))) }
    }

    /// Numbers and the units behind them.
    fn parts(&self, text: &str) -> Result<Vec<(f64, String)>, Misread> {
        let text = text.trim();
        if text.is_empty() {
            return Err(self.misread(format!("an empty text is no {}", self.what)));
        }
        let mut rest = text;
        let mut parts = Vec::new();
        while !rest.is_empty() {
            let digits = number_length(rest);
            let after = &rest[digits..];
            if after.starts_with(',') {
                return Err(Misread {
                    reason: format!("`{text}` has a comma"),
                    mend: format!(
                        "write a point, not a comma, and nothing between thousands: \"{}\"",
                        text.replace(',', ".")
                    ),
                });
            }
            let Ok(number) = rest[..digits].parse::<f64>() else {
                return Err(self.misread(format!("`{text}` is not a number with a unit")));
            };
            let after = after.trim_start();
            let unit_end = after
                .char_indices()
                .find(|(at, c)| {
                    c.is_whitespace()
                        || (c.is_ascii_digit() && !ends_in_power(&after[..*at], *c))
                        || "+-.,".contains(*c)
                })
                .map_or(after.len(), |(at, _)| at);
            // A prime stands directly before the inches: 16'3".
            let unit_end = if after.starts_with(['\'', '′', '’']) {
                after.chars().next().map_or(1, char::len_utf8)
            } else {
                unit_end
            };
            parts.push((number, plain_unit(&after[..unit_end])));
            rest = after[unit_end..].trim_start();
        }
        Ok(parts)
    }
}

fn with_article(what: &str) -> String {
    format!("{} {what}", if what.starts_with(['a', 'e', 'i', 'o', 'u']) { "an" } else { "a" })
}

/// "mm2" and "mm^2" end in a digit that belongs to the unit.
fn ends_in_power(unit: &str, next: char) -> bool {
    next == '2' && (unit.eq_ignore_ascii_case("mm") || unit.eq_ignore_ascii_case("mm^"))
}

/// Typographic primes and quotes as the plain ones.
fn plain_unit(unit: &str) -> String {
    match unit {
        "′" | "’" => "'".to_owned(),
        "″" | "”" | "''" | "’’" | "′′" => "\"".to_owned(),
        other => other.to_owned(),
    }
}

/// How many bytes at the start are a decimal number.
fn number_length(text: &str) -> usize {
    let bytes = text.as_bytes();
    let digits = |from: usize| bytes[from..].iter().take_while(|b| b.is_ascii_digit()).count();
    let mut at = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    let whole = digits(at);
    at += whole;
    let mut places = 0;
    if bytes.get(at) == Some(&b'.') {
        places = digits(at + 1);
        at += 1 + places;
    }
    if whole + places == 0 {
        return 0;
    }
    if matches!(bytes.get(at), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(at + 1), Some(b'+' | b'-')));
        let power = if at + 1 + sign <= bytes.len() { digits(at + 1 + sign) } else { 0 };
        if power > 0 {
            at += 1 + sign + power;
        }
    }
    at
}

/// A length in metres: "41 ft", "16'3\"", "66 ft 6 in", "20.2 m", "1.6 mm".
///
/// # Errors
/// [`Misread`] when it is none.
pub fn length_m(text: &str) -> Result<f64, Misread> {
    match LENGTH.parts(text)?.as_slice() {
        [(number, unit)] => LENGTH.value(text, *number, unit),
        [(feet, foot), (inches, inch)] => {
            let factors = (LENGTH.factor(foot), LENGTH.factor(inch));
            if factors != (Some(0.3048), Some(0.0254)) {
                return Err(
                    LENGTH.misread(format!("`{text}` is more than one length; only feet and inches go together"))
                );
            }
            if *inches < 0.0 || *inches >= 12.0 {
                return Err(LENGTH.misread(format!("`{text}`: inches behind feet run from 0 to below 12")));
            }
            let sign = if text.trim_start().starts_with('-') { -1.0 } else { 1.0 };
            let value = feet * 0.3048 + sign * inches * 0.0254;
            if value.is_finite() { Ok(value) } else { Err(LENGTH.misread(format!("`{text}` is too large"))) }
        }
        _ => Err(LENGTH.misread(format!("`{text}` is more than one length"))),
    }
}

/// Diameter in metres of a round wire: a length, an American wire gauge, or a cross-section.
///
/// # Formula
/// d = 0.005 in · 92^((36 − n)/39) for gauge n, 0000 being −3 (ASTM B258); d = 2 √(A/π) for a cross-section A.
///
/// # Errors
/// [`Misread`] when it is none of the three.
pub fn wire_diameter_m(text: &str) -> Result<f64, Misread> {
    let lower = text.trim().to_ascii_lowercase();
    if lower.starts_with("awg") || lower.ends_with("awg") {
        let number = lower.trim_start_matches("awg").trim_end_matches("awg").trim();
        return gauge(number).map(|n| 0.005 * 0.0254 * 92f64.powf((36.0 - n) / 39.0)).ok_or_else(|| Misread {
            reason: format!("`{text}` is not an American wire gauge"),
            mend: "write a whole number from 0 to 56, or 1/0 to 4/0: \"14 AWG\"".to_owned(),
        });
    }
    if let Ok(area) = AREA.read(text) {
        return if area >= 0.0 { Ok(2.0 * (area / std::f64::consts::PI).sqrt()) } else { Ok(area) };
    }
    length_m(text).map_err(|m| Misread { mend: format!("{}, \"14 AWG\" or \"1.5 mm2\"", m.mend), ..m })
}

fn gauge(number: &str) -> Option<f64> {
    match number {
        "00" | "2/0" => Some(-1.0),
        "000" | "3/0" => Some(-2.0),
        "0000" | "4/0" => Some(-3.0),
        "1/0" => Some(0.0),
        other => other.parse::<u8>().ok().filter(|n| *n <= 56).map(f64::from),
    }
}

/// A transformer's impedance ratio, antenna side over radio side: "49:1" is 49, "1:4" is 0.25.
///
/// # Errors
/// [`Misread`] when it is not two numbers with a colon between them.
pub fn ratio(text: &str) -> Result<f64, Misread> {
    let misread = || Misread {
        reason: format!("`{text}` is not a ratio"),
        mend: "write \"49:1\", the antenna side first".to_owned(),
    };
    let (top, bottom) = text.split_once(':').ok_or_else(misread)?;
    let number = |t: &str| {
        let t = t.trim();
        if number_length(t) == t.len() { t.parse::<f64>().ok() } else { None }
    };
    match (number(top), number(bottom)) {
        (Some(t), Some(b)) if (t / b).is_finite() => Ok(t / b),
        _ => Err(misread()),
    }
}

macro_rules! readers {
    ($($(#[$doc:meta])* $name:ident = $kind:ident;)*) => {$(
        $(#[$doc])*
        ///
        /// # Errors
        /// [`Misread`] when it is none.
        pub fn $name(text: &str) -> Result<f64, Misread> {
            $kind.read(text)
        }
    )*};
}

readers! {
    /// A frequency in hertz: "7.1 MHz".
    frequency_hz = FREQUENCY;
    /// A power in watts: "100 W".
    power_w = POWER;
    /// A resistance, reactance or impedance in ohm: "2.45 kohm".
    resistance_ohm = RESISTANCE;
    /// A conductivity in siemens per metre: "5 mS/m".
    conductivity_s_per_m = CONDUCTIVITY;
    /// A capacitance in farad: "120 pF".
    capacitance_f = CAPACITANCE;
    /// An inductance in henry: "3.3 uH".
    inductance_h = INDUCTANCE;
    /// A current in ampere: "20 mA".
    current_a = CURRENT;
    /// A loss in decibel: "4.6 dB".
    decibel = DECIBEL;
    /// An angle in degrees: "20 deg".
    degrees = ANGLE;
    /// A share as a fraction of one: "35 %" is 0.35.
    fraction = FRACTION;
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    fn near(got: f64, want: f64) -> bool {
        (got - want).abs() <= 1e-12 * want.abs()
    }

    #[test]
    fn lengths_in_every_spelling() {
        for (text, want) in [
            ("41 ft", 41.0 * 0.3048),
            ("16'3\"", 16.25 * 0.3048),
            ("16' 3\"", 16.25 * 0.3048),
            ("16′3″", 16.25 * 0.3048),
            ("66 ft 6 in", 66.5 * 0.3048),
            ("66ft6in", 66.5 * 0.3048),
            ("-1 ft 6 in", -1.5 * 0.3048),
            ("20.2 m", 20.2),
            ("1.6mm", 1.6e-3),
            ("1 cm", 0.01),
            ("5 in", 0.127),
            ("1e-3 m", 1e-3),
            (".5 m", 0.5),
            ("5e1 ft", 50.0 * 0.3048),
        ] {
            assert!(near(length_m(text).unwrap(), want), "{text}: {:?}", length_m(text));
        }
    }

    #[test]
    fn gauges_follow_astm_b258() {
        // Table values of ASTM B258, mils: 14 AWG 64.1, 4/0 460.0, 36 AWG 5.0.
        for (text, mils, tolerance) in
            [("14 AWG", 64.1, 0.05), ("4/0 AWG", 460.0, 0.05), ("AWG 36", 5.0, 1e-9), ("0000awg", 460.0, 0.05)]
        {
            let got = wire_diameter_m(text).unwrap() / 2.54e-5;
            assert!((got - mils).abs() <= tolerance, "{text}: {got} mils");
        }
        assert!(near(wire_diameter_m("1.5 mm2").unwrap(), 2.0 * (1.5e-6 / std::f64::consts::PI).sqrt()));
        assert!(near(wire_diameter_m("1.6 mm").unwrap(), 1.6e-3));
        assert!(wire_diameter_m("14.5 AWG").is_err());
    }

    #[test]
    fn prefixes_and_their_case() {
        assert!(near(frequency_hz("7.1 MHz").unwrap(), 7.1e6));
        assert!(near(frequency_hz("7100 khz").unwrap(), 7.1e6));
        assert!(near(frequency_hz("7.1 mHz").unwrap(), 7.1e6));
        assert!(near(resistance_ohm("1 mohm").unwrap(), 1e-3));
        assert!(near(resistance_ohm("1 Mohm").unwrap(), 1e6));
        assert!(near(resistance_ohm("2.45 kΩ").unwrap(), 2450.0));
        assert!(near(conductivity_s_per_m("5 mS/m").unwrap(), 5e-3));
        assert!(near(conductivity_s_per_m("58 MS/m").unwrap(), 58e6));
        assert!(near(conductivity_s_per_m("5.8e7 S/m").unwrap(), 58e6));
        assert!(near(capacitance_f("120 pF").unwrap(), 120e-12));
        assert!(near(inductance_h("3.3 µH").unwrap(), 3.3e-6));
        assert!(near(fraction("35 %").unwrap(), 0.35));
        assert!(near(current_a("20 mA").unwrap(), 0.02));
        assert!(near(ratio("49:1").unwrap(), 49.0));
        assert!(near(ratio("1 : 4").unwrap(), 0.25));
    }

    #[test]
    fn refusals_say_what_to_write() {
        assert_eq!(
            frequency_hz("7,1 MHz").unwrap_err().to_string(),
            "`7,1 MHz` has a comma: write a point, not a comma, and nothing between thousands: \"7.1 MHz\""
        );
        assert!(length_m("41").unwrap_err().reason.contains("no unit"));
        assert!(length_m("7 MHz").unwrap_err().reason.contains("is a frequency, not a length"));
        assert!(length_m("7 furlongs").unwrap_err().reason.contains("`furlongs`"));
        for text in [
            "",
            "ft",
            "- m",
            "1 m 2 m",
            "1 ft 13 in",
            "1 ft 2 in 3 in",
            "inf m",
            "NaN m",
            "1e999 m",
            "0x10 m",
            "é m",
            "1 é",
            "1.2.3 m",
        ] {
            assert!(length_m(text).is_err(), "{text}");
        }
        for text in ["49", "49:", "a:b", "1:0", "49:1:1"] {
            assert!(ratio(text).is_err(), "{text}");
        }
    }
}
