//! The binary as a person runs it.

#![allow(clippy::unwrap_used)]

mod cut;
