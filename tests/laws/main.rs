//! Laws the answers must keep whatever the station: nothing here is compared with a number from outside.
#![allow(clippy::unwrap_used)]

mod cases;
mod convergence;
mod curve;
mod cut;
mod definiteness;
mod draw;
mod earth_limits;
mod images;
mod invariance;
mod joint;
mod kirchhoff;
mod layering;
mod parts;
mod place;
mod power;
mod reciprocity;
mod recutting;
// the example that writes the table uses all of it, the test only a part
#[allow(dead_code)]
mod refinement;
mod solve;
