//! Questions asked of a station: one prediction, or the same question many times.
//!
//! Takes a placed station; gives plain outcomes. A study never touches a kernel: it goes through [`crate::ports`], [`crate::field`] and
//! [`crate::network`].

mod barycentric;
pub mod curve;
pub mod cut;
pub mod earthing;
mod pattern;
mod place;
mod predict;
pub mod rational;
mod shield;
pub mod store;
pub mod vary;
mod watch;

pub use pattern::pattern;
pub use place::timing;
pub use place::{
    Candidate, DEFAULT_RESISTANCES_OHM, MOST_VALUES, PlaceFailure, PlaceOptions, place, place_over_lengths,
    place_watched,
};
pub use predict::{Failure, Options, predict, predict_variants, predict_variants_watched};
pub use watch::{Unwatched, Watch};
