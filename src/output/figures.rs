//! Numbers as a person reads them: three figures, a unit, never an exponent, never "NaN".

use super::Units;

/// Feet in a metre (international foot of 0.3048 m, exact).
pub(super) const FEET_PER_METRE: f64 = 1.0 / 0.3048;

/// What stands where there is no number.
pub(super) const MISSING: &str = "-";

/// Three significant figures without an exponent; whole numbers above 100.
pub(super) fn three(value: f64) -> String {
    if !value.is_finite() {
        return MISSING.to_string();
    }
    if value == 0.0 {
        return "0".to_string();
    }
    let digits = 2 - value.abs().log10().floor() as i32;
    let step = 10f64.powi(digits);
    let rounded = if digits >= 0 { (value * step).round() / step } else { value.round() };
    // 9.996 has become 10.0: one decimal fewer.
    let decimals = (2 - rounded.abs().max(1e-9).log10().floor() as i32).clamp(0, 6);
    format!("{rounded:.*}", decimals as usize)
}

/// Current with its unit.
pub(super) fn amperes(value_a: f64) -> String {
    match value_a.abs() {
        a if !a.is_finite() => MISSING.to_string(),
        a if a >= 0.9995 => format!("{} A", three(value_a)),
        a if a >= 1e-4 => format!("{} mA", three(1e3 * value_a)),
        _ => "under 0.1 mA".to_string(),
    }
}

/// RMS and peak current of a sinusoid, in one unit.
pub(super) fn amperes_rms_peak(rms_a: f64) -> String {
    rms_peak(rms_a, if rms_a >= 0.9995 { (1.0, "A") } else { (1e3, "mA") }, 1e-4)
}

/// RMS and peak voltage of a sinusoid, in one unit.
pub(super) fn volts_rms_peak(rms_v: f64) -> String {
    rms_peak(rms_v, if rms_v >= 9_999.5 { (1e-3, "kV") } else { (1.0, "V") }, 1e-2)
}

fn rms_peak(rms: f64, (scale, unit): (f64, &str), least: f64) -> String {
    if !rms.is_finite() {
        return MISSING.to_string();
    }
    if rms < least {
        return format!("under {} {unit}", three(least * scale));
    }
    format!("{} / {} {unit}", three(rms * scale), three(rms * scale * std::f64::consts::SQRT_2))
}

/// Voltage with its unit.
pub(super) fn volts(value_v: f64) -> String {
    match value_v.abs() {
        v if !v.is_finite() => MISSING.to_string(),
        v if v >= 9_999.5 => format!("{} kV", three(1e-3 * value_v)),
        v if v >= 1e-2 || v == 0.0 => format!("{} V", three(value_v)),
        _ => "under 0.01 V".to_string(),
    }
}

/// Power with its unit.
pub(super) fn watts(value_w: f64) -> String {
    match value_w.abs() {
        w if !w.is_finite() => MISSING.to_string(),
        w if w >= 1e-3 || w == 0.0 => format!("{} W", three(value_w)),
        _ => "under 1 mW".to_string(),
    }
}

/// A round value without the zeros behind its point: "25.0 mA" is "25 mA".
pub(super) fn round(said: &str) -> String {
    let (number, unit) = said.split_once(' ').map_or((said, String::new()), |(n, unit)| (n, format!(" {unit}")));
    let short = if number.contains('.') { number.trim_end_matches('0').trim_end_matches('.') } else { number };
    format!("{short}{unit}")
}

/// Resistance and reactance, "2450 + j120".
pub(super) fn complex_ohm(resistance_ohm: f64, reactance_ohm: f64) -> String {
    let sign = if reactance_ohm < 0.0 { '-' } else { '+' };
    format!("{} {sign} j{}", three(resistance_ohm), three(reactance_ohm.abs()))
}

/// Standing-wave ratio to two decimals below 10, "over 100" above that.
pub(super) fn swr(value: f64) -> String {
    match value {
        s if s.is_nan() => MISSING.to_string(),
        s if s > 100.0 => "over 100".to_string(),
        s if s >= 9.995 => format!("{s:.0}"),
        s => format!("{s:.2}"),
    }
}

