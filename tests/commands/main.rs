//! The program as a person runs it: station files good and bad, changes on the command line.
#![allow(clippy::unwrap_used)]

mod cut;
mod few;
mod interrupted;
mod malformed;
mod place;
mod vary;
