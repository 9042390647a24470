//! What to do next: one answer in, one action out. Pure: no clock, no port, no file.
//!
//! [`Procedure::handle`] takes what came of the last action and the time since the start of the run, and returns the
//! next action. Inside, a run is told from top to bottom (`script`): prepare, pre-check, arm, search or staircase, off
//! current, and what the profile asks for beyond. Whatever happens on the way, the script's only way out is `switch_off`.

mod ability;
mod action;
mod approach;
mod bench_work;
mod confirm;
mod cycle;
mod deep;
mod delay;
mod descent;
mod desk;
mod fit;
mod hum;
mod in_band;
mod inrush;
mod narrow;
mod off_current;
mod off_line;
mod plan;
mod power_cycle;
mod pre_check;
mod probe;
mod progress;
mod ramps;
mod rebound;
mod script;
mod search;
mod settling;
mod swing;
mod switch_off;
mod walk;

pub use ability::Ability;
pub use action::{Action, Event};
pub use bench_work::{BenchWork, SMALL_CURRENT, Task};
pub use cycle::{Steps, Sweep, Window, shortest_period};
pub use fit::{Misfit, fits};
pub use inrush::{Inrush, inrush};
pub use plan::Plan;
pub use progress::{Progress, Stage};
pub use rebound::Trial;
pub use search::{Prior, Spread};
pub use swing::swing;

use crate::trace::Ending;
use desk::Desk;
use std::pin::Pin;
use std::rc::Rc;
use std::task::{Context, Poll, Waker};
use std::time::Duration;

/// One run of one board, or work on a bench.
pub struct Procedure {
    desk: Rc<Desk>,
    script: Pin<Box<dyn Future<Output = Ending>>>,
    over: Option<Ending>,
}

impl Procedure {
    /// A run that follows `plan`.
    pub fn new(plan: Plan) -> Self {
        let desk = Rc::new(Desk::new(&plan));
        let script = Box::pin(script::run(Rc::clone(&desk), plan));
        Self { desk, script, over: None }
    }

    /// One cycle of a study: through both thresholds as `sweep` says, and off. No set-point is above the start voltage.
    pub fn cycle(plan: Plan, sweep: Sweep) -> Self {
        let desk = Rc::new(Desk::new(&plan));
        let script = Box::pin(cycle::run(Rc::clone(&desk), plan, sweep));
        Self { desk, script, over: None }
    }

    /// Work on the bench itself, without a board.
    pub fn on_bench(work: BenchWork) -> Self {
        let desk = Rc::new(Desk::within(work.maximum, work.large_zero));
        let script = Box::pin(bench_work::run(Rc::clone(&desk), work));
        Self { desk, script, over: None }
    }

    /// Takes what came of the last action at run time `now` and returns the next action.
    ///
    /// The first event is [`Event::Start`]. After [`Action::Finish`] every further event gets the same finish.
    pub fn handle(&mut self, now: Duration, event: Event) -> Action {
        if let Some(ending) = &self.over {
            return Action::Finish(ending.clone());
        }
        self.desk.put(now, event);
        match self.script.as_mut().poll(&mut Context::from_waker(Waker::noop())) {
            Poll::Pending => self.desk.take_action(),
            Poll::Ready(ending) => {
                self.over = Some(ending.clone());
                Action::Finish(ending)
            }
        }
    }

    /// How far the run has come.
    pub fn progress(&self) -> Progress {
        self.desk.progress()
    }
}

#[cfg(test)]
mod tests;
