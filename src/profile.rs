//! What a board must do: a checked profile.

mod limit;

pub use limit::{Limit, QuantityName};

use crate::units::{Amps, Ohms, Volts, Watts};
use std::collections::BTreeMap;
use std::time::Duration;

/// What one board, at one revision, must do on the bench. One that exists has been checked.
#[derive(Clone, Debug)]
pub struct Profile {
    /// Part number.
    pub board: String,
    /// Revision of the board.
    pub revision: String,
    /// What it is, for people.
    pub title: String,
    /// Pattern every serial number matches in full.
    pub serial_number: regex_lite::Regex,
    /// How the supply is driven.
    pub supply: Supply,
    /// What the board drives during the test.
    pub load: Load,
    /// The slowest the design allows.
    pub timing: Timing,
    /// How the thresholds are looked for.
    pub ramp: Ramp,
    /// Limits by quantity.
    pub limits: BTreeMap<QuantityName, Limit>,
}

/// Voltages and current of the supply during a run.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Supply {
    /// Board certainly on.
    pub start: Volts,
    /// End of the downward ramp.
    pub floor: Volts,
    /// Never exceeded, whatever happens.
    pub maximum: Volts,
    /// Current limit set in the supply.
    pub current_limit: Amps,
}

/// The load behind the switch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Load {
    /// Nominal resistance.
    pub resistance: Ohms,
    /// Tolerance, as a fraction of one.
    pub tolerance: f64,
    /// Power it may take for as long as a run lasts.
    pub rating: Watts,
}

/// Longest delays of the board.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Timing {
    /// From crossing the trip voltage to the switch being open.
    pub detect_delay: Duration,
    /// From crossing the re-enable voltage to the switch being closed.
    pub release_delay: Duration,
}

/// How the thresholds are looked for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Ramp {
    /// Every step of the whole ramp.
    Staircase {
        /// Height of a step.
        step: Volts,
    },
    /// Narrowing, until each threshold is known to lie within one cell.
    Search {
        /// Width of a cell.
        resolution: Volts,
    },
}
