//! What `cut` answers: one or two lengths scanned over every frequency and variant, the lengths to avoid, the choice.
//!
//! Arrays are `[variant][frequency][length]`, and with a second conductor `[variant][frequency][length][second]`.
//! `variants[0]` is always "nominal", the station as written.

use super::place::{LimitsOutcome, WorstCase};
use crate::layout::Warning;
use num_complex::Complex64;
use serde::{Deserialize, Serialize};

/// Values of a scan over one length or over two.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
#[serde(untagged)]
pub enum OverLength<T> {
    /// `[variant][frequency][length]`.
    One(Vec<Vec<Vec<T>>>),
    /// `[variant][frequency][length][second]`.
    Two(Vec<Vec<Vec<Vec<T>>>>),
}

impl<T> OverLength<T> {
    /// The value at these indices; `second` is 0 where one length was scanned. `None` outside the axes.
    #[must_use]
    pub fn get(&self, variant: usize, frequency: usize, length: usize, second: usize) -> Option<&T> {
        match self {
            Self::One(values) if second == 0 => values.get(variant)?.get(frequency)?.get(length),
            Self::One(_) => None,
            Self::Two(values) => values.get(variant)?.get(frequency)?.get(length)?.get(second),
        }
    }
}

/// The answer of `cut`. Currents and voltages are RMS magnitudes at the operating power.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct CutOutcome {
    /// Version of the program.
    pub braidwise: String,
    /// Title of the station.
    pub station: String,
    /// Net power into the line at the radio end, W.
    pub power_w: f64,
    /// What a length must keep.
    pub limits: LimitsOutcome,
    /// Names; the first is "nominal".
    pub variants: Vec<String>,
    /// Hz.
    pub frequencies_hz: Vec<f64>,
    /// Band of each frequency, where it came from a band; empty or as long as `frequencies_hz`.
    #[serde(default)]
    pub bands: Vec<Option<String>>,
    /// The conductor whose length is scanned.
    pub conductor: String,
    /// Which end moves, in words ("the radio's end of the coax").
    pub moving_end: String,
    /// Its length in the file, m.
    pub present_length_m: f64,
    /// Lengths tried, m, ascending.
    pub lengths_m: Vec<f64>,
    /// A conductor scanned jointly.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub second_conductor: Option<String>,
    /// Its lengths, m, ascending.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub second_lengths_m: Option<Vec<f64>>,
    /// Current on the shield going on into the shack, A.
    pub entry_current_a: OverLength<f64>,
    /// Potential of the shield at the entry, V; `None` below the surface.
    pub entry_voltage_v: OverLength<Option<f64>>,
    /// Potential of the shield where it meets the radio, V; `None` below the surface.
    pub end_voltage_v: OverLength<Option<f64>>,
    /// Largest current within a metre of the radio end, A.
    pub last_metre_current_a: OverLength<f64>,
    /// Impedance between hot and cold terminal, ohm.
    pub feed_ohm: OverLength<Complex64>,
    /// Standing-wave ratio at the radio.
    pub swr: OverLength<f64>,
    /// Radiated power over input power.
    pub radiated_fraction: OverLength<f64>,
    /// Where a conductor is near a resonance or a limit is broken.
    pub lengths_to_avoid: Vec<LengthToAvoid>,
    /// The answer in one word.
    pub verdict: CutVerdict,
    /// The reason in one sentence.
    pub why: String,
    /// Best first; the second is the runner-up.
    pub picks: Vec<CutPick>,
    /// Lengths that can be bought, best first.
    #[serde(default)]
    pub stock: Vec<StockOutcome>,
    /// How the best match moves with length.
    #[serde(default)]
    pub trim: Vec<TrimOutcome>,
    /// Everything doubtful.
    #[serde(default)]
    pub warnings: Vec<Warning>,
}

/// A length at which something is at its worst.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct LengthToAvoid {
    /// Hz.
    pub frequency_hz: f64,
    /// Name of the variant.
    pub variant: String,
    /// m.
    pub length_m: f64,
    /// Name of the quantity as in the arrays, with its unit.
    pub quantity: String,
    /// Its value.
    pub value: f64,
}

/// The answer of `cut` in a word.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Serialize, Deserialize)]
pub enum CutVerdict {
    /// The length in the file keeps the limits and no other does better by much.
    #[serde(rename = "keep")]
    Keep,
    /// The first pick keeps the limits.
    #[serde(rename = "cut")]
    Cut,
    /// Nothing does; picks are the least bad.
    #[serde(rename = "no length meets the limits")]
    NoLength,
}

/// One choice of length, or of two.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct CutPick {
    /// m.
    pub length_m: f64,
    /// m, where two are scanned.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub second_length_m: Option<f64>,
    /// From where to where the (first) length may lie and still hold, m.
    pub window_m: [f64; 2],
    /// The worst case over frequencies and variants.
    pub worst: WorstCase,
    /// The reason in one sentence.
    pub why: String,
}

/// A length that can be bought.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct StockOutcome {
    /// As the person wrote it ("33 ft").
    pub name: String,
    /// m.
    pub length_m: f64,
    /// All limits kept.
    pub within_limits: bool,
    /// The worst case over frequencies and variants.
    pub worst: WorstCase,
}

/// How far the frequency of the best match moves when the moving end is trimmed.
#[derive(Debug, Clone, PartialEq, Serialize, Deserialize)]
pub struct TrimOutcome {
    /// Hz, where the match is best at the chosen length.
    pub frequency_hz: f64,
    /// Change of that frequency with length, Hz/m (negative: shorter is higher).
    pub hz_per_m: f64,
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    /// A complex leaf is itself a pair, so a scan over one length of pairs must not be taken for one over two lengths.
    #[test]
    fn nested_arrays_come_back_with_the_same_number_of_axes() {
        let one = OverLength::One(vec![vec![vec![Complex64::new(1.5, -2.0); 2]; 3]; 2]);
        let text = serde_json::to_string(&one).unwrap();
        assert!(text.starts_with("[[[[1.5,-2.0],"), "{text}");
        assert_eq!(serde_json::from_str::<OverLength<Complex64>>(&text).unwrap(), one);
        let two = OverLength::Two(vec![vec![vec![vec![Complex64::new(1.0, 3.0); 2]; 2]; 1]; 1]);
        let text = serde_json::to_string(&two).unwrap();
        assert_eq!(serde_json::from_str::<OverLength<Complex64>>(&text).unwrap(), two);
        let volts = OverLength::One(vec![vec![vec![Some(1.0), None]]]);
        let text = serde_json::to_string(&volts).unwrap();
        assert_eq!(text, "[[[1.0,null]]]");
        assert_eq!(serde_json::from_str::<OverLength<Option<f64>>>(&text).unwrap(), volts);
        assert_eq!(volts.get(0, 0, 0, 1), None);
    }
}
