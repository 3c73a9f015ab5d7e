//! Values from outside the project, the source named beside each check.

#![allow(clippy::unwrap_used)]

mod catalogue;
mod catalogue_soil_models;
mod coupling;
mod dipole;
mod end_fed;
mod halfspace;
mod horizontal;
mod independent;
mod metal;
mod near_field;
mod network;
mod rational;
mod rods;
mod small;
mod trade;
mod wires;
