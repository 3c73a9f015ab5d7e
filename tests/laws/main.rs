//! Laws: what must hold whatever the station.
#![allow(clippy::unwrap_used)]

mod cut;
mod place;
