//! Which instruments make up a bench, on which ports, in which roles: a checked bench file.
//!
//! ```toml
//! schema = 1                              # version of this format
//! name = "first-bench"                    # short; records and lock files use it
//! title = "Bench by the window"           # for people
//!
//! [fixture]                               # may be left out
//! lead_resistance = "80 mohm"             # both leads together; used when no voltmeter sits at the board
//! voltmeter = "behind_ammeter"            # or "before_ammeter": on the supply's side
//!
//! [room]                                  # may be left out
//! temperature = "24 degC"                 # outside what the makers state, their error limits are widened
//!
//! [[instrument]]                          # one block each
//! name = "supply"                         # how messages call it
//! definition = "programmable-supply"      # one that comes with the program, or a path to a TOML beside this file
//! port = "/dev/serial/by-id/..."          # a path that stays the same when cables are replugged
//! roles = ["source"]
//! calibration_due = 2027-03-31            # may be left out
//! calibrated = 2026-03-31                 # may be left out; due when what the definition states is over
//! identity = { maker = "...", model = "...", serial = "..." }   # each may be left out; compared with *IDN?
//! ```

mod ability;
mod fixture;
mod identity;
mod parts;
mod read;
mod room;
#[cfg(test)]
mod sample;

pub use fixture::{Fixture, VoltmeterPlace};
pub use identity::{Identity, WrongIdentity};
pub use parts::RoleMissing;

use super::definition::{Definition, Role};
use super::error::InstrumentError;
use crate::units::Celsius;
use jiff::civil::Date;
use parts::Parts;
use std::collections::BTreeSet;

/// The instruments of one bench. One that exists has a source and an ammeter.
#[derive(Clone, Debug)]
pub struct BenchFile {
    /// Short name.
    pub name: String,
    /// What it is, for people.
    pub title: String,
    /// How board and meters are connected.
    pub fixture: Fixture,
    instruments: Vec<BenchInstrument>,
    /// Their parts as the room leaves them.
    parts: Parts,
    room: Option<Celsius>,
}

/// One instrument on a bench.
#[derive(Clone, Debug, PartialEq)]
pub struct BenchInstrument {
    /// How messages call it.
    pub name: String,
    /// What it can do and what to send it.
    pub definition: Definition,
    /// Path of its serial port.
    pub port: String,
    /// Roles it plays here, all among those its definition offers.
    pub roles: BTreeSet<Role>,
    /// What its reply to `*IDN?` must say.
    pub identity: Identity,
    /// Day until which its calibration holds, where it is known.
    pub calibration_due: Option<Date>,
    /// Day on which it was calibrated, where it is known.
    pub calibrated: Option<Date>,
}

impl BenchFile {
    /// A bench of `instruments`.
    ///
    /// # Errors
    /// When none plays the source, or none the ammeter.
    pub fn new(
        name: &str,
        title: &str,
        fixture: Fixture,
        instruments: Vec<BenchInstrument>,
    ) -> Result<Self, RoleMissing> {
        let parts = Parts::of(&instruments)?;
        Ok(Self { name: name.to_owned(), title: title.to_owned(), fixture, instruments, parts, room: None })
    }

    /// All instruments, in the order of the file.
    pub fn instruments(&self) -> &[BenchInstrument] {
        &self.instruments
    }

    /// Whether this error is the supply's answer that its output stays on although it was commanded off.
    pub fn stays_on(&self, error: &InstrumentError) -> bool {
        let source = self.player(Role::Source).and_then(|supply| supply.definition.source.as_ref());
        let off = source.map(|part| part.commands.output_off.as_str());
        matches!(error, InstrumentError::NotTaken { command, .. } if Some(command.as_str()) == off)
    }

    /// The instrument that plays `role`.
    pub fn player(&self, role: Role) -> Option<&BenchInstrument> {
        self.instruments.iter().find(|instrument| instrument.roles.contains(&role))
    }
}

impl BenchInstrument {
    /// The day its calibration ended, when that is before `today`. A calibration holds through its last day.
    pub fn overdue(&self, today: Date) -> Option<Date> {
        self.due().filter(|due| today > *due)
    }
}
