//! A conversation with one instrument: questions, commands, its error queue, and what keeps answers with questions.
//!
//! A session blocks and lives on its port's own thread. Whatever failed before, the first thing the next question does
//! is to bring the link in step again, so that a late answer never answers a later question. Nothing here knows roles
//! or boards.

mod greeting;
mod output;
mod setting;
mod step;

pub use greeting::Greeting;
pub use output::SwitchOff;
pub use setting::Setting;

use super::definition::{Definition, Timing};
use super::error::{InstrumentError, Place};
use super::link::Link;
use super::scpi::{DeviceError, ErrorClass, EventStatus, Number};
use super::stream::ByteStream;
use crate::clock::Clock;
use std::collections::BTreeMap;
use std::sync::Arc;
use std::time::Duration;

/// Entries read from an error queue before it counts as endless. Queues hold 2 to some 30; common practice.
const LONGEST_QUEUE: usize = 30;

/// A conversation with one instrument.
pub struct Session {
    link: Link,
    timing: Timing,
    gap: Duration,
    settle: Duration,
    /// What gives the front panel back; sent at the end, once the instrument is known to be the right one.
    local: Vec<String>,
    greeted: bool,
    /// The last token sent; 0 before the first.
    token: u8,
    /// Settings as last read back, by question.
    confirmed: BTreeMap<String, f64>,
    /// There while the output may be on: what a session that ends must do first.
    armed: Option<SwitchOff>,
}

impl Session {
    /// Begins on an open stream; sends nothing yet.
    pub fn new(
        stream: Box<dyn ByteStream>,
        place: Arc<Place>,
        definition: &Definition,
        clock: Clock,
    ) -> Self {
        Self {
            link: Link::new(stream, place, definition.serial, clock),
            timing: definition.timing,
            gap: definition.serial.gap,
            settle: definition.serial.settle,
            local: definition.local.clone(),
            greeted: false,
            token: 0,
            confirmed: BTreeMap::new(),
            armed: None,
        }
    }

    /// Which instrument, at which port.
    pub fn place(&self) -> &Arc<Place> {
        self.link.place()
    }

    /// The port's settings as the system reports them, for people.
    pub fn port_settings(&self) -> Option<String> {
        self.link.settings()
    }

    /// Asks one question and returns the line that answers it.
    ///
    /// # Errors
    /// No reply, a cut one, or the link is lost.
    pub fn query(&mut self, question: &str) -> Result<String, InstrumentError> {
        self.query_within(question, self.timing.reply_deadline)
    }

    /// Asks a question whose answer may take as long as `wait`.
    ///
    /// # Errors
    /// As for [`Session::query`].
    pub fn query_within(&mut self, question: &str, wait: Duration) -> Result<String, InstrumentError> {
        self.get_ready()?;
        self.exchange(question, wait)
    }

    /// Asks for a number.
    ///
    /// # Errors
    /// As for [`Session::query`], and a reply that is not a number.
    pub fn query_number(&mut self, question: &str) -> Result<Number, InstrumentError> {
        self.query_number_within(question, self.timing.reply_deadline)
    }

    /// Asks for a number that may take as long as `wait`.
    ///
    /// # Errors
    /// As for [`Session::query_number`].
    pub fn query_number_within(&mut self, question: &str, wait: Duration) -> Result<Number, InstrumentError> {
        let reply = self.query_within(question, wait)?;
        Number::parse(&reply).map_err(|_| self.link.bad_reply(question, reply, "a number"))
    }

    /// Sends a command that has no reply. Whether it was obeyed, only a question can tell.
    ///
    /// # Errors
    /// The link is lost, or an instrument that echoes sent back something else.
    pub fn command(&mut self, command: &str) -> Result<(), InstrumentError> {
        self.bring_in_step()?;
        self.link.send(command, self.timing.reply_deadline)?;
        self.link.pause(self.gap);
        Ok(())
    }

    /// Empties the instrument's error queue and returns what was in it, oldest first.
    ///
    /// # Errors
    /// As for [`Session::query`], and a reply that is no entry of an error queue.
    pub fn errors(&mut self) -> Result<Vec<DeviceError>, InstrumentError> {
        self.get_ready()?;
        self.read_errors()
    }

