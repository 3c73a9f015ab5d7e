//! Why the program stops, and with which exit status: 0 done; 1 could not; 2 the command line or station is wrong; 130 interrupted.

use crate::output::{self, OutputError};
use crate::station::Refused;
use crate::study::Failure;
use std::io::IsTerminal;
use std::process::ExitCode;
use std::sync::atomic::{AtomicU8, Ordering};

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
            Failure::Stopped => Stop::Interrupted("nothing was written".to_owned()),
            _ => Stop::Could(failure.to_string()),
        }
    }
}

impl From<std::io::Error> for Stop {
    fn from(error: std::io::Error) -> Self {
        Stop::Could(error.to_string())
    }
}

/// What Ctrl-C does just now.
static STATE: AtomicU8 = AtomicU8::new(AT_ONCE);
/// It ends the program.
const AT_ONCE: u8 = 0;
/// It asks the study to finish the steps at work.
const STEPS_AT_WORK: u8 = 1;
/// It has asked, and ends the program the next time.
const ASKED: u8 = 2;

fn moves(from: u8, to: u8) -> bool {
    STATE.compare_exchange(from, to, Ordering::SeqCst, Ordering::SeqCst).is_ok()
}

/// End with status 130 on Ctrl-C, and take files along that are half written.
pub(super) fn on_interrupt() {
    // a second handler in one process cannot happen: `run` is called once
    let _ = ctrlc::set_handler(|| {
        if moves(STEPS_AT_WORK, ASKED) {
            return;
        }
        output::remove_unfinished();
        eprintln!("interrupted");
        std::process::exit(130);
    });
}

/// From here on the first Ctrl-C only sets [`interrupted`]; a second one ends the program at once.
pub(super) fn finish_steps_at_work() {
    STATE.store(STEPS_AT_WORK, Ordering::SeqCst);
}

/// Whether Ctrl-C was pressed since [`finish_steps_at_work`].
pub(super) fn interrupted() -> bool {
    STATE.load(Ordering::SeqCst) == ASKED
}

/// From here on Ctrl-C ends the program at once again; whether it was pressed before.
pub(super) fn end_at_once() -> bool {
    !moves(STEPS_AT_WORK, AT_ONCE)
}
