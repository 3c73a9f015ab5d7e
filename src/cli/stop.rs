//! Why the program stops, and with which exit status: 0 done; 1 could not; 2 the command line or station is wrong; 130 interrupted.

use crate::output::OutputError;
use crate::station::Refused;
use crate::study::Failure;
use std::io::IsTerminal;
use std::process::ExitCode;
use std::sync::atomic::{AtomicBool, Ordering};

/// A reason to stop.
#[derive(Debug)]
pub(super) enum Stop {
    /// The station cannot be meant: status 2.
    Refused(Refused),
    /// The command line cannot be meant: status 2.
    Usage(String),
    /// File, disk or numbers: status 1.
    Could(String),
    /// Ctrl-C, and what was kept: status 130.
    Interrupted(String),
}

impl Stop {
    /// Say why on standard error and give the status.
    pub(super) fn report(self) -> ExitCode {
        let (status, text) = match self {
            Stop::Refused(refused) => (2, refused.show(std::io::stderr().is_terminal())),
            Stop::Usage(text) => (2, format!("error: {text}")),
            Stop::Could(text) => (1, format!("error: {text}")),
            Stop::Interrupted(text) => (130, format!("interrupted: {text}")),
        };
        eprintln!("{text}");
        ExitCode::from(status)
    }
}

impl From<Refused> for Stop {
    fn from(refused: Refused) -> Self {
        Stop::Refused(refused)
    }
}

impl From<OutputError> for Stop {
    fn from(error: OutputError) -> Self {
        // a reader that has gone away (`| head`) is no failure of ours, but nothing more can be said to it
        Stop::Could(error.to_string())
    }
}

impl From<Failure> for Stop {
    fn from(failure: Failure) -> Self {
        match failure {
            Failure::NoFrequency => Stop::Usage(failure.to_string()),
            _ => Stop::Could(failure.to_string()),
        }
    }
}

impl From<std::io::Error> for Stop {
    fn from(error: std::io::Error) -> Self {
        Stop::Could(error.to_string())
    }
}

/// Set while a command finishes the points at work after a first Ctrl-C.
static FINISHES: AtomicBool = AtomicBool::new(false);
/// Set by the first Ctrl-C of such a command.
static INTERRUPTED: AtomicBool = AtomicBool::new(false);

/// End with status 130 on Ctrl-C. Files appear whole or not at all, so nothing needs tidying.
pub(super) fn on_interrupt() {
    // a second handler in one process cannot happen: `run` is called once
    let _ = ctrlc::set_handler(|| {
        if FINISHES.load(Ordering::SeqCst) && !INTERRUPTED.swap(true, Ordering::SeqCst) {
            return;
        }
        eprintln!("interrupted");
        std::process::exit(130);
    });
}

/// From here on the first Ctrl-C only sets [`interrupted`]; a second one ends the program at once.
pub(super) fn finish_points_at_work() {
    FINISHES.store(true, Ordering::SeqCst);
}

/// Whether Ctrl-C was pressed since [`finish_points_at_work`].
pub(super) fn interrupted() -> bool {
    INTERRUPTED.load(Ordering::SeqCst)
}
