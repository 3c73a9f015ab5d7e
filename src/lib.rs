//! Braidwise: what an antenna wire fed through coax does on the station it is really part of.
//!
//! The flow, in the order of the modules below; each reads only what stands above it:
//!
//! station file → [`station`] → [`layout`] → [`mesh`] → [`interaction`] → [`ports`] → [`field`], [`network`]
//! → [`study`] → [`outcome`] → [`output`]
//!
//! Conventions everywhere: SI units, time factor e^{+jωt}, peak phasors inside the solver and RMS in
//! [`outcome`]; east, north, up; height 0 is the earth's surface. Units stand in the names.

pub mod quantity;

pub mod catalogue;

pub mod station;

pub mod layout;

pub mod mesh;

pub mod processor;

pub mod halfspace;

pub mod interaction;

pub mod ports;

pub mod field;

pub mod network;

pub mod outcome;

pub mod study;

pub mod output;

pub mod cli;
