//! What is known before anybody describes a station: bands, metals, cables, soils, exposure limits.
//!
//! Takes a name as a person writes it; gives constants in SI units with the source of each row. The data are
//! the files of `models/catalogue/`, embedded when the program is built. Reads nothing else; [`crate::station`] reads it.
//!
//! Names are compared without regard to capitals, spaces, hyphens and strokes: "RG-58", "rg58" and "RG 58" are one.

mod band;
mod cable;
mod exposure;
mod metal;
mod name;
mod soil;

pub use band::{Band, band, band_names};
pub use cable::{Cable, cable, cable_names};
pub use exposure::{
    CurrentLimit, ExposedGroup, FieldLimit, PowerLaw, current_limits, field_limit_at, field_limits, field_standards,
};
pub use metal::{Metal, metal, metal_names};
pub use soil::{Soil, soil, soil_names, soil_names_and_aliases};
