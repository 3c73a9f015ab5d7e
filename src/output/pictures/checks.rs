//! What every picture must keep, asked of its list of marks.

use super::drawing::{Area, Drawing, Mark};

/// No text overlaps another, and nothing leaves the picture.
pub(super) fn texts_are_clear(drawing: &Drawing) {
    let paper = Area::new(0.0, 0.0, drawing.width, drawing.height);
    let texts = drawing.texts();
    for (index, (text, area)) in texts.iter().enumerate() {
        assert!(paper.holds(area), "\"{text}\" leaves the picture: {area:?}");
        for (other, covered) in &texts[..index] {
            assert!(!area.meets(covered), "\"{text}\" covers \"{other}\": {area:?} {covered:?}");
        }
    }
    for mark in &drawing.marks {
        if let Mark::Line { points, .. } | Mark::Fill { points, .. } = mark {
            for [x, y] in points {
                assert!(x.is_finite() && y.is_finite(), "not a number in the picture");
                assert!(
                    (-1.0..=drawing.width + 1.0).contains(x) && (-1.0..=drawing.height + 1.0).contains(y),
                    "({x}, {y}) outside"
                );
            }
        }
    }
}
