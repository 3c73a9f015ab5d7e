//! One question asked many times over a station.
//!
//! Takes the solver's port models and the [`crate::network`]; gives curves and tables for [`crate::outcome`].

mod barycentric;
pub mod rational;
