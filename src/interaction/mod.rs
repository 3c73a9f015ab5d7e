//! The moment-method matrix at one frequency over one earth, and its factorisation.
//!
//! Takes a [`Mesh`] and a frequency; gives a [`Factored`] matrix. Mixed-potential electric-field integral equation, Galerkin,
//! e^{+jωt}: for currents f, g on the conductors
//! Z = jωμ0/4π ∬ f·K·g + 1/(jωε0 4π) ∬ f′ K_Φ g′ + ∫ z_i f g (metal) + 1/(jωε0 4π) ∬ (1/ε_jacket − 1/ε_medium) f′ (K_aa − K_ab) g′ (jacket).
//!
//! - `quadrature`, `kernel`: Gauss rules and the vectorised wave
//! - `line`, `near`, `pairs`: what depends only on geometry, kept for every frequency
//! - `local`, `sleeve`: metal and jackets
//! - `fill`: the matrix at one frequency
//! - `factor`: its factorisation, checked

pub mod factor;
mod fill;
pub mod kernel;
mod line;
mod local;
mod medium;
mod near;
mod pairs;
pub mod quadrature;
mod rest;
mod sleeve;
mod surroundings;

pub use factor::{Factored, SingularMatrix};
pub use fill::{Interaction, Legendre, Matrix};
pub use local::internal_impedance;
pub use surroundings::{Extent, Surroundings};
