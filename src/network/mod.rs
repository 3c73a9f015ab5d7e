//! The lumped side of a station: line, transformer, parts, what the radio sees.
//!
//! Takes the data of [`crate::layout`] (line data, part laws, the feed's ratio) and the feed impedance that the port
//! model gives; gives impedances, standing-wave ratio, losses and the level of the feed voltage and current. Nothing here
//! knows a matrix. Currents and voltages are RMS.

mod chain;
mod line;
mod part;
mod reflection;
mod transformer;

pub use chain::{Chain, ChainAt, ChainError, ChainState};
pub use line::{Abcd, Line, LineAt, LossFit, Transfer};
pub use part::{admittance, impedance};
pub use reflection::{LARGEST_SWR, impedance_of_reflection, reflection, swr};
pub use transformer::Transformer;
