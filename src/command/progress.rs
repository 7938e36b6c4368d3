//! A line of progress on standard error, when someone is there to see it.

use std::io::{self, IsTerminal, Write};
use std::sync::Mutex;
use std::time::{Duration, Instant};

/// Work shorter than this shows nothing.
const PATIENCE: Duration = Duration::from_millis(500);
/// Least time between two lines.
const PAUSE: Duration = Duration::from_millis(250);

/// Shows how far the work is, on one line that is written over and at the end wiped.
pub(super) struct ProgressLine {
    /// When the next line may be written and how wide the last one was; nothing when nobody looks.
    state: Option<Mutex<(Instant, usize)>>,
}

impl ProgressLine {
    /// Starts the clock.
    pub(super) fn new() -> Self {
        let seen = io::stderr().is_terminal();
        Self { state: seen.then(|| Mutex::new((Instant::now() + PATIENCE, 0))) }
    }

    /// Tells how far a ranking is.
    pub(super) fn tell(&self, done: u64, total: u64) {
        self.say(done, total, || format!("of {total} candidate sets"));
    }

    /// Tells how far a step of another kind of work is.
    pub(super) fn tell_of(&self, step: &str, done: u64, total: u64) {
        self.say(done, total, || step.to_owned());
    }

    fn say(&self, done: u64, total: u64, words: impl FnOnce() -> String) {
        let Some(Ok(mut state)) = self.state.as_ref().map(Mutex::lock) else { return };
        let now = Instant::now();
        if now < state.0 {
            return;
        }
        let share = done as f64 / total.max(1) as f64 * 100.0;
        let line = format!("{share:3.0} % {}", words());
        let width = state.1.max(line.len());
        let _ = write!(io::stderr(), "\r{line:width$}");
        *state = (now + PAUSE, width);
    }
}

impl Drop for ProgressLine {
    fn drop(&mut self) {
        if let Some(Ok(state)) = self.state.as_ref().map(Mutex::lock)
            && state.1 > 0
        {
            let _ = write!(io::stderr(), "\r{:width$}\r", "", width = state.1);
        }
    }
}
