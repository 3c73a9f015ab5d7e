//! The moment-method matrix at one frequency over one earth, and its factorisation.
//!
//! Takes a [`Mesh`] and a frequency; gives a [`Factored`] matrix. Mixed-potential electric-field integral equation, Galerkin,
//! e^{+jωt}: for currents f, g on the conductors
//! Z = jωμ0/4π ∬ f·K·g + 1/(jωε0 4π) ∬ f′ K_Φ g′ + ∫ z_i f g (metal) + 1/(jωε0 2π) ∫ (1/ε_jacket − 1/ε_medium) ln(b/a) f′ g′ (jacket).
//!
//! - `quadrature`, `kernel`: Gauss rules and the vectorised wave
//! - `line`, `near`, `pairs`: what depends only on geometry, kept for every frequency
//! - `local`: metal and jackets
//! - `fill`: the matrix at one frequency
//! - `factor`: its factorisation, checked
//! - `probe`: potentials at a few places as rows over the unknowns
//! - `added`, `leading`: the columns that a few further elements add, and a factorisation that serves every smaller system it begins with

mod added;
pub mod factor;
mod fill;
pub mod kernel;
mod leading;
mod line;
mod local;
mod medium;
mod near;
mod pairs;
mod probe;
pub mod quadrature;
mod rest;
mod surroundings;

pub use added::{Added, Columns, Seen};
pub use factor::{Factored, SingularMatrix};
pub use fill::{Interaction, Legendre, Matrix};
pub use leading::{Bordered, Leading};
pub use local::internal_impedance;
pub use pairs::Statics;
pub use probe::Spot;
pub use surroundings::{Extent, Surroundings};
