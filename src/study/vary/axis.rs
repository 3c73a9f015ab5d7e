//! One value varied: a range in equal steps, or a list.

use crate::quantity;

/// More values than this on one axis, or points altogether, are taken for a slip of the pen.
pub const MOST_POINTS: usize = 1_000_000;

/// A value of the file by its path, and what it is to be.
#[derive(Debug, Clone, PartialEq)]
pub struct Axis {
    /// Path of the value: `coax.length`.
    pub path: String,
    /// The values.
    pub values: Values,
}

/// The values of an axis.
#[derive(Debug, Clone, PartialEq)]
pub enum Values {
    /// From one number to another, with a unit behind them ("" for none).
    Range {
        /// First.
        from: f64,
        /// Largest.
        to: f64,
        /// Step; `None` where only samples between the ends are wanted.
        by: Option<f64>,
        /// Unit.
        unit: String,
    },
    /// One of these, as they would be typed.
    List(Vec<String>),
}

/// Why a text is no axis.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
#[error("--over '{text}': {reason}; {mend}")]
pub struct AxisError {
    /// What was typed.
    pub text: String,
    /// What is wrong with it.
    pub reason: String,
    /// What to write.
    pub mend: String,
}

impl Axis {
    /// Reads `PATH = 4 m .. 25 m by 0.5 m`, `PATH = 4 m .. 25 m` or `PATH = "wet meadow" | "dry sand"`.
    ///
    /// A unit may stand at any of the numbers of a range and then holds for all; numbers with different units of one kind are
    /// brought to SI.
    ///
    /// # Errors
    /// [`AxisError`] for anything else, and for ranges that are empty, reversed or without end.
    pub fn read(text: &str) -> Result<Self, AxisError> {
        let error = |reason: String, mend: &str| AxisError { text: text.to_owned(), reason, mend: mend.to_owned() };
        let example =
            "write for example 'coax.length = 5 m .. 25 m by 0.5 m' or 'earth.soil = \"wet meadow\" | \"dry sand\"'";
        let Some((path, values)) = text.split_once('=') else {
            return Err(error("there is no `=`".to_owned(), example));
        };
        let (path, values) = (path.trim().to_owned(), values.trim());
        if path.is_empty() || values.is_empty() {
            return Err(error("a path and its values are wanted".to_owned(), example));
        }
        let listed = outside_quotes(values, "|");
        if listed.len() > 1 {
            let list: Vec<String> = listed.iter().map(|v| plain(v)).collect();
            if list.iter().any(String::is_empty) {
                return Err(error("the list has an empty place".to_owned(), example));
            }
            if let Some(twice) = list.iter().enumerate().find(|(n, v)| list[..*n].contains(v)) {
                return Err(error(format!("{} stands there twice", twice.1), "name each value once"));
            }
            return Ok(Self { path, values: Values::List(list) });
        }
        match outside_quotes(values, "..").as_slice() {
            [from, rest] => match range(from, rest) {
                Ok(values) => Ok(Self { path, values }),
                Err((reason, mend)) => Err(error(reason, mend)),
            },
            _ => Ok(Self { path, values: Values::List(vec![plain(values)]) }),
        }
    }

    /// How many values a grid takes; `None` for a range without a step.
    #[must_use]
    pub fn count(&self) -> Option<usize> {
        match &self.values {
            Values::List(list) => Some(list.len()),
            Values::Range { from, to, by, .. } => by.map(|by| ((to - from) / by + 1e-9).floor() as usize + 1),
        }
    }

    /// The value of a grid at an index below [`Axis::count`], as it would be typed.
    #[must_use]
    pub fn at(&self, index: usize) -> String {
        match &self.values {
            Values::List(list) => list[index].clone(),
            Values::Range { from, by, unit, .. } => typed(from + by.unwrap_or(0.0) * index as f64, unit),
        }
    }

