//! Progress on standard error when a person is watching and the work is long, and Ctrl-C while it lasts.

use super::stop::{self, Stop};
use crate::study::Watch;
use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};
use std::io::IsTerminal;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::{Duration, Instant};

/// Work shorter than this shows nothing.
const LONG: Duration = Duration::from_millis(500);

/// Runs a study that somebody may be watching. The first Ctrl-C ends it after the steps at work, a second one at once.
///
/// # Errors
/// What the study returns, or [`Stop::Interrupted`]. What comes after it, writing, is ended at once by Ctrl-C.
pub(super) fn watched<T, E: Into<Stop>>(
    steps: &'static str,
    study: impl FnOnce(&dyn Watch) -> Result<T, E>,
) -> Result<T, Stop> {
    let (done, interrupted) = interruptible(steps, study);
    if interrupted { Err(Stop::Interrupted("nothing was written".to_owned())) } else { done.map_err(Into::into) }
}

/// The same for a study that keeps what it has: its result, and whether Ctrl-C was pressed.
pub(super) fn interruptible<T>(steps: &'static str, study: impl FnOnce(&dyn Watch) -> T) -> (T, bool) {
    stop::finish_steps_at_work();
    let bar = Bar::new(steps);
    let done = study(&bar);
    bar.bar.finish_and_clear();
    (done, stop::end_at_once())
}

struct Bar {
    bar: ProgressBar,
    since: Instant,
    shown: AtomicBool,
}

impl Bar {
    fn new(steps: &str) -> Self {
        let bar = ProgressBar::with_draw_target(Some(0), ProgressDrawTarget::hidden());
        if let Ok(style) = ProgressStyle::with_template(&format!("{{bar:30}} {{pos}} of {{len}} {steps}, {{eta}} left"))
        {
            bar.set_style(style);
        }
        // where nobody is watching it is taken for shown and stays hidden
        Self { bar, since: Instant::now(), shown: AtomicBool::new(!std::io::stderr().is_terminal()) }
    }
}

impl Watch for Bar {
    fn begins(&self, steps: usize, there: usize) {
        self.bar.inc_length(steps as u64);
        self.bar.inc(there as u64);
        self.bar.reset_eta();
    }

    fn step_done(&self) {
        if self.since.elapsed() > LONG && !self.shown.swap(true, Ordering::Relaxed) {
            self.bar.set_draw_target(ProgressDrawTarget::stderr());
        }
        self.bar.inc(1);
    }

    fn stop(&self) -> bool {
        stop::interrupted()
    }
}
