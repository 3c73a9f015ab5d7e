//! Touchstone version 1.1 files of one port (`.s1p`).

use super::OutputError;
use num_complex::Complex64;
use std::io::Write;

/// Writes impedances as reflection coefficients against a reference.
///
/// Γ = (Z − R) / (Z + R), real and imaginary part, frequencies in Hz, ascending as the format asks, in the order of the
/// specification's option line: unit, parameter, format, R and the reference.
///
/// # Inputs
/// - `points`: frequency in Hz and impedance in ohm; a repeated frequency is written once, the first one given
/// - `reference_ohm`: real, > 0
///
/// # Errors
/// [`OutputError::Nothing`] without points, [`OutputError::Misfit`] for a reference or a point that is not a number,
/// [`OutputError::Stream`] when `target` refuses.
///
/// # Source
/// IBIS Open Forum, Touchstone file format specification version 1.1; ASCII only, `!` for comments.
pub fn s1p(points: &[(f64, Complex64)], reference_ohm: f64, mut target: impl Write) -> Result<(), OutputError> {
    let misfit = |reason: String| OutputError::Misfit { what: "the Touchstone file".into(), reason };
    if points.is_empty() {
        return Err(OutputError::Nothing {
            what: "the Touchstone file".into(),
            needs: "at least one frequency".into(),
        });
    }
    if !(reference_ohm > 0.0 && reference_ohm.is_finite()) {
        return Err(misfit(format!("the reference must be a resistance above zero, not {reference_ohm} ohm")));
    }
    let mut sorted = points.to_vec();
    sorted.sort_by(|a, b| a.0.total_cmp(&b.0));
    sorted.dedup_by(|later, first| later.0 == first.0);
    writeln!(target, "! Impedance at the radio end of the line")?;
    writeln!(target, "# HZ S RI R {reference_ohm}")?;
    for (frequency_hz, impedance_ohm) in sorted {
        let reflection = (impedance_ohm - reference_ohm) / (impedance_ohm + reference_ohm);
        if !(frequency_hz.is_finite() && reflection.re.is_finite() && reflection.im.is_finite()) {
            return Err(misfit(format!("there is no result at {frequency_hz} Hz")));
        }
        writeln!(target, "{frequency_hz} {:.9e} {:.9e}", reflection.re, reflection.im)?;
    }
    target.flush()?;
    Ok(())
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    /// The worked figure of a kilohm terminal: against 50 ohm, 2450 ohm reflects 0.960 (50·(1+Γ)/(1−Γ) = 2450).
    #[test]
    fn lines_are_ascending_ascii_and_right() {
        let mut bytes = Vec::new();
        let points = [
            (14.1e6, Complex64::new(50.0, 0.0)),
            (7.1e6, Complex64::new(2450.0, 0.0)),
            (7.1e6, Complex64::new(1.0, 0.0)),
        ];
        s1p(&points, 50.0, &mut bytes).unwrap();
        let text = String::from_utf8(bytes).unwrap();
        assert!(text.is_ascii());
        let lines: Vec<&str> = text.lines().collect();
        assert_eq!(lines[1], "# HZ S RI R 50");
        assert_eq!(lines[2], "7100000 9.600000000e-1 0.000000000e0");
        assert_eq!(lines[3], "14100000 0.000000000e0 0.000000000e0");
        assert_eq!(lines.len(), 4);
    }

    /// Read back by a reader that is not ours; the same impedances come out, and another reference would not do.
    #[test]
    fn another_reader_gets_the_same_impedances() {
        let points: Vec<(f64, Complex64)> = (0..20)
            .map(|k| (7e6 + 1e4 * f64::from(k), Complex64::new(12.0 + 7.0 * f64::from(k), 90.0 - 11.0 * f64::from(k))))
            .collect();
        let mut bytes = Vec::new();
        s1p(&points, 75.0, &mut bytes).unwrap();
        let network = ::touchstone::Network::from_str("radio.s1p", &String::from_utf8(bytes).unwrap()).unwrap();
        assert_eq!(network.rank, 1);
        assert!(matches!(network.reference_impedance(), ::touchstone::ReferenceImpedance::Common(r) if r == 75.0));
        assert_eq!(network.f().len(), points.len());
        for (index, (frequency_hz, impedance_ohm)) in points.iter().enumerate() {
            assert!((network.f()[index] - frequency_hz).abs() < 1e-3);
            let s = network.s_matrix_at(index).unwrap().get(1, 1).unwrap();
            let s = Complex64::new(s.re, s.im);
            assert!((75.0 * (1.0 + s) / (1.0 - s) - impedance_ohm).norm() < 1e-5);
            assert!((50.0 * (1.0 + s) / (1.0 - s) - impedance_ohm).norm() > 1.0);
        }
    }

    #[test]
    fn nonsense_is_refused() {
        assert!(s1p(&[], 50.0, Vec::new()).is_err());
        assert!(s1p(&[(1e6, Complex64::new(50.0, 0.0))], 0.0, Vec::new()).is_err());
        let open = Complex64::new(f64::NAN, 0.0);
        assert!(s1p(&[(1e6, open)], 50.0, Vec::new()).unwrap_err().to_string().contains("1000000 Hz"));
    }
}
