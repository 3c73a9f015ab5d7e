//! Who watches a long study, and may stop it.

/// Told of every step that is done, asked whether to go on. Called from any thread.
pub trait Watch: Sync {
    /// A stretch of work begins: how many steps it has, and how many of them were done before.
    fn begins(&self, steps: usize, there: usize);
    /// One more step is done.
    fn step_done(&self);
    /// True to stop after the steps at work.
    fn stop(&self) -> bool;
}

/// Nobody watches: the study runs to its end.
#[derive(Debug, Clone, Copy, Default)]
pub struct Unwatched;

impl Watch for Unwatched {
    fn begins(&self, _steps: usize, _there: usize) {}

    fn step_done(&self) {}

    fn stop(&self) -> bool {
        false
    }
}
