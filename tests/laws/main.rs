//! Invariants that hold whatever the station.

#![allow(clippy::unwrap_used)]

mod cut;
