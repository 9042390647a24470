//! A program message taken apart: units between semicolons, each a header and its parameters.
//!
//! Grammar of IEEE 488.2, 7.3 and 7.6; the header path that a unit inherits from the one before it is that of SCPI-1999
//! vol. 1, 6.2.4: the level of the last header, unless a colon leads back to the root.

use super::datum::Datum;
use super::error::ScpiError;
use super::scanner::Scanner;

/// Longest mnemonic of IEEE 488.2, 7.6.1.4.1.
const MNEMONIC_LENGTH: usize = 12;

/// One command or query.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Unit<'t> {
    pub(super) header: Header<'t>,
    /// True when the header ended in a question mark.
    pub(super) query: bool,
    pub(super) data: Vec<Datum<'t>>,
}

/// What a unit is about.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Header<'t> {
    /// A common command of IEEE 488.2, without its asterisk.
    Common(&'t str),
    /// All mnemonics from the root.
    Path(Vec<&'t str>),
}

/// The units of one message, in order; the first error ends them, since nothing behind it can be trusted.
pub(super) struct Units<'t> {
    scanner: Scanner<'t>,
    level: Vec<&'t str>,
    state: State,
}

#[derive(Clone, Copy, PartialEq)]
enum State {
    First,
    Further,
    Over,
}

impl<'t> Units<'t> {
    /// Begins to read one message, given without its terminator.
    pub(super) fn new(message: &'t str) -> Self {
        Self { scanner: Scanner::new(message), level: Vec::new(), state: State::First }
    }

    fn unit(&mut self) -> Result<Option<Unit<'t>>, ScpiError> {
        self.scanner.skip_space();
        if self.scanner.peek().is_none() && self.state == State::First {
            return Ok(None);
        }
        let header = self.header()?;
        let query = self.scanner.peek() == Some('?');
        if query {
            self.scanner.next();
        }
        let separated = self.scanner.skip_space();
        let data = match self.scanner.peek() {
            None | Some(';') => Vec::new(),
            Some(_) if separated => self.data()?,
            Some(c) if c.is_ascii() => return Err(ScpiError::HEADER_SEPARATOR),
            Some(_) => return Err(ScpiError::INVALID_CHARACTER),
        };
        self.state = if self.scanner.next().is_some() { State::Further } else { State::Over };
        Ok(Some(Unit { header, query, data }))
    }

    fn header(&mut self) -> Result<Header<'t>, ScpiError> {
        match self.scanner.peek() {
            Some('*') => {
                self.scanner.next();
                return self.mnemonic().map(Header::Common);
            }
            Some(':') => {
                self.scanner.next();
                self.level.clear();
            }
            _ => {}
        }
        let mut path = self.level.clone();
        path.push(self.mnemonic()?);
        while self.scanner.peek() == Some(':') {
            self.scanner.next();
            path.push(self.mnemonic()?);
        }
        self.level = path[..path.len() - 1].to_vec();
        Ok(Header::Path(path))
    }

    fn mnemonic(&mut self) -> Result<&'t str, ScpiError> {
        match self.scanner.peek() {
            Some(c) if c.is_ascii_alphabetic() => {}
            Some(' ' | ';' | ':' | '?' | '*') | None => return Err(ScpiError::SYNTAX),
            Some(_) => return Err(ScpiError::INVALID_CHARACTER),
        }
        let mnemonic = self.scanner.take_while(|c| c.is_ascii_alphanumeric() || c == '_');
        if mnemonic.len() > MNEMONIC_LENGTH { Err(ScpiError::MNEMONIC_TOO_LONG) } else { Ok(mnemonic) }
    }

    fn data(&mut self) -> Result<Vec<Datum<'t>>, ScpiError> {
        let mut data = Vec::new();
        loop {
            data.push(Datum::read(&mut self.scanner)?);
            self.scanner.skip_space();
            match self.scanner.peek() {
                None | Some(';') => return Ok(data),
                Some(',') => self.scanner.next(),
                Some(_) => return Err(ScpiError::INVALID_SEPARATOR),
            };
            self.scanner.skip_space();
        }
    }
}

impl<'t> Iterator for Units<'t> {
    type Item = Result<Unit<'t>, ScpiError>;

    fn next(&mut self) -> Option<Self::Item> {
        if self.state == State::Over {
            return None;
        }
        let unit = self.unit().transpose();
        if !matches!(unit, Some(Ok(_))) {
            self.state = State::Over;
        }
        unit
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn paths(message: &str) -> Vec<String> {
        Units::new(message)
            .map(|unit| match unit {
                Ok(Unit { header: Header::Common(name), .. }) => format!("*{name}"),
                Ok(Unit { header: Header::Path(path), .. }) => path.join(":"),
                Err(error) => error.code.to_string(),
            })
            .collect()
    }

    /// The examples of SCPI-1999 vol. 1, 6.2.4, in our own commands.
    #[test]
    fn a_unit_inherits_the_level_of_the_header_before_it() {
        assert_eq!(paths("SENS:CURR:RANG 1;NPLC 10"), ["SENS:CURR:RANG", "SENS:CURR:NPLC"]);
        assert_eq!(paths("SENS:CURR:RANG 1;:OUTP ON;VOLT 5"), ["SENS:CURR:RANG", "OUTP", "VOLT"]);
        assert_eq!(paths("SOUR:VOLT 5;*OPC?;CURR 1"), ["SOUR:VOLT", "*OPC", "SOUR:CURR"]);
    }

    #[test]
    fn an_empty_message_has_no_units_and_an_empty_unit_is_a_syntax_error() {
        assert_eq!(paths(" \t"), [""; 0]);
        assert_eq!(paths("VOLT 5;"), ["VOLT", "-102"]);
        assert_eq!(paths("VOLT 5;;CURR 1"), ["VOLT", "-102"]);
    }

    /// Codes of SCPI-1999 vol. 2, 21.8.9.
    #[test]
    fn a_malformed_header_ends_the_message_with_its_code() {
        assert_eq!(paths("VOLT\"5\";CURR 1"), ["-111"]);
        assert_eq!(paths("VOLT 5 6"), ["-103"]);
        assert_eq!(paths("VOLTAGEAMPLITUDE 5"), ["-112"]);
        assert_eq!(paths("VOLT: 5"), ["-102"]);
        assert_eq!(paths("VÖLT 5"), ["-101"]);
        assert_eq!(paths("5"), ["-101"]);
    }

    #[test]
    fn a_semicolon_in_a_string_separates_nothing() {
        let units: Vec<_> = Units::new("SENS:FUNC \"A;B\";NPLC 1").collect();
        assert_eq!(units.len(), 2);
        assert_eq!(units[0].as_ref().expect("well formed").data, [Datum::Text("A;B".to_owned())]);
    }
}
