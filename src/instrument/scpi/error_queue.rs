//! Entries of an instrument's error queue, as `SYSTem:ERRor?` gives them (SCPI-1999, volume 2, 21.8).

use std::fmt;

/// Longest text of an error an instrument may send, in characters (SCPI-1999, volume 2, 21.8).
const LONGEST_TEXT: usize = 255;

/// One entry: its number, and what the instrument says of it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct DeviceError {
    /// Negative for the errors of the standard, positive for the maker's own, 0 for none.
    pub code: i32,
    /// The text between the quotes; empty where the instrument sends none.
    pub text: String,
}

/// Classes of errors: SCPI-1999, volume 2, 21.8.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum ErrorClass {
    /// 0: the queue is empty.
    None,
    /// -199 to -100: the instrument did not understand the command.
    Command,
    /// -299 to -200: understood, but not carried out; a setting keeps its old value.
    Execution,
    /// -399 to -300: the instrument itself failed.
    Device,
    /// -499 to -400: a reply was asked for or read out of turn.
    Query,
    /// -599 to -500: the instrument was switched on.
    PowerOn,
    /// -899 to -600: user request, request control, operation complete: events rather than errors.
    Event,
    /// Above 0: defined by the maker.
    Maker,
    /// Below -899 or -99 to -1: reserved.
    Reserved,
}

impl DeviceError {
    /// Reads one reply to `SYSTem:ERRor?`: a number, a comma and a quoted text in which `""` stands for a quote.
    ///
    /// The comma and the quotes may be missing, as some instruments leave them out; the number may not.
    pub fn parse(reply: &str) -> Option<Self> {
        let (code, text) = reply.trim().split_once(',').unwrap_or((reply.trim(), ""));
        let code = code.trim();
        let digits = code.strip_prefix(['+', '-']).unwrap_or(code);
        if digits.is_empty() || !digits.bytes().all(|byte| byte.is_ascii_digit()) {
            return None;
        }
        Some(Self { code: code.parse().ok()?, text: unquoted(text.trim())? })
    }

    /// Whether this says that the queue is empty.
    pub fn is_none(&self) -> bool {
        self.code == 0
    }

    /// The class the number belongs to.
    pub fn class(&self) -> ErrorClass {
        match self.code {
            0 => ErrorClass::None,
            1.. => ErrorClass::Maker,
            -199..=-100 => ErrorClass::Command,
            -299..=-200 => ErrorClass::Execution,
            -399..=-300 => ErrorClass::Device,
            -499..=-400 => ErrorClass::Query,
            -599..=-500 => ErrorClass::PowerOn,
            -899..=-600 => ErrorClass::Event,
            _ => ErrorClass::Reserved,
        }
    }
}

impl fmt::Display for DeviceError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let class = match self.class() {
            ErrorClass::None => "no error",
            ErrorClass::Command => "command error",
            ErrorClass::Execution => "execution error",
            ErrorClass::Device => "device error",
            ErrorClass::Query => "query error",
            ErrorClass::PowerOn => "switched on",
            ErrorClass::Event => "event",
            ErrorClass::Maker => "maker's own error",
            ErrorClass::Reserved => "reserved number",
        };
        write!(f, "{} {:?} ({class})", self.code, self.text)
    }
}

/// The text without its quotes; `None` when a quote is opened and not closed.
fn unquoted(text: &str) -> Option<String> {
    let inner = match text.strip_prefix('"') {
        Some(rest) => rest.strip_suffix('"')?.replace("\"\"", "\""),
        None => text.to_owned(),
    };
    Some(inner.chars().take(LONGEST_TEXT).collect())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn error(code: i32, text: &str) -> Option<DeviceError> {
        Some(DeviceError { code, text: text.to_owned() })
    }

    /// The examples of SCPI-1999, volume 2, 21.8.
    #[test]
    fn entries_are_read_as_the_standard_writes_them() {
        assert_eq!(DeviceError::parse("0,\"No error\""), error(0, "No error"));
        assert_eq!(DeviceError::parse("+0,\"No error\""), error(0, "No error"));
        assert_eq!(DeviceError::parse("-222,\"Data out of range\""), error(-222, "Data out of range"));
        assert_eq!(
            DeviceError::parse("-131,\"Invalid suffix;FREQuency:CENT 2.0E+5 dbuv\""),
            error(-131, "Invalid suffix;FREQuency:CENT 2.0E+5 dbuv")
        );
        assert_eq!(
            DeviceError::parse("100,\"a \"\"quoted\"\" word, with comma\""),
            error(100, "a \"quoted\" word, with comma")
        );
    }

    #[test]
    fn sloppy_instruments_are_understood() {
        assert_eq!(DeviceError::parse("0"), error(0, ""));
        assert_eq!(DeviceError::parse("-113, Undefined header"), error(-113, "Undefined header"));
        assert_eq!(DeviceError::parse(" -350 , \"Queue overflow\" "), error(-350, "Queue overflow"));
    }

    #[test]
    fn what_is_no_entry_is_refused() {
        for text in [
            "",
            ",",
            "No error",
            "1.5,\"x\"",
            "-,\"x\"",
            "-222,\"Data out of ra",
            "99999999999,\"x\"",
            "+-1,\"x\"",
        ] {
            assert_eq!(DeviceError::parse(text), None, "{text:?}");
        }
    }

    /// SCPI-1999, volume 2, 21.8: the hundreds and one known member of each.
    #[test]
    fn classes_are_the_hundreds_of_the_standard() {
        let class = |code| DeviceError { code, text: String::new() }.class();
        for (codes, wanted) in [
            (vec![0], ErrorClass::None),
            (vec![-100, -113, -199], ErrorClass::Command),
            (vec![-200, -222, -299], ErrorClass::Execution),
            (vec![-300, -350, -363, -399], ErrorClass::Device),
            (vec![-400, -410, -499], ErrorClass::Query),
            (vec![-500, -599], ErrorClass::PowerOn),
            (vec![-600, -700, -800, -899], ErrorClass::Event),
            (vec![1, 32767], ErrorClass::Maker),
            (vec![-1, -99, -900, i32::MIN], ErrorClass::Reserved),
        ] {
            for code in codes {
                assert_eq!(class(code), wanted, "{code}");
            }
        }
    }

    #[test]
    fn an_entry_is_shown_with_its_class() {
        let shown = DeviceError { code: -222, text: "Data out of range".to_owned() }.to_string();
        assert_eq!(shown, "-222 \"Data out of range\" (execution error)");
    }
}
