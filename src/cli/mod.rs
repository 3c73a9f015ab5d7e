//! The command line: what was typed becomes calls of the library; no physics here.
//!
//! One file per command; `flags` holds what they share, `load` reads the station, `progress` shows how far a study is, `stop` holds the
//! exit statuses and Ctrl-C.

mod check;
mod cut;
mod flags;
mod load;
mod place;
mod predict;
mod progress;
mod stop;
mod vary;

use clap::{Parser, Subcommand};
use std::process::ExitCode;

/// Where the current on an end-fed wire's coax goes, and what to do about it.
#[derive(Debug, Parser)]
#[command(name = "braidwise", version, propagate_version = true)]
struct Cli {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Read and judge station files and say what would be computed; solves nothing
    Check(check::Check),
    /// Feed point, current on the outside of the coax and power budget on every band
    Predict(predict::Predict),
    /// Where a choke goes along the coax: every place, candidate, band and variant, and the one to choose
    Place(place::Place),
    /// How long a wire, a counterpoise or the coax should be
    Cut(cut::Cut),
    /// Any values of the file varied together, on a grid or by Latin hypercube
    Vary(vary::Vary),
}

/// Run the program on its arguments.
#[must_use]
pub fn run() -> ExitCode {
    stop::on_interrupt();
    let done = match Cli::parse().command {
        Command::Check(check) => check.run(),
        Command::Predict(predict) => predict.run(),
        Command::Place(place) => place.run(),
        Command::Cut(cut) => cut.run(),
        Command::Vary(vary) => vary.run(),
    };
    match done {
        Ok(()) => ExitCode::SUCCESS,
        Err(stop) => stop.report(),
    }
}
