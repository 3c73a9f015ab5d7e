//! Values from outside the project, the source named beside each check.

#![allow(clippy::unwrap_used)]

mod catalogue;
mod catalogue_soil_models;
mod halfspace;
mod network;
mod rational;
