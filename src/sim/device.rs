//! Instruments that understand SCPI: a line of text in, perhaps a line of text out, and the world changed in between.
//!
//! A device follows IEEE 488.2 and SCPI-1999: its headers are a table, a command it does not understand ends the message,
//! a value it cannot take leaves the old one in place, and what went wrong waits in the error queue. It owns no port.

mod carry_out;
mod command;
mod common;
mod datum;
mod error;
mod header;
mod kind;
mod measuring;
mod message;
mod ratings;
mod reply;
mod scanner;
mod status;

pub use error::ScpiError;
pub use kind::Kind;

use super::{Setup, SharedWorld};
use command::{Meaning, Probe};
use header::{Pattern, split_suffix};
use measuring::MeterSettings;
use message::{Header, Unit, Units};
use ratings::Ratings;
use reply::Replies;
use status::Status;
use std::collections::BTreeMap;

/// An instrument as seen from its port.
#[derive(Clone, Debug)]
pub struct Device {
    kind: Kind,
    identity: String,
    ratings: Ratings,
    table: Vec<(Pattern, Meaning)>,
    status: Status,
    /// What READ? measures; `None` for a device without triggered readings.
    function: Option<Probe>,
    meters: BTreeMap<Probe, MeterSettings>,
    last_reading: Option<f64>,
}

impl Device {
    /// A device just switched on, with the ranges of `setup`. Its serial number follows from the seed.
    pub fn new(kind: Kind, setup: &Setup) -> Self {
        let serial = format!("{}{:07}", kind.letter(), setup.seed % 10_000_000);
        let identity = format!("EBBMARK,{},{serial},1.0", kind.model());
        let mut device = Self {
            kind,
            identity,
            ratings: Ratings::of(kind, setup),
            table: kind.rows().map(|(header, meaning)| (Pattern::new(header), *meaning)).collect(),
            status: Status::at_power_on(),
            function: None,
            meters: BTreeMap::new(),
            last_reading: None,
        };
        device.reset_meters();
        device
    }

    /// Carries out one program message, given without its terminator; the reply comes without one as well.
    pub fn execute(&mut self, message: &str, world: &SharedWorld) -> Option<String> {
        let mut replies = Replies::default();
        self.look_at(world);
        for unit in Units::new(message) {
            let done = unit.and_then(|unit| self.execute_unit(&unit, &mut replies, world));
            if let Err(error) = done {
                self.report(error);
                if error.is_command_error() {
                    break;
                }
            }
        }
        replies.line()
    }

    /// What kind of device it is.
    pub fn kind(&self) -> Kind {
        self.kind
    }

    /// The reply to `*IDN?`.
    pub fn identity(&self) -> &str {
        &self.identity
    }

    /// Makes it another instrument by name.
    pub fn set_identity(&mut self, identity: String) {
        self.identity = identity;
    }

    /// Puts an error into the queue, as if it had come about inside.
    pub fn report(&mut self, error: ScpiError) {
        self.status.report(error);
    }

    /// Power goes and comes back: everything set is forgotten, and the power-on bit says so.
    pub fn restart(&mut self, world: &SharedWorld) {
        self.status = Status::at_power_on();
        self.reset_meters();
        world.with(|world| {
            if self.kind.is_source() {
                world.restart_supply();
            }
            if self.kind.probes().contains(&Probe::Current) {
                world.reset_meter_range();
            }
        });
    }

    fn execute_unit(
        &mut self,
        unit: &Unit<'_>,
        replies: &mut Replies,
        world: &SharedWorld,
    ) -> Result<(), ScpiError> {
        if unit.query && replies.are_closed() {
            return Err(ScpiError::AFTER_INDEFINITE);
        }
        match &unit.header {
            Header::Common(name) => self.common(name, unit, replies, world),
            Header::Path(path) => {
                let meaning = self.meaning(path)?;
                if let Some(reply) = self.carry_out(meaning, unit, world)? {
                    replies.add(reply);
                }
                Ok(())
            }
        }
    }

    fn meaning(&self, path: &[&str]) -> Result<Meaning, ScpiError> {
        let (names, suffixes): (Vec<&str>, Vec<Option<u32>>) =
            path.iter().map(|mnemonic| split_suffix(mnemonic)).unzip();
        let (_, meaning) = self
            .table
            .iter()
            .find(|(pattern, _)| pattern.matches(&names))
            .ok_or(ScpiError::UNDEFINED_HEADER)?;
        if suffixes.iter().all(|suffix| *suffix == Some(1)) {
            Ok(*meaning)
        } else {
            Err(ScpiError::HEADER_SUFFIX)
        }
    }

    /// Keeps the questionable register up to date: bit 0 while the voltage is not regulated because the current is
    /// limited, bit 9 after over-voltage protection has switched off.
    fn look_at(&mut self, world: &SharedWorld) {
        if self.kind.is_source() {
            let (limited, was_limited, tripped) =
                world.with(|world| (world.limited(), world.take_was_limited(), world.over_voltage_tripped()));
            let tripped = u16::from(tripped) << 9;
            // The event register catches what comes and goes between two messages.
            self.status.questionable.update(u16::from(was_limited) | tripped);
            self.status.questionable.update(u16::from(limited) | tripped);
        }
    }
}

#[cfg(test)]
pub(super) mod tests;
