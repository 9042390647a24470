//! The vocabulary between a procedure and the bench that carries it out.

use crate::trace::{BenchFault, Burst, Ending, Sample};
use crate::units::{Amps, Volts};
use std::time::Duration;

/// The one thing a bench does next.
#[derive(Clone, Debug, PartialEq)]
pub enum Action {
    /// With the output off: set over-voltage protection and current limit in the supply, and read them back.
    Protect {
        /// Over-voltage protection level.
        over_voltage: Volts,
        /// Current limit.
        current_limit: Amps,
    },
    /// Change the supply's current limit, and read it back.
    LimitCurrent(Amps),
    /// Set the supply's voltage, and read it back.
    SetVolts(Volts),
    /// Switch the output on, and read it back.
    OutputOn,
    /// Set zero volts, switch the output off, and read it back. `Done` only when the supply says it is off.
    OutputOff,
    /// Put the ammeter on its smallest range that holds this current.
    Range(Amps),
    /// Read all roles together.
    Read,
    /// Read the voltage at the board a number of times in quick succession, each over a short time. Only where
    /// [`Ability::short_readings`](super::Ability::short_readings) has a time for it.
    Burst,
    /// Do nothing until this time since the start of the run.
    WaitUntil(Duration),
    /// The run is over.
    Finish(Ending),
}

/// What came of the last action.
#[derive(Clone, Debug, PartialEq)]
pub enum Event {
    /// Begin. The first event of a run.
    Start,
    /// It was done and confirmed.
    Done,
    /// The readings asked for.
    Reading(Sample),
    /// What a burst showed.
    Burst(Burst),
    /// It failed.
    Failed(BenchFault),
    /// The operator, or a signal, wants the run stopped.
    Abort,
}
