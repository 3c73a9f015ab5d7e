//! Questions asked of a station: one prediction, or the same question many times.
//!
//! A study never touches a kernel: it goes through [`crate::ports`], [`crate::field`] and [`crate::network`].

mod place;
mod predict;
mod shield;

pub use place::timing;
pub use place::{Candidate, DEFAULT_RESISTANCES_OHM, PlaceFailure, PlaceOptions, place};
pub use predict::{Failure, Options, predict};