/// A distance with its unit, to the centimetre or a tenth of a foot.
pub(super) fn distance(value_m: f64, units: Units) -> String {
    match units {
        _ if !value_m.is_finite() => MISSING.to_string(),
        Units::Metres => format!("{value_m:.2} m"),
        Units::Feet => format!("{:.1} ft", value_m * FEET_PER_METRE),
    }
}

/// From one distance to another, the unit said once.
pub(super) fn distances(from_m: f64, to_m: f64, units: Units) -> String {
    match units {
        Units::Metres => format!("{from_m:.2} to {to_m:.2} m"),
        Units::Feet => format!("{:.1} to {:.1} ft", from_m * FEET_PER_METRE, to_m * FEET_PER_METRE),
    }
}

/// A frequency in MHz without trailing zeros.
pub(super) fn megahertz(value_hz: f64) -> String {
    let text = format!("{:.4}", value_hz / 1e6);
    text.trim_end_matches('0').trim_end_matches('.').to_string()
}

/// Percent of a fraction, "48 %", one decimal below ten.
pub(super) fn percent(fraction: f64) -> String {
    match 100.0 * fraction {
        p if !p.is_finite() => MISSING.to_string(),
        p if p.abs() < 9.95 => format!("{p:.1} %"),
        p => format!("{p:.0} %"),
    }
}

/// Decibels of a power ratio with one decimal (two below 1 dB); a ratio of nothing has none.
pub(super) fn decibels(ratio: f64) -> String {
    if !(ratio > 0.0 && ratio.is_finite()) {
        return MISSING.to_string();
    }
    let value = 10.0 * ratio.log10();
    if value.abs() < 0.005 {
        "0 dB".to_string()
    } else if value.abs() < 0.95 {
        format!("{value:.2} dB")
    } else {
        format!("{value:.1} dB")
    }
}

/// The name of an array of an outcome, in words.
pub(super) fn quantity_name(key: &str) -> &str {
    match key {
        "entry_current_a" => "current into the shack",
        "last_metre_current_a" => "current in the last metre",
        "entry_voltage_v" => "voltage at the entry",
        "end_voltage_v" => "voltage at the radio",
        "choke_w" => "heat in the choke",
        "choke_v" => "voltage across the choke",
        "choke_a" => "current through the choke",
        "radiated_fraction" => "radiated part",
        "swr" => "SWR",
        other => other,
    }
}

/// A value of an array of an outcome with the unit its name ends in.
pub(super) fn quantity(key: &str, value: f64) -> String {
    match key.rsplit_once('_').map_or(key, |(_, unit)| unit) {
        "a" => amperes(value),
        "v" => volts(value),
        "w" => watts(value),
        "fraction" => percent(value),
        "ohm" => format!("{} ohm", three(value)),
        "m" => distance(value, Units::Metres),
        "swr" => swr(value),
        _ => three(value),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn three_figures_without_exponent() {
        for (value, text) in [
            (0.0, "0"),
            (9.996, "10.0"),
            (0.012345, "0.0123"),
            (2449.6, "2450"),
            (-117.2, "-117"),
            (99.96, "100"),
            (0.9999, "1.00"),
            (f64::NAN, MISSING),
            (f64::INFINITY, MISSING),
        ] {
            assert_eq!(three(value), text);
        }
    }

    #[test]
    fn units_follow_the_size() {
        assert_eq!(amperes(0.0204), "20.4 mA");
        assert_eq!(amperes(1.4127), "1.41 A");
        assert_eq!(amperes_rms_peak(0.1), "100 / 141 mA");
        assert_eq!(amperes_rms_peak(0.0), "under 0.100 mA");
        assert_eq!(volts(12_345.0), "12.3 kV");
        assert_eq!(complex_ohm(2450.4, -17.0), "2450 - j17.0");
        assert_eq!(distance(3.048, Units::Feet), "10.0 ft");
        assert_eq!(megahertz(7_100_000.0), "7.1");
        assert_eq!(megahertz(14_175_000.0), "14.175");
        assert_eq!(
            [round("25.0 mA"), round("0.250 A"), round("100 V"), round("2.00")],
            ["25 mA", "0.25 A", "100 V", "2"]
        );
        assert_eq!(swr(f64::INFINITY), "over 100");
        assert_eq!(decibels(0.5), "-3.0 dB");
        assert_eq!(decibels(0.0), MISSING);
    }
}
