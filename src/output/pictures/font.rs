//! The one font of the pictures: a subset of DejaVu Sans carried in the program, so that a machine without fonts draws
//! the same picture. Its licence stands beside it in `output/font/LICENCE`.

use plotters::style::{FontDesc, FontFamily, FontStyle, register_font};
use std::sync::OnceLock;

static FILE: &[u8] = include_bytes!("../font/DejaVuSans-subset.ttf");

/// The name it is registered under. It is also what an SVG says, so it lists what a viewer may use in its place:
/// Verdana has nearly the same widths, and "sans-serif" every viewer has.
const NAME: &str = "DejaVu Sans, Verdana, sans-serif";

/// Line height over em of this font (ascent 1901 and descent 483 of 2048 units). Plotters' bitmap text is sized by the
/// former, our text by the latter.
const HEIGHT_PER_EM: f64 = (1901.0 + 483.0) / 2048.0;

/// How a backend turns the size and the spot it is given into an em and a baseline.
#[derive(Debug, Clone, Copy)]
pub(super) struct TextRule {
    /// Size to ask for, over the em wanted.
    pub(super) size_per_em: f64,
    /// Baseline below the spot of a top-anchored text, over the em (read from plotters 0.3.7).
    pub(super) drop_per_em: f64,
}

/// Plotters' bitmap text: glyphs scaled to the line height, baseline half the size below the top.
pub(super) const BITMAP: TextRule = TextRule { size_per_em: HEIGHT_PER_EM, drop_per_em: 0.5 * HEIGHT_PER_EM };
/// Plotters' SVG text: `font-size` is the size over 1.24, `dy` of a top-anchored text 0.76 em.
pub(super) const SVG: TextRule = TextRule { size_per_em: 1.24, drop_per_em: 0.76 };

/// True when the font is ready; registering it is done once.
pub(super) fn ready() -> bool {
    static READY: OnceLock<bool> = OnceLock::new();
    *READY.get_or_init(|| register_font(NAME, FontStyle::Normal, FILE).is_ok())
}

/// The font at a size in the backend's sense.
pub(super) fn at_size(size: f64) -> FontDesc<'static> {
    FontDesc::new(FontFamily::Name(NAME), size, FontStyle::Normal)
}

/// Width of a text in picture units at this em; 0 where the font is not ready.
pub(super) fn width(text: &str, em: f64) -> f64 {
    const MEASURED_AT_EM: f64 = 1000.0;
    if !ready() {
        return 0.0;
    }
    let layout = at_size(MEASURED_AT_EM * HEIGHT_PER_EM).layout_box(text);
    layout.map_or(0.0, |((left, _), (right, _))| f64::from(right - left) * em / MEASURED_AT_EM)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_font_is_small_and_has_the_signs_we_write() {
        assert!(ready());
        assert!(FILE.len() <= 80_000);
        let missing = width("\u{4e00}", 10.0);
        for sign in "Ωλµ°±−·×≤≥→…²√∞".chars() {
            let wide = width(&sign.to_string(), 10.0);
            assert!(wide > 0.0 && wide != missing, "{sign}");
        }
        // Advance of a figure in DejaVu Sans is 1303 of 2048 units.
        assert!((width("8888", 20.0) - 4.0 * 20.0 * 1303.0 / 2048.0).abs() < 0.2);
    }
}
