//! From currents to what they do elsewhere: the far field, the power it carries, and current and voltage along conductors.
//!
//! Takes a mesh and its solved unknowns (peak phasors); gives watts, gains and values along conductors. Nothing here solves anything.

mod along;
mod far;
mod form;
mod near;

pub use along::{Sample, Solution};
pub use far::{FarField, Pattern};
pub use form::{CurrentNode, Sphere};
pub use near::near_field;
