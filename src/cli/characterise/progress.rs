//! How far a study has come, on a terminal: which cycle, under which conditions, and the time left.

use crate::bench::Watch;
use crate::procedure::{Action, Event, Progress};
use crate::report::rate_text;
use crate::study::{Cycle, Order, Plan};
use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};
use std::time::Duration;

/// Shows a study on standard error; shows nothing when that is no terminal.
pub(super) struct Bar {
    bar: ProgressBar,
    done: usize,
    total: usize,
    /// Time of the finished cycles, s, for what is left.
    spent: f64,
    what: String,
    speed: f64,
}

/// Positions of the bar for each cycle.
const POSITIONS: u64 = 100;
/// Redraws a second.
const REDRAWS: u8 = 5;

impl Bar {
    /// A bar for `plan`, of which some cycles are kept, on a clock `speed` times as fast as the wall.
    pub(super) fn new(plan: &Plan, kept: &[Cycle], speed: f64) -> Self {
        let total = plan.total();
        let target = ProgressDrawTarget::stderr_with_hz(REDRAWS);
        let bar = ProgressBar::with_draw_target(Some(total as u64 * POSITIONS), target);
        let style = ProgressStyle::with_template("[{bar:16}] {wide_msg}");
        bar.set_style(style.unwrap_or_else(|_| ProgressStyle::default_bar()).progress_chars("=> "));
        let spent = kept.iter().map(|cycle| cycle.duration).sum();
        Self { bar, done: kept.len(), total, spent, what: String::new(), speed }
    }

    /// A cycle begins.
    pub(super) fn begins(&mut self, plan: &Plan, order: Order) {
        let board = &plan.boards[order.board];
        let degrees = plan.temperatures[order.temperature].map_or(String::new(), |it| format!("  {it}"));
        let rate = rate_text(plan.rates[order.rate]);
        self.what = format!("cycle {} of {}  {board}{degrees}  {rate}", self.done + 1, self.total);
    }

    /// A cycle is kept.
    pub(super) fn ends(&mut self, cycle: &Cycle) {
        self.done += 1;
        self.spent += cycle.duration;
        self.bar.set_position(self.done as u64 * POSITIONS);
    }

    /// Removes the bar.
    pub(super) fn finish(&self) {
        self.bar.finish_and_clear();
    }

    /// Time left on the wall, with the cycle under way at `at`; its own plan tells how long a cycle takes until one is
    /// finished.
    fn left(&self, at: Duration, progress: Progress) -> f64 {
        let this = (progress.since + progress.left).as_secs_f64();
        let one = if self.done > 0 { self.spent / self.done as f64 } else { this };
        let rest = (self.total - self.done) as f64 * one - at.as_secs_f64();
        rest.max(0.0) / self.speed
    }
}

impl Watch for Bar {
    fn saw(&mut self, at: Duration, progress: Progress, _: &Action, event: &Event) {
        if self.bar.is_hidden() || !matches!(event, Event::Reading(_)) {
            return;
        }
        let share = (progress.share(at) * POSITIONS as f64) as u64;
        let position = self.done as u64 * POSITIONS + share;
        self.bar.set_position(position.max(self.bar.position()));
        let left = spoken(self.left(at, progress));
        self.bar.set_message(format!("{}  {}  about {left} left", self.what, progress.stage.title()));
    }
}

/// A time as one says it.
fn spoken(seconds: f64) -> String {
    let minutes = seconds / 60.0;
    if minutes >= 90.0 {
        format!("{:.1} h", minutes / 60.0)
    } else if minutes >= 2.0 {
        format!("{minutes:.0} min")
    } else {
        format!("{seconds:.0} s")
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_time_left_is_said_in_the_unit_that_fits() {
        assert_eq!([12.0, 300.0, 7200.0].map(spoken), ["12 s", "5 min", "2.0 h"]);
    }
}
