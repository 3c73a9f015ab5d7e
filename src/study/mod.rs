<<<<<<< HEAD
//! Questions asked of a station: one prediction, or the same question many times.
//!
//! A study never touches a kernel: it goes through [`crate::ports`], [`crate::field`] and [`crate::network`].

mod predict;
mod shield;

pub use predict::{Failure, Options, predict};
=======
//! One question asked many times over a station.
//!
//! Takes the solver's port models and the [`crate::network`]; gives curves and tables for [`crate::outcome`].

mod barycentric;
pub mod rational;
>>>>>>> catalogue
