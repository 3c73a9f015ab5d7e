//! `[earth]`.

use super::{Conductivity, Dispersion, EarthKind, table};
use crate::station::source::Written;

table! {
    /// The earth below the station.
    RawEarth as "earth" {
        /// "soil", "perfect" (an ideal conductor at height 0) or "none" (free space); "soil" where a soil is given.
        kind: Option<Written<EarthKind>>,
        /// A catalogue name, by what is seen; instead of permittivity and conductivity.
        soil: Option<Written<String>>,
        /// Relative permittivity.
        permittivity: Option<Written<f64>>,
        /// Conductivity; at low frequency where `dispersion` is given.
        conductivity: Option<Written<Conductivity>>,
        /// A published model of how the soil changes with frequency, for those who know its conductivity alone.
        dispersion: Option<Written<Dispersion>>,
    }
}
