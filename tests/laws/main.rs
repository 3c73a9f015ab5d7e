//! What must hold for any input.
#![allow(clippy::unwrap_used)]

mod curve;
