//! How a run ended: by itself, because of what it measured, by the operator, or by a fault of the bench.

use crate::units::{Amps, Volts};
use serde::{Deserialize, Serialize};

/// How a run ended, and what is known of the output afterwards.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Ending {
    /// Why the procedure stopped.
    pub stop: Stop,
    /// The state of the supply's output, as read back.
    pub output: OutputState,
}

/// Why a procedure stopped.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case", tag = "why")]
pub enum Stop {
    /// Everything planned was measured.
    Completed,
    /// The operator stopped the run.
    Aborted,
    /// At the low pre-check voltage more current flowed than the load can draw.
    ShortCircuit {
        /// Voltage at the terminals.
        at: Volts,
        /// Current that flowed.
        current: Amps,
    },
    /// At a voltage too low for the board to work, it conducted like a diode in forward direction.
    ConductsBackwards {
        /// Voltage at the terminals.
        at: Volts,
        /// Current that flowed.
        current: Amps,
    },
    /// Current flowed out of the board.
    BackFeed {
        /// Voltage at the terminals.
        at: Volts,
        /// Current that flowed, negative.
        current: Amps,
    },
    /// Voltage stood at the terminals before the output was on.
    LiveBoard {
        /// Voltage at the terminals.
        at: Volts,
    },
    /// The terminals did not reach the set-point in time.
    NotArrived {
        /// The set-point.
        set: Volts,
        /// Voltage at the terminals when time was up.
        sense: Volts,
    },
    /// The board did not turn on at the start voltage.
    NotOn {
        /// Voltage at the terminals.
        at: Volts,
        /// Current that flowed.
        current: Amps,
    },
    /// At the start voltage the current was neither the load's nor that of an open switch.
    Undecided {
        /// Voltage at the terminals.
        at: Volts,
        /// Current that flowed.
        current: Amps,
    },
    /// The supply limited the current where the board should have been on.
    CurrentLimited {
        /// Voltage at the terminals.
        at: Volts,
        /// Current that flowed.
        current: Amps,
    },
    /// An instrument or its link failed.
    Fault(BenchFault),
}

/// A failure of the bench, never of the board.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize, thiserror::Error)]
#[error("{text}")]
pub struct BenchFault {
    /// What sort of failure.
    pub kind: FaultKind,
    /// What happened, where, what was read, what was wanted, what to do next.
    pub text: String,
}

/// Sorts of bench failures.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum FaultKind {
    /// No reply in time.
    NoReply,
    /// A reply that is not what the question asks for.
    BadReply,
    /// A reading above the range, where a number was needed.
    Overload,
    /// The instrument reported an error.
    InstrumentError,
    /// A setting did not take: the instrument reads back another value.
    NotTaken,
    /// The instrument has restarted.
    Restarted,
    /// The port is gone.
    LinkLost,
    /// Another instrument answers than the bench file names.
    WrongInstrument,
    /// An answer of the wrong sort for the action; a fault of this program.
    Internal,
}

/// What is known of the supply's output.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum OutputState {
    /// Switched off and read back as off.
    Off,
    /// Switching off was not confirmed: the output may still be on.
    MayBeOn,
}
