//! From the feed impedance to the radio, and from the power at the radio to the level at the feed.

use super::line::{Line, LineAt};
use super::reflection::swr;
use super::transformer::Transformer;
use crate::layout::Layout;
use num_complex::Complex64;
use thiserror::Error;

/// Why no level can be found.
#[derive(Debug, Clone, Copy, PartialEq, Error)]
pub enum ChainError {
    /// The radio's end of the line has no resistance.
    #[error(
        "no power can flow into the station: {resistance_ohm:.3e} ohm of resistance at the radio for \
         {feed_resistance_ohm:.3e} ohm at the feed point at {frequency_hz} Hz; give the conductors a metal, or the line its loss"
    )]
    NoResistance {
        /// At the radio, ohm.
        resistance_ohm: f64,
        /// At the feed point, ohm.
        feed_resistance_ohm: f64,
        /// Hz.
        frequency_hz: f64,
    },
    /// The feed impedance is not a number.
    #[error("the feed impedance at {frequency_hz} Hz came out as no number; the solution at this frequency has failed")]
    NotFinite {
        /// Hz.
        frequency_hz: f64,
    },
}

/// Transformer, line and radio of a station.
#[derive(Debug, Clone, PartialEq)]
pub struct Chain {
    /// The transformer, [`Transformer::NONE`] without one.
    pub transformer: Transformer,
    /// The line and its length, m; `None` without coax.
    pub line: Option<(Line, f64)>,
    /// Reference for the standing-wave ratio, ohm.
    pub radio_impedance_ohm: f64,
}

/// The chain at one frequency, ready for many feed impedances.
#[derive(Debug, Clone, PartialEq)]
pub struct ChainAt {
    frequency_hz: f64,
    transformer: Transformer,
    line: Option<(LineAt, f64)>,
    radio_impedance_ohm: f64,
}

/// What the chain makes of one feed impedance.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ChainState {
    /// At the transformer's radio side: what the line ends in, ohm.
    pub line_end_ohm: Complex64,
    /// Standing-wave ratio there, against the radio's impedance.
    pub line_end_swr: f64,
    /// What the radio sees, ohm.
    pub radio_ohm: Complex64,
    /// Standing-wave ratio at the radio.
    pub radio_swr: f64,
    /// RMS magnitude between hot and cold terminal, V.
    pub feed_voltage_v: f64,
    /// RMS magnitude out of the hot terminal, A.
    pub feed_current_a: f64,
    /// Power into the feed point, W.
    pub feed_w: f64,
    /// Lost in the line, W.
    pub line_w: f64,
    /// Lost in the transformer, W.
    pub transformer_w: f64,
}

impl Chain {
    /// The chain of a station.
    #[must_use]
    pub fn of(layout: &Layout) -> Self {
        Chain {
            transformer: layout
                .feed
                .impedance_ratio
                .map_or(Transformer::NONE, |impedance_ratio| Transformer { impedance_ratio }),
            line: layout.coax.as_ref().map(|coax| (Line::new(&coax.line), coax.length_m)),
            radio_impedance_ohm: layout.radio.impedance_ohm,
        }
    }

    /// The chain at a frequency, Hz, greater than zero.
    #[must_use]
    pub fn at(&self, frequency_hz: f64) -> ChainAt {
        ChainAt {
            frequency_hz,
            transformer: self.transformer,
            line: self.line.map(|(line, length_m)| (line.at(frequency_hz), length_m)),
            radio_impedance_ohm: self.radio_impedance_ohm,
        }
    }
}

impl ChainAt {
    /// What the radio sees, ohm, for a feed impedance, ohm.
    #[must_use]
    pub fn radio_impedance(&self, feed_ohm: Complex64) -> Complex64 {
        let line_end = self.transformer.radio_side(feed_ohm);
        self.line.map_or(line_end, |(line, length_m)| line.input_impedance(length_m, line_end))
    }

    /// Standing-wave ratio at the radio for a feed impedance, ohm.
    #[must_use]
    pub fn radio_swr(&self, feed_ohm: Complex64) -> f64 {
        swr(self.radio_impedance(feed_ohm), self.radio_impedance_ohm)
    }

    /// Impedances, losses and levels for a feed impedance, ohm, and a net power, W, into the line at the radio end.
    ///
    /// The current at the radio is √(P/R) with R the resistance seen there; the line's and the transformer's transfer take it
    /// to the feed point. The transformer is ideal, so `transformer_w` is 0; `line_w` is the power in less the power at the feed.
    ///
    /// # Errors
    /// - [`ChainError::NotFinite`] where the feed impedance is not a number.
    /// - [`ChainError::NoResistance`] where the radio sees no positive resistance, so that no power can flow.
    pub fn state(&self, feed_ohm: Complex64, power_w: f64) -> Result<ChainState, ChainError> {
        if !feed_ohm.is_finite() {
            return Err(ChainError::NotFinite { frequency_hz: self.frequency_hz });
        }
        let line_end_ohm = self.transformer.radio_side(feed_ohm);
        let (radio_ohm, current_transfer) = match self.line {
            None => (line_end_ohm, Complex64::new(1.0, 0.0)),
            Some((line, length_m)) => {
                let loaded = line.loaded(length_m, line_end_ohm);
                (loaded.input_ohm, loaded.current)
            }
        };
        let radio_current_a = (power_w / radio_ohm.re).sqrt();
        let feed_current_a = radio_current_a * current_transfer.norm() / self.transformer.turns_ratio();
        if radio_ohm.re <= 0.0 || !feed_current_a.is_finite() {
            return Err(ChainError::NoResistance {
                resistance_ohm: radio_ohm.re,
                feed_resistance_ohm: feed_ohm.re,
                frequency_hz: self.frequency_hz,
            });
        }
        let feed_w = feed_current_a * feed_current_a * feed_ohm.re;
        // Rounding alone may put the feed's power a hair above the radio's on a lossless line.
        let line_w = if self.line.is_some() { (power_w - feed_w).max(0.0) } else { 0.0 };
        Ok(ChainState {
            line_end_ohm,
            line_end_swr: swr(line_end_ohm, self.radio_impedance_ohm),
            radio_ohm,
            radio_swr: swr(radio_ohm, self.radio_impedance_ohm),
            feed_voltage_v: feed_current_a * feed_ohm.norm(),
            feed_current_a,
            feed_w,
            line_w,
            transformer_w: 0.0,
        })
    }
}
