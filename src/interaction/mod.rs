//! The moment-method matrix at one frequency over one earth, and its factorisation.
//!
//! Takes a [`crate::mesh::Mesh`] and a frequency; gives a [`Factored`] matrix. Mixed-potential electric-field integral equation, Galerkin,
//! e^{+jωt}: for currents f, g on the conductors
//! Z = jωμ0/4π ∬ f·K·g + 1/(jωε0 4π) ∬ f′ K_Φ g′ + ∫ z_i f g (metal) + 1/(jωε0 4π) ∬ (1/ε_jacket − 1/ε_medium) f′ (K_aa − K_ab) g′ (jacket).
//!
//! - `quadrature`, `kernel`: Gauss rules and the vectorised wave
//! - `line`, `near`, `pairs`: what depends only on geometry, kept for every frequency
//! - `local`, `sleeve`: metal and jackets
//! - `surroundings`: the earth at one frequency; `rest`: what soil adds beyond images, `group`, `lagrange`: the same from afar;
//!   `loss`: what its near field takes
//! - `walk`: all pairs with everything the earth does to them; `block`: the moments of a pair
//! - `fill`: the matrix at one frequency, through `assembly`; `potential`, `probe`: potentials along all conductors, or at a few places
//! - `factor`: its factorisation, checked
//! - `added`, `leading`: the columns that a few further elements add, and a factorisation that serves every smaller system it begins with

mod added;
mod assembly;
mod block;
pub mod factor;
mod fill;
mod group;
mod kernel;
mod lagrange;
mod leading;
mod line;
mod local;
mod loss;
mod medium;
mod near;
mod pairs;
mod potential;
mod probe;
pub mod quadrature;
mod rest;
mod sleeve;
mod surroundings;
mod walk;

pub use added::{Added, Columns, Seen};
pub use factor::{Factored, SingularMatrix};
pub use fill::{Interaction, Legendre, Matrix};
pub use leading::{Bordered, Leading};
pub use local::internal_impedance;
pub use pairs::Statics;
pub use potential::PotentialMap;
pub use probe::Spot;
pub use surroundings::{Extent, Surroundings};
