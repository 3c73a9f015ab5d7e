//! Questions asked of a station: one prediction, or the same question many times.
//!
//! A study never touches a kernel: it goes through [`crate::ports`], [`crate::field`] and [`crate::network`].

pub mod cut;
mod predict;
mod shield;

pub use predict::{Failure, Options, predict};
