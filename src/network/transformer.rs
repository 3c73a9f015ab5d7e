//! The transformer at the feed point; ideal so far.

use num_complex::Complex64;

/// An ideal transformer between line and feed point.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Transformer {
    /// Impedance on the antenna side over impedance on the radio side: 49 for "49:1".
    pub impedance_ratio: f64,
}

impl Transformer {
    /// The transformer that is not there.
    pub const NONE: Transformer = Transformer { impedance_ratio: 1.0 };

    /// From its turns: the square of their ratio.
    #[must_use]
    pub fn from_turns(radio_side: f64, antenna_side: f64) -> Self {
        Transformer { impedance_ratio: (antenna_side / radio_side).powi(2) }
    }

    /// Turns on the antenna side over turns on the radio side.
    #[must_use]
    pub fn turns_ratio(&self) -> f64 {
        self.impedance_ratio.sqrt()
    }

    /// What the line sees, ohm, when the antenna side is closed by an impedance, ohm.
    #[must_use]
    pub fn radio_side(&self, antenna_side_ohm: Complex64) -> Complex64 {
        antenna_side_ohm / self.impedance_ratio
    }
}
