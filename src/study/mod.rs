//! Questions asked of a station: one prediction, or the same question many times.
//!
//! A study never touches a kernel: it goes through [`crate::ports`], [`crate::field`] and [`crate::network`].

mod predict;
mod shield;

pub mod store;

pub mod vary;

pub use predict::{Failure, Options, predict};
