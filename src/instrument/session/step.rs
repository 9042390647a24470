//! Brings questions and answers in step: the token round trip.
//!
//! `*ESE n` stores a number and `*ESE?` gives it back (IEEE 488.2-1992, 10.10 and 10.11); every instrument must know
//! both, and nothing else changes as long as no service requests are used. With a number that changes each time, an
//! answer that equals it is the answer to this question and to no older one.

use super::Session;
use crate::instrument::error::InstrumentError;
use crate::instrument::scpi::Number;
use std::ops::RangeInclusive;
use std::time::Duration;

/// The tokens: none is what a register with a single bit set replies, so that no late reply of that kind passes for a
/// token. Bit 7 is left alone.
const TOKENS: RangeInclusive<u8> = 65..=127;

/// Round trips tried before the link counts as lost.
const TRIES: u32 = 6;

/// Tries after which `*CLS` is sent as well. Not sooner, since it clears the power-on bit, the one witness of a restart.
const TRIES_BEFORE_CLEAR: u32 = 3;

impl Session {
    /// Checks with one token that the link is in step, and brings it in step if it is not.
    ///
    /// # Errors
    /// The link cannot be brought in step, or the instrument has restarted.
    pub fn check_step(&mut self) -> Result<(), InstrumentError> {
        if self.link.in_step() && !self.link.has_stray_bytes()? && self.token_returns()? {
            return Ok(());
        }
        self.link.set_in_step(false);
        self.bring_in_step()
    }

    /// Does nothing on a link in step; else stops sending, lets late answers come and go, and tries tokens.
    pub(super) fn bring_in_step(&mut self) -> Result<(), InstrumentError> {
        if self.link.in_step() {
            return Ok(());
        }
        let quiet = self.longest_pending();
        self.link.drain(quiet)?;
        // A bare terminator ends whatever half of a command has arrived.
        self.link.write("", quiet)?;
        for attempt in 0..TRIES {
            self.link.drain(if attempt == 0 { self.timing.response } else { quiet })?;
            if attempt == TRIES_BEFORE_CLEAR {
                self.link.write("*CLS", quiet)?;
                self.link.pause(self.gap);
            }
            if self.token_returns()? {
                self.link.set_in_step(true);
                return self.after_resynchronising();
            }
        }
        Err(self.link.lost("questions and answers cannot be brought in step"))
    }

    /// A restart must not go unnoticed; the errors that half a command has left are of no further interest.
    fn after_resynchronising(&mut self) -> Result<(), InstrumentError> {
        tracing::warn!("{}: the link was out of step and is in step again", self.place());
        self.refuse_power_on(self.timing.reply_deadline)?;
        for error in self.read_errors()? {
            tracing::warn!("{}: while out of step it reported {error}", self.place());
        }
        Ok(())
    }

    /// One round trip. False when the first answer is another, or none comes in time.
    fn token_returns(&mut self) -> Result<bool, InstrumentError> {
        const QUESTION: &str = "*ESE?";
        let wait = self.timing.reply_deadline;
        self.token = following(self.token);
        let order = format!("*ESE {}", self.token);
        self.link.write(&order, wait)?;
        self.link.pause(self.gap);
        self.link.write(QUESTION, wait)?;
        loop {
            match self.link.receive(QUESTION, wait) {
                Ok(line) if self.link.echoes() && [order.as_str(), QUESTION].contains(&line.trim()) => {}
                Ok(line) => return Ok(Number::parse(&line) == Ok(Number::Value(f64::from(self.token)))),
                Err(error @ InstrumentError::LinkLost { .. }) => return Err(error),
                Err(_) => return Ok(false),
            }
        }
    }

    /// Silence for this long means that no answer is under way.
    fn longest_pending(&self) -> Duration {
        self.timing.reply_deadline.max(self.timing.response)
    }
}

/// The token after `token`; the first one after the last, and at the beginning.
fn following(token: u8) -> u8 {
    token.checked_add(1).filter(|next| TOKENS.contains(next)).unwrap_or(*TOKENS.start())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn tokens_change_each_time_and_none_is_the_reply_of_a_register_with_a_single_bit() {
        let mut token = following(0);
        for _ in 0..1000 {
            assert!(!token.is_power_of_two() && token < 128, "{token}");
            let next = following(token);
            assert_ne!(next, token);
            token = next;
        }
    }
}
