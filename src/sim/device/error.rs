//! What a device says went wrong: the numbers and texts of SCPI-1999 vol. 2, 21.8, and the queue that holds them.

use std::collections::VecDeque;

/// An error or event number with its standard text.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct ScpiError {
    /// Negative: defined by the standard.
    pub code: i16,
    /// The standard's text.
    pub text: &'static str,
}

macro_rules! errors {
    ($($name:ident = $code:literal, $text:literal;)*) => {
        impl ScpiError {
            $(#[doc = concat!("`", stringify!($code), ",\"", $text, "\"`")]
            pub const $name: Self = Self { code: $code, text: $text };)*
        }
    };
}

errors! {
    INVALID_CHARACTER = -101, "Invalid character";
    SYNTAX = -102, "Syntax error";
    INVALID_SEPARATOR = -103, "Invalid separator";
    DATA_TYPE = -104, "Data type error";
    PARAMETER_NOT_ALLOWED = -108, "Parameter not allowed";
    MISSING_PARAMETER = -109, "Missing parameter";
    HEADER_SEPARATOR = -111, "Header separator error";
    MNEMONIC_TOO_LONG = -112, "Program mnemonic too long";
    UNDEFINED_HEADER = -113, "Undefined header";
    HEADER_SUFFIX = -114, "Header suffix out of range";
    NUMBER = -120, "Numeric data error";
    CHARACTER_IN_NUMBER = -121, "Invalid character in number";
    INVALID_SUFFIX = -131, "Invalid suffix";
    CHARACTER_DATA = -141, "Invalid character data";
    INVALID_STRING = -151, "Invalid string data";
    STRING_NOT_ALLOWED = -158, "String data not allowed";
    BLOCK_NOT_ALLOWED = -168, "Block data not allowed";
    EXPRESSION_NOT_ALLOWED = -178, "Expression data not allowed";
    SETTINGS_CONFLICT = -221, "Settings conflict";
    OUT_OF_RANGE = -222, "Data out of range";
    ILLEGAL_VALUE = -224, "Illegal parameter value";
    STALE = -230, "Data corrupt or stale";
    OVERFLOW = -350, "Queue overflow";
    INPUT_OVERRUN = -363, "Input buffer overrun";
    DEADLOCKED = -430, "Query DEADLOCKED";
    AFTER_INDEFINITE = -440, "Query UNTERMINATED after indefinite response";
}

impl ScpiError {
    /// True for -100 to -199: the message could not be understood, so what follows in it is not carried out.
    pub fn is_command_error(self) -> bool {
        (-199..=-100).contains(&self.code)
    }

    /// The bit of the standard event status register that this class of error sets (IEEE 488.2, 11.5.1.1).
    pub(super) fn event_bit(self) -> u8 {
        match self.code {
            -199..=-100 => 1 << 5,
            -299..=-200 => 1 << 4,
            -499..=-400 => 1 << 2,
            _ => 1 << 3,
        }
    }
}

impl std::fmt::Display for ScpiError {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{},\"{}\"", self.code, self.text)
    }
}

/// First in, first out. When full, the last entry becomes -350 and newer errors are lost (SCPI-1999 vol. 2, 21.8.1).
#[derive(Clone, Debug, Default)]
pub(super) struct ErrorQueue(VecDeque<ScpiError>);

impl ErrorQueue {
    /// Entries it holds.
    pub(super) const LENGTH: usize = 10;

    pub(super) fn push(&mut self, error: ScpiError) {
        if self.0.len() < Self::LENGTH {
            self.0.push_back(error);
        } else if let Some(last) = self.0.back_mut() {
            *last = ScpiError::OVERFLOW;
        }
    }

    pub(super) fn pop(&mut self) -> Option<ScpiError> {
        self.0.pop_front()
    }

    pub(super) fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    pub(super) fn clear(&mut self) {
        self.0.clear();
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_full_queue_keeps_its_oldest_entries_and_ends_in_overflow() {
        let mut queue = ErrorQueue::default();
        for _ in 0..ErrorQueue::LENGTH + 5 {
            queue.push(ScpiError::UNDEFINED_HEADER);
        }
        let codes: Vec<i16> = std::iter::from_fn(|| queue.pop()).map(|error| error.code).collect();
        assert_eq!(codes.len(), ErrorQueue::LENGTH);
        assert_eq!((codes[0], codes[ErrorQueue::LENGTH - 1]), (-113, -350));
    }
}
