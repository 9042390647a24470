//! What one kind of instrument can do and what to send it: a checked instrument definition.
//!
//! Commands follow SCPI-1999 and IEEE 488.2. A number goes where a command has `{}`; volts and amperes, without unit.

mod builtin;
mod check;
mod command;
mod meter;
mod read;
#[cfg(test)]
pub(super) mod sample;
mod serial;
mod source;
mod validity;

pub use builtin::{builtin, builtin_names};
pub use command::Template;
pub use meter::{Ammeter, Meter, Range, RangeCommands, ShortReadings, Voltmeter};
pub(super) use read::read_roles;
pub use serial::{DataBits, FlowControl, Parity, SerialSettings, StopBits, Terminator};
pub use source::{LimitedQuery, Source, SourceCommands, Span};
pub use validity::{PerDegree, Validity};

use std::collections::BTreeSet;
use std::time::Duration;

/// One kind of instrument. One that exists has been checked: each of its roles has the part that describes it.
#[derive(Clone, Debug, PartialEq)]
pub struct Definition {
    /// Short name, as bench files use it.
    pub name: String,
    /// What it is, for people.
    pub title: String,
    /// Roles it can play.
    pub roles: BTreeSet<Role>,
    /// What it cannot do, in plain words.
    pub cannot: Vec<String>,
    /// How the port is opened.
    pub serial: SerialSettings,
    /// How long it may take.
    pub timing: Timing,
    /// Commands sent once after opening, in order, before the setup of the roles it plays.
    pub setup: Vec<String>,
    /// Commands sent before closing, in order; usually what gives the front panel back.
    pub local: Vec<String>,
    /// There when [`Role::Source`] is among the roles.
    pub source: Option<Source>,
    /// There when [`Role::Ammeter`] is among the roles.
    pub ammeter: Option<Ammeter>,
    /// There when [`Role::Voltmeter`] or [`Role::LoadVoltmeter`] is among the roles.
    pub voltmeter: Option<Voltmeter>,
}

/// What an instrument does on a bench.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Role {
    /// Supplies the board and limits its current.
    Source,
    /// Reads the current into the board.
    Ammeter,
    /// Reads the voltage at the board's terminals.
    Voltmeter,
    /// Reads the voltage at the load, behind the switch.
    LoadVoltmeter,
}

impl Role {
    /// All roles, in order, with their names in files.
    pub const NAMES: [(&'static str, Self); 4] = [
        ("source", Self::Source),
        ("ammeter", Self::Ammeter),
        ("voltmeter", Self::Voltmeter),
        ("load_voltmeter", Self::LoadVoltmeter),
    ];

    /// The name in files.
    pub fn key(self) -> &'static str {
        match self {
            Self::Source => "source",
            Self::Ammeter => "ammeter",
            Self::Voltmeter => "voltmeter",
            Self::LoadVoltmeter => "load_voltmeter",
        }
    }
}

impl std::fmt::Display for Role {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.pad(self.key())
    }
}

/// How long an instrument may take. Deadlines count from the last byte sent to the last byte of the reply.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Timing {
    /// Longest wait for the reply to a plain question or reading.
    pub reply_deadline: Duration,
    /// Longest wait after a reset.
    pub reset_deadline: Duration,
    /// Longest wait after a change of range.
    pub range_deadline: Duration,
    /// Time the instrument usually takes to carry out a command or begin its reply, a reading's integration aside.
    pub response: Duration,
}