    /// The value at a share of the axis, 0 to 1 (1 not reached), as it would be typed: with a step, the step it falls on.
    #[must_use]
    pub fn at_share(&self, share: f64) -> String {
        match (&self.values, self.count()) {
            (Values::Range { from, to, by: None, unit }, _) => typed(from + share * (to - from), unit),
            (_, count) => {
                let count = count.unwrap_or(1);
                self.at(((share * count as f64) as usize).min(count - 1))
            }
        }
    }
}

type Mended = (String, &'static str);

/// Reads a text as a quantity in SI.
type Reader = fn(&str) -> Result<f64, quantity::Misread>;

fn range(from: &str, rest: &str) -> Result<Values, Mended> {
    let (to, by) = match rest.rsplit_once("by") {
        Some((to, by)) => (to, Some(by)),
        None => (rest, None),
    };
    let mut texts = vec![from.trim(), to.trim()];
    texts.extend(by.map(str::trim));
    let (numbers, unit) = numbers(&texts)?;
    let (from, to, by) = (numbers[0], numbers[1], numbers.get(2).copied());
    if from > to {
        return Err((format!("the range runs backwards, from {from} to {to}"), "put the smaller end first"));
    }
    if by.is_some_and(|by| by <= 0.0) {
        return Err(("the step is not above zero".to_owned(), "give a step above zero"));
    }
    if by.is_some_and(|by| (to - from) / by >= MOST_POINTS as f64) {
        return Err((format!("the step makes more than {MOST_POINTS} values"), "give a longer step"));
    }
    Ok(Values::Range { from, to, by, unit })
}

/// The numbers in one unit: the one they share, or SI where they differ.
fn numbers(texts: &[&str]) -> Result<(Vec<f64>, String), Mended> {
    let split: Option<Vec<(f64, &str)>> = texts.iter().map(|t| number_and_unit(t)).collect();
    if let Some(split) = split {
        let mut units = split.iter().map(|s| s.1).filter(|u| !u.is_empty());
        let first = units.next().unwrap_or("");
        if units.all(|u| u == first) {
            return Ok((split.iter().map(|s| s.0).collect(), first.to_owned()));
        }
    }
    let kinds: [(Reader, &str); 8] = [
        (quantity::length_m, "m"),
        (quantity::frequency_hz, "Hz"),
        (quantity::power_w, "W"),
        (quantity::resistance_ohm, "ohm"),
        (quantity::conductivity_s_per_m, "S/m"),
        (quantity::capacitance_f, "F"),
        (quantity::inductance_h, "H"),
        (quantity::current_a, "A"),
    ];
    for (read, unit) in kinds {
        let values: Result<Vec<f64>, _> = texts.iter().map(|t| read(t)).collect();
        if let Ok(values) = values {
            return Ok((values, unit.to_owned()));
        }
    }
    let reason = format!("{} are not quantities of one kind", texts.join(", "));
    Err((reason, "write both ends and the step with the same unit: 4 m .. 25 m by 0.5 m"))
}

/// "4 m" into 4 and "m"; `None` where the text is no single finite number with something without digits behind it.
fn number_and_unit(text: &str) -> Option<(f64, &str)> {
    let end = text.find(|c: char| !(c.is_ascii_digit() || "+-.eE".contains(c))).unwrap_or(text.len());
    // "5 e" and the like: the unit's own e is not the number's
    let end = if text[..end].parse::<f64>().is_ok() { end } else { end.checked_sub(1)? };
    let number = text.get(..end)?.parse::<f64>().ok().filter(|n| n.is_finite())?;
    let unit = text[end..].trim();
    let one_unit = !unit.chars().any(|c| c.is_ascii_digit() && !unit.starts_with("mm"));
    one_unit.then_some((number, unit))
}

/// A number and unit as typed; rounding of steps taken off at twelve figures.
fn typed(value: f64, unit: &str) -> String {
    let rounded = format!("{value:.11e}").parse::<f64>().unwrap_or(value);
    // no "-0"
    let rounded = if rounded == 0.0 { 0.0 } else { rounded };
    if unit.is_empty() { format!("{rounded}") } else { format!("{rounded} {unit}") }
}

/// Splits at a separator that stands outside quotation marks and brackets.
fn outside_quotes<'a>(text: &'a str, separator: &str) -> Vec<&'a str> {
    let (mut parts, mut start, mut quoted, mut depth) = (Vec::new(), 0, false, 0_i32);
    for (at, c) in text.char_indices() {
        // an inch mark follows a digit: 16'3"
        let inch = c == '"' && !quoted && text[..at].ends_with(|c: char| c.is_ascii_digit());
        match c {
            '"' if !inch => quoted = !quoted,
            '[' | '{' if !quoted => depth += 1,
            ']' | '}' if !quoted => depth -= 1,
            _ => {}
        }
        if !quoted && depth == 0 && at >= start && text[at..].starts_with(separator) {
            parts.push(text[start..at].trim());
            start = at + separator.len();
        }
    }
    parts.push(text[start.min(text.len())..].trim());
    parts
}

