//! Laws: what must hold whatever the station.
#![allow(clippy::unwrap_used)]

mod curve;
mod cut;
mod place;
