//! Switching a supply's output on and, above all, off.

use super::Session;
use crate::instrument::error::InstrumentError;
use crate::instrument::scpi::Number;
use std::sync::Arc;

/// Attempts in one order to switch off; the second finds a link that the first has brought in step.
const ATTEMPTS: u32 = 2;

/// What switches an output off, and what asks for its state.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SwitchOff {
    /// Sent in this order: lowest voltage first, so that capacitors at the output discharge, then off.
    pub commands: Vec<String>,
    /// Answered by `0` when the output is off and by `1` when it is on.
    pub question: String,
}

impl Session {
    /// Switches the output on and reads it back. From before the first byte until [`Session::switch_off`] succeeds,
    /// the end of this session, however it comes, sends `orders`.
    ///
    /// # Errors
    /// It did not switch on, or as for [`Session::set`].
    pub fn switch_on(&mut self, command: &str, orders: &SwitchOff) -> Result<(), InstrumentError> {
        self.armed = Some(orders.clone());
        self.command(command)?;
        let reply = self.query(&orders.question)?;
        match state(&reply) {
            Some(true) => Ok(()),
            Some(false) => Err(self.output_not_taken(command, "off", reply)),
            None => Err(self.link.bad_reply(&orders.question, reply, "1 or 0")),
        }
    }

    /// Switches the output off. `Ok` only when the instrument says that it is off.
    ///
    /// # Errors
    /// The instrument does not say so: the output may still be on.
    pub fn switch_off(&mut self, orders: &SwitchOff) -> Result<(), InstrumentError> {
        let mut outcome = self.try_switch_off(orders);
        for _ in 1..ATTEMPTS {
            if !matches!(outcome, Err(ref error) if !matches!(error, InstrumentError::LinkLost { .. })) {
                break;
            }
            outcome = self.try_switch_off(orders);
        }
        if outcome.is_ok() {
            self.armed = None;
        }
        outcome
    }

    fn try_switch_off(&mut self, orders: &SwitchOff) -> Result<(), InstrumentError> {
        // On a link out of step the order goes out at once, blindly: bringing it in step first takes seconds. What
        // fails here shows in the answer.
        let in_step = self.link.in_step();
        if !in_step {
            let _ = self.link.write("", self.timing.reply_deadline);
        }
        for command in &orders.commands {
            let _ = if in_step {
                self.command(command)
            } else {
                self.link.write(command, self.timing.reply_deadline).map(|()| self.link.pause(self.gap))
            };
        }
        let reply = self.query(&orders.question)?;
        match state(&reply) {
            Some(false) => Ok(()),
            Some(true) => {
                Err(self.output_not_taken(orders.commands.last().map_or("", String::as_str), "on", reply))
            }
            None => Err(self.link.bad_reply(&orders.question, reply, "1 or 0")),
        }
    }

    fn output_not_taken(&mut self, command: &str, before: &str, read: String) -> InstrumentError {
        match self.errors() {
            Ok(errors) => InstrumentError::NotTaken {
                place: Arc::clone(self.place()),
                command: command.to_owned(),
                before: before.to_owned(),
                read,
                errors,
            },
            Err(error) => error,
        }
    }
}

/// Whether the output is on, by the boolean reply of SCPI-1999, volume 1, 7.3; some instruments send the words.
fn state(reply: &str) -> Option<bool> {
    match Number::parse(reply) {
        Ok(Number::Value(value)) => Some(value.abs() >= 0.5),
        Ok(_) => None,
        Err(_) if reply.trim().eq_ignore_ascii_case("ON") => Some(true),
        Err(_) if reply.trim().eq_ignore_ascii_case("OFF") => Some(false),
        Err(_) => None,
    }
}
