//! The program as a person runs it: station files good and bad, changes on the command line.

mod few;
mod malformed;
mod vary;
