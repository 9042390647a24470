//! A setting is made by sending it and reading it back.

use super::Session;
use crate::instrument::error::InstrumentError;
use crate::instrument::scpi::{Number, write_number};
use std::sync::Arc;
use std::time::Duration;

/// One setting: what to send, how to ask for it, and what the answer must be.
#[derive(Clone, Debug, PartialEq)]
pub struct Setting {
    /// What is sent.
    pub command: String,
    /// What asks for the value set.
    pub question: String,
    /// The value sent, in the unit of the answer.
    pub wanted: f64,
    /// How far the answer may lie from it: the instrument rounds to its own steps.
    pub tolerance: f64,
    /// How long the answer may take; relays are slower than registers.
    pub deadline: Duration,
}

impl Session {
    /// Makes a setting and confirms it.
    ///
    /// # Errors
    /// It did not take (with what the instrument says about it), the instrument restarted, or the link failed.
    pub fn set(&mut self, setting: &Setting) -> Result<(), InstrumentError> {
        self.command(&setting.command)?;
        let read = self.query_number_within(&setting.question, setting.deadline)?;
        if let Number::Value(value) = read
            && (value - setting.wanted).abs() <= setting.tolerance
        {
            self.confirmed.insert(setting.question.clone(), value);
            return Ok(());
        }
        Err(self.not_taken(setting, read))
    }

    /// Finds out why a setting did not take.
    fn not_taken(&mut self, setting: &Setting, read: Number) -> InstrumentError {
        let read = shown(read);
        let before = self
            .confirmed
            .get(&setting.question)
            .map_or_else(|| "unknown".to_owned(), |value| write_number(*value));
        match self.event_status() {
            Ok(status) if status.power_on() => {
                return self.restarted(format!("{:?} reads {read}, was {before}", setting.question));
            }
            Ok(_) => {}
            Err(error) => return error,
        }
        match self.errors() {
            Ok(errors) => InstrumentError::NotTaken {
                place: Arc::clone(self.place()),
                command: setting.command.clone(),
                before,
                read,
                errors,
            },
            Err(error) => error,
        }
    }
}

fn shown(number: Number) -> String {
    match number {
        Number::Value(value) => write_number(value),
        Number::Overload => "overload".to_owned(),
        Number::NotANumber => "not a number".to_owned(),
    }
}
