//! Why the program stops, and with which exit status: 0 done; 1 could not; 2 the command line or station is wrong; 130 interrupted.

use crate::output::OutputError;
use crate::station::Refused;
use crate::study::Failure;
use std::io::IsTerminal;
use std::process::ExitCode;

/// A reason to stop.
#[derive(Debug)]
pub(super) enum Stop {
    /// The station cannot be meant: status 2.
    Refused(Refused),
    /// The command line cannot be meant: status 2.
    Usage(String),
    /// File, disk or numbers: status 1.
    Could(String),
}

impl Stop {
    /// Say why on standard error and give the status.
    pub(super) fn report(self) -> ExitCode {
        let (status, text) = match self {
            Stop::Refused(refused) => (2, refused.show(std::io::stderr().is_terminal())),
            Stop::Usage(text) => (2, format!("error: {text}")),
            Stop::Could(text) => (1, format!("error: {text}")),
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

/// End with status 130 on Ctrl-C. Files appear whole or not at all, so nothing needs tidying.
pub(super) fn on_interrupt() {
    // a second handler in one process cannot happen: `run` is called once
    let _ = ctrlc::set_handler(|| {
        eprintln!("interrupted");
        std::process::exit(130);
    });
}
