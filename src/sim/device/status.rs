//! The status model of IEEE 488.2, 11, with the registers SCPI-1999 vol. 1, 9 adds to it.

use super::error::{ErrorQueue, ScpiError};

/// Bit of the standard event status register: an operation is complete.
const OPERATION_COMPLETE: u8 = 1 << 0;
/// Bit of the standard event status register: power was off since it was last read.
const POWER_ON: u8 = 1 << 7;

/// Everything a device tells about itself besides its readings.
#[derive(Clone, Debug)]
pub(super) struct Status {
    /// Errors not yet asked for.
    pub(super) errors: ErrorQueue,
    events: u8,
    /// Which events are summed up in the status byte (`*ESE`).
    pub(super) event_enable: u8,
    /// Which bits of the status byte ask for service (`*SRE`).
    pub(super) service_enable: u8,
    /// What makes readings doubtful.
    pub(super) questionable: Register,
    /// What the device is doing.
    pub(super) operation: Register,
}

impl Status {
    /// As after power came on.
    pub(super) fn at_power_on() -> Self {
        Self {
            errors: ErrorQueue::default(),
            events: POWER_ON,
            event_enable: 0,
            service_enable: 0,
            questionable: Register::default(),
            operation: Register::default(),
        }
    }

    pub(super) fn report(&mut self, error: ScpiError) {
        self.events |= error.event_bit();
        self.errors.push(error);
    }

    pub(super) fn complete_operation(&mut self) {
        self.events |= OPERATION_COMPLETE;
    }

    /// Reads the standard event status register, which clears it.
    pub(super) fn take_events(&mut self) -> u8 {
        std::mem::take(&mut self.events)
    }

    /// `*CLS`: events and errors go, what is enabled stays.
    pub(super) fn clear(&mut self) {
        self.events = 0;
        self.errors.clear();
        self.questionable.event = 0;
        self.operation.event = 0;
    }

    /// The status byte (IEEE 488.2, 11.2; bits 2, 3 and 7 by SCPI-1999 vol. 1, 9).
    pub(super) fn byte(&self, message_available: bool) -> u8 {
        let bit = |set: bool, number: u8| u8::from(set) << number;
        let summary = bit(!self.errors.is_empty(), 2)
            | bit(self.questionable.summary(), 3)
            | bit(message_available, 4)
            | bit(self.events & self.event_enable != 0, 5)
            | bit(self.operation.summary(), 7);
        summary | bit(summary & self.service_enable & !(1 << 6) != 0, 6)
    }
}

/// A condition, the events latched from its rising edges, and which of them are summed up.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Register {
    condition: u16,
    event: u16,
    pub(super) enable: u16,
}

impl Register {
    pub(super) fn update(&mut self, condition: u16) {
        self.event |= condition & !self.condition;
        self.condition = condition;
    }

    pub(super) fn condition(&self) -> u16 {
        self.condition
    }

    pub(super) fn take_event(&mut self) -> u16 {
        std::mem::take(&mut self.event)
    }

    fn summary(&self) -> bool {
        self.event & self.enable != 0
    }
}
