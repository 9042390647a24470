//! The first words with an instrument: is it there, is it the right one, does it echo, has it anything to report?

use super::Session;
use crate::instrument::bench_file::Identity as Expected;
use crate::instrument::error::InstrumentError;
use crate::instrument::scpi::{DeviceError, Identity};
use std::sync::Arc;

const QUESTION: &str = "*IDN?";

/// Times the first question is asked: the first bytes after opening a port may be lost or garbled.
const TRIES: u32 = 3;

/// What came of the first words.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Greeting {
    /// Who answered.
    pub identity: Identity,
    /// Whether the instrument sends each command back.
    pub echoes: bool,
    /// What its error queue held from before.
    pub old_errors: Vec<DeviceError>,
}

impl Session {
    /// Waits until the instrument has settled, finds out who it is, and empties its registers and error queue.
    ///
    /// # Errors
    /// No reply, another instrument than expected, or the link is lost. Nothing but `*IDN?` has then been sent.
    pub fn greet(&mut self, expected: &Expected) -> Result<Greeting, InstrumentError> {
        self.link.pause(self.settle);
        self.link.clear()?;
        // Ends half a command that an earlier program may have left; an instrument answers nothing to it.
        self.link.write("", self.timing.reply_deadline)?;
        let identity = self.first_identity()?;
        self.expect(&identity, expected)?;
        self.greeted = true;
        // Being switched on before the program started is no restart: the bit is read, and so cleared, here or there.
        match self.check_step() {
            Ok(()) | Err(InstrumentError::Restarted { .. }) => {}
            Err(error) => return Err(error),
        }
        self.event_status()?;
        let old_errors = self.errors()?;
        Ok(Greeting { identity, echoes: self.link.echoes(), old_errors })
    }

    /// Asks who is there until an answer has the form of an identity.
    fn first_identity(&mut self) -> Result<Identity, InstrumentError> {
        let mut tries = TRIES;
        loop {
            tries -= 1;
            match self.try_identity() {
                Ok(identity) => return Ok(identity),
                Err(error @ InstrumentError::LinkLost { .. }) => return Err(error),
                Err(error) if tries == 0 => return Err(error),
                Err(_) => self.link.drain(self.timing.reply_deadline)?,
            }
        }
    }

    fn try_identity(&mut self) -> Result<Identity, InstrumentError> {
        let wait = self.timing.reply_deadline;
        self.link.write(QUESTION, wait)?;
        let first = self.link.receive(QUESTION, wait)?;
        let echoes = first.trim() == QUESTION;
        let line = if echoes { self.link.receive(QUESTION, wait)? } else { first };
        let Some(identity) = Identity::parse(&line) else {
            return Err(self.link.bad_reply(QUESTION, line, "maker, model, serial number and firmware"));
        };
        self.link.set_echoes(echoes);
        self.link.set_in_step(true);
        Ok(identity)
    }

    fn expect(&self, identity: &Identity, expected: &Expected) -> Result<(), InstrumentError> {
        expected.check(&identity.to_string()).map_err(|wrong| InstrumentError::WrongInstrument {
            place: Arc::clone(self.place()),
            field: wrong.field,
            read: wrong.found,
            wanted: wrong.wanted,
        })
    }
}