    /// Reads the standard event status register, which clears it.
    ///
    /// # Errors
    /// As for [`Session::query`], and a reply that is no register.
    pub fn event_status(&mut self) -> Result<EventStatus, InstrumentError> {
        self.get_ready()?;
        self.read_event_status(self.timing.reply_deadline)
    }

    /// Makes sure that the instrument was not switched on again since it was last asked.
    ///
    /// # Errors
    /// It was, or as for [`Session::event_status`].
    pub fn refuse_restart(&mut self) -> Result<(), InstrumentError> {
        self.get_ready()?;
        self.refuse_power_on(self.timing.reply_deadline)
    }

    /// Makes sure that the instrument has not restarted and has nothing to report; `after` is what was sent last.
    ///
    /// # Errors
    /// It restarted, its error queue was not empty, or as for [`Session::errors`].
    pub fn refuse_errors(&mut self, after: &str) -> Result<(), InstrumentError> {
        self.refuse_errors_within(after, self.timing.reply_deadline)
    }

    /// As [`Session::refuse_errors`], where what was sent last may keep the instrument from answering for `wait`.
    ///
    /// # Errors
    /// As for [`Session::refuse_errors`].
    pub fn refuse_errors_within(&mut self, after: &str, wait: Duration) -> Result<(), InstrumentError> {
        self.get_ready()?;
        self.refuse_power_on(wait)?;
        let errors = self.errors()?;
        if let Some(error) = errors.iter().find(|error| error.class() == ErrorClass::PowerOn) {
            return Err(self.restarted(format!("it reports {error}")));
        }
        if errors.is_empty() {
            return Ok(());
        }
        Err(InstrumentError::Reported { place: Arc::clone(self.place()), command: after.to_owned(), errors })
    }

    /// The first thing before a question: what nobody asked for must not pass for its answer.
    fn get_ready(&mut self) -> Result<(), InstrumentError> {
        if self.link.has_stray_bytes()? {
            self.link.set_in_step(false);
        }
        self.bring_in_step()
    }

    fn exchange(&mut self, question: &str, wait: Duration) -> Result<String, InstrumentError> {
        self.link.send(question, wait)?;
        self.link.receive(question, wait)
    }

    fn read_errors(&mut self) -> Result<Vec<DeviceError>, InstrumentError> {
        const QUESTION: &str = "SYST:ERR?";
        let mut errors = Vec::new();
        while errors.len() < LONGEST_QUEUE {
            let reply = self.exchange(QUESTION, self.timing.reply_deadline)?;
            let Some(error) = DeviceError::parse(&reply) else {
                return Err(self.link.bad_reply(QUESTION, reply, "an error number and a text"));
            };
            if error.is_none() {
                break;
            }
            errors.push(error);
        }
        Ok(errors)
    }

    fn read_event_status(&mut self, wait: Duration) -> Result<EventStatus, InstrumentError> {
        const QUESTION: &str = "*ESR?";
        let reply = self.exchange(QUESTION, wait)?;
        EventStatus::parse(&reply)
            .ok_or_else(|| self.link.bad_reply(QUESTION, reply, "a register from 0 to 255"))
    }

    fn refuse_power_on(&mut self, wait: Duration) -> Result<(), InstrumentError> {
        if self.read_event_status(wait)?.power_on() {
            return Err(self.restarted("the power-on bit of *ESR? is set".to_owned()));
        }
        Ok(())
    }

    fn restarted(&mut self, evidence: String) -> InstrumentError {
        self.confirmed.clear();
        InstrumentError::Restarted { place: Arc::clone(self.place()), evidence }
    }
}

impl Drop for Session {
    /// Whatever ends the session, a panic included: the output goes off first, then the front panel is given back.
    fn drop(&mut self) {
        if let Some(orders) = self.armed.take() {
            match self.switch_off(&orders) {
                Ok(()) => tracing::warn!("{}: left with its output on; it is switched off", self.place()),
                Err(error) => {
                    tracing::error!("THE OUTPUT MAY STILL BE ON: switch the supply off by hand: {error}");
                }
            }
        }
        // A courtesy, not worth seconds on a link that is out of step.
        if self.greeted && self.link.in_step() {
            for command in std::mem::take(&mut self.local) {
                if self.command(&command).is_err() {
                    break;
                }
            }
        }
    }
}