/// A value without quotation marks that only said it was a text.
fn plain(text: &str) -> String {
    let text = text.trim();
    match text.strip_prefix('"').and_then(|t| t.strip_suffix('"')) {
        Some(inside)
            if inside.starts_with(char::is_alphabetic) && !matches!(inside, "true" | "false" | "inf" | "nan") =>
        {
            inside.to_owned()
        }
        _ => text.to_owned(),
    }
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    fn grid(text: &str) -> Vec<String> {
        let axis = Axis::read(text).unwrap();
        (0..axis.count().unwrap()).map(|n| axis.at(n)).collect()
    }

    #[test]
    fn ranges_step_without_rounding_in_the_texts() {
        assert_eq!(grid("coax.length = 4 m .. 4.5 m by 0.1 m"), ["4 m", "4.1 m", "4.2 m", "4.3 m", "4.4 m", "4.5 m"]);
        assert_eq!(grid("earth.permittivity=5..15 by 5"), ["5", "10", "15"]);
        assert_eq!(grid("x.y = 1 .. 2 kohm by 0.5"), ["1 kohm", "1.5 kohm", "2 kohm"]);
        assert_eq!(grid("x.y = -1 m .. 1 m by 1 m"), ["-1 m", "0 m", "1 m"]);
        assert_eq!(grid("wire.a.gauge = 12 AWG .. 16 AWG by 2 AWG"), ["12 AWG", "14 AWG", "16 AWG"]);
    }

    #[test]
    fn units_of_one_kind_mix_and_feet_with_inches_are_lengths() {
        assert_eq!(grid("x.y = 1 ft .. 1 m by 0.3 m"), ["0.3048 m", "0.6048 m", "0.9048 m"]);
        assert_eq!(grid("x.y = 16'3\" .. 17 ft by 6 in"), ["4.953 m", "5.1054 m"]);
        let kinds = Axis::read("x.y = 4 m .. 25 MHz by 1 m").unwrap_err();
        assert!(kinds.reason.contains("not quantities of one kind"), "{kinds}");
    }

    #[test]
    fn lists_may_be_quoted_or_not() {
        assert_eq!(grid("earth.soil = \"wet meadow\" | \"dry sand\""), ["wet meadow", "dry sand"]);
        assert_eq!(grid("coax.length = 5 m | 7'2\" | 20 ft"), ["5 m", "7'2\"", "20 ft"]);
        assert_eq!(grid("radio.body = \"none\""), ["none"]);
        assert_eq!(grid("feed.transformer = {turns = [3, 21]} | {turns = [2, 14]}").len(), 2);
    }

    #[test]
    fn what_cannot_be_meant_is_refused() {
        for (text, reason) in [
            ("coax.length", "no `=`"),
            ("= 4 m .. 5 m by 1 m", "a path"),
            ("x.y = 25 m .. 4 m by 1 m", "backwards"),
            ("x.y = 4 m .. 25 m by 0 m", "not above zero"),
            ("x.y = 4 m .. 25 m by 1e-9 m", "more than"),
            ("x.y = a || b", "empty place"),
            ("x.y = 3 m | 3 m", "twice"),
        ] {
            let error = Axis::read(text).unwrap_err();
            assert!(error.reason.contains(reason), "{text}: {error}");
        }
    }
}
