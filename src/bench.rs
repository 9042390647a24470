//! Carries out a procedure: in real time over serial ports, or in virtual time on the simulation.

mod drive;
pub mod serial;
mod virtual_time;

pub use drive::{Watch, drive};
pub use virtual_time::{VirtualBench, run_ready};

use crate::procedure::{Action, Event};
use std::time::Duration;

/// The whole hardware interface: a clock and one method that does what it is told.
pub trait Bench {
    /// Time since the start of the run.
    fn now(&self) -> Duration;

    /// Carries out one action and says what came of it. Dropping the future half way must leave the bench usable.
    fn perform(&mut self, action: &Action) -> impl Future<Output = Event>;
}
