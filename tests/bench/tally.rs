//! Counts the set-points of a run by what they were for.

use ebbmark::bench::Watch;
use ebbmark::procedure::{Action, Event, Progress, Stage};
use std::time::Duration;

/// Set-points of a run, and the time they took.
#[derive(Clone, Copy, Debug, Default)]
pub(crate) struct Tally {
    /// To narrow the windows.
    pub(crate) narrowing: u32,
    /// To confirm what was found.
    pub(crate) confirming: u32,
    /// All of the run.
    pub(crate) all: u32,
    /// Time spent narrowing, in seconds.
    pub(crate) narrowing_s: f64,
    last: Duration,
}

impl Watch for Tally {
    fn saw(&mut self, at: Duration, progress: Progress, action: &Action, _: &Event) {
        let set = u32::from(matches!(action, Action::SetVolts(_)));
        self.all += set;
        match progress.stage {
            Stage::Search => {
                self.narrowing += set;
                self.narrowing_s += (at - self.last).as_secs_f64();
            }
            Stage::ConfirmTrip | Stage::ConfirmReEnable => self.confirming += set,
            _ => {}
        }
        self.last = at;
    }
}
