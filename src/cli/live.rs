//! Live progress of a run on a terminal: what is being done, voltage, current, and an honest bar.

use crate::bench::Watch;
use crate::procedure::{Action, Event, Progress};
use crate::trace::{Current, SwitchState};
use crate::units::{Amps, Ohms};
use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};
use std::time::Duration;

/// Shows a run on standard error; shows nothing when that is no terminal.
pub(super) struct Live {
    bar: ProgressBar,
    load: Ohms,
}

/// Positions of the bar.
const POSITIONS: u64 = 1000;
/// Redraws a second; more would only cost time.
const REDRAWS: u8 = 10;

impl Live {
    /// A bar for a board that drives `load`.
    pub(super) fn new(load: Ohms) -> Self {
        let bar = ProgressBar::with_draw_target(Some(POSITIONS), ProgressDrawTarget::stderr_with_hz(REDRAWS));
        let style = ProgressStyle::with_template("{prefix:14} [{bar:16}] {wide_msg}");
        bar.set_style(style.unwrap_or_else(|_| ProgressStyle::default_bar()).progress_chars("=> "));
        Self { bar, load }
    }

    /// Removes the bar, so that the result stands alone.
    pub(super) fn finish(&self) {
        self.bar.finish_and_clear();
    }
}

impl Watch for Live {
    fn saw(&mut self, at: Duration, progress: Progress, _: &Action, event: &Event) {
        if self.bar.is_hidden() {
            return;
        }
        self.bar.set_prefix(progress.stage.title());
        // A pass that must be repeated holds the bar; it never goes back.
        let position = (progress.share(at) * POSITIONS as f64) as u64;
        self.bar.set_position(position.max(self.bar.position()));
        if let Event::Reading(sample) = event {
            let state = match SwitchState::of(sample.current, sample.terminals(), self.load, Amps::ZERO) {
                SwitchState::On => "on",
                SwitchState::Off => "off",
                SwitchState::Neither => "?",
            };
            let current = match sample.current {
                Current::Value(amps) => amps.to_string(),
                Current::Overload(_) => "overload".to_owned(),
            };
            let left = match (progress.since + progress.left).saturating_sub(at).as_secs() {
                0 => String::new(),
                seconds => format!("  about {seconds} s left"),
            };
            let volts = sample.terminals().to_string();
            self.bar.set_message(format!("{volts:>9} {current:>10} {state:3}{left}"));
        }
    }
}
