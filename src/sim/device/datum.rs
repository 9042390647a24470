//! One parameter of a program message: read by the grammar of IEEE 488.2, 7.7, and turned into what a command wants.

use super::error::ScpiError;
use super::scanner::Scanner;

/// A parameter as sent.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Datum<'t> {
    /// Decimal numeric program data (NRf), with the suffix behind it if one was sent.
    Number { value: f64, suffix: Option<&'t str> },
    /// Character program data.
    Word(&'t str),
    /// String program data, without its quotes.
    Text(String),
}

/// What a numeric parameter may be; MIN, MAX and DEF stand for these.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Bounds {
    pub(super) least: f64,
    pub(super) most: f64,
    pub(super) default: f64,
}

impl<'t> Datum<'t> {
    /// Reads one parameter, leaving the scanner behind it.
    pub(super) fn read(scanner: &mut Scanner<'t>) -> Result<Self, ScpiError> {
        match scanner.peek() {
            Some('0'..='9' | '+' | '-' | '.') => Self::read_number(scanner),
            Some('a'..='z' | 'A'..='Z') => {
                Ok(Self::Word(scanner.take_while(|c| c.is_ascii_alphanumeric() || c == '_')))
            }
            Some(quote @ ('"' | '\'')) => Self::read_text(scanner, quote),
            Some('#') => Err(ScpiError::BLOCK_NOT_ALLOWED),
            Some('(') => Err(ScpiError::EXPRESSION_NOT_ALLOWED),
            Some(',' | ';') | None => Err(ScpiError::SYNTAX),
            Some(_) => Err(ScpiError::INVALID_CHARACTER),
        }
    }

    fn read_number(scanner: &mut Scanner<'t>) -> Result<Self, ScpiError> {
        let mut number = scanner.take_while(|c| matches!(c, '+' | '-')).to_owned();
        let mantissa = scanner.take_while(|c| c.is_ascii_digit() || c == '.');
        if number.len() > 1 || mantissa.matches('.').count() > 1 {
            return Err(ScpiError::CHARACTER_IN_NUMBER);
        }
        if !mantissa.contains(|c: char| c.is_ascii_digit()) {
            return Err(ScpiError::NUMBER);
        }
        number.push_str(mantissa);
        if let Some(exponent) = scanner.take_exponent() {
            number.push('e');
            number.push_str(&exponent);
        }
        let value = number.parse().map_err(|_| ScpiError::NUMBER)?;
        scanner.skip_space();
        let suffix = scanner.take_while(|c| c.is_ascii_alphabetic() || c == '/');
        Ok(Self::Number { value, suffix: (!suffix.is_empty()).then_some(suffix) })
    }

    fn read_text(scanner: &mut Scanner<'t>, quote: char) -> Result<Self, ScpiError> {
        let mut text = String::new();
        loop {
            scanner.next();
            text.push_str(scanner.take_while(|c| c != quote));
            if scanner.next().is_none() {
                return Err(ScpiError::INVALID_STRING);
            }
            if scanner.peek() != Some(quote) {
                return Ok(Self::Text(text));
            }
            text.push(quote);
        }
    }

    /// The number meant; a value outside `bounds` is refused, never moved to the nearest allowed one.
    pub(super) fn number(&self, bounds: Bounds) -> Result<f64, ScpiError> {
        let value = match self {
            Self::Number { suffix: Some(_), .. } => return Err(ScpiError::INVALID_SUFFIX),
            Self::Number { value, suffix: None } => *value,
            Self::Word(word) => bounds.named(word).ok_or(ScpiError::CHARACTER_DATA)?,
            Self::Text(_) => return Err(ScpiError::STRING_NOT_ALLOWED),
        };
        if value >= bounds.least && value <= bounds.most { Ok(value) } else { Err(ScpiError::OUT_OF_RANGE) }
    }

    /// True for DEFault, which leaves the choice to the device.
    pub(super) fn is_default(&self) -> bool {
        matches!(self, Self::Word(word) if is_word(word, "DEF", "DEFAULT"))
    }

    /// Boolean program data of SCPI-1999 vol. 1, 7.3: ON, OFF, or a number that is rounded.
    pub(super) fn boolean(&self) -> Result<bool, ScpiError> {
        match self {
            Self::Word(word) if word.eq_ignore_ascii_case("ON") => Ok(true),
            Self::Word(word) if word.eq_ignore_ascii_case("OFF") => Ok(false),
            Self::Word(_) => Err(ScpiError::CHARACTER_DATA),
            Self::Number { suffix: Some(_), .. } => Err(ScpiError::INVALID_SUFFIX),
            Self::Number { value, suffix: None } => Ok(value.abs() >= 0.5),
            Self::Text(_) => Err(ScpiError::STRING_NOT_ALLOWED),
        }
    }
}

impl Bounds {
    /// The value a word stands for, in its long or short form.
    pub(super) fn named(&self, word: &str) -> Option<f64> {
        if is_word(word, "MIN", "MINIMUM") {
            Some(self.least)
        } else if is_word(word, "MAX", "MAXIMUM") {
            Some(self.most)
        } else if is_word(word, "DEF", "DEFAULT") {
            Some(self.default)
        } else if is_word(word, "INF", "INFINITY") {
            Some(f64::INFINITY)
        } else {
            None
        }
    }
}

fn is_word(word: &str, short: &str, long: &str) -> bool {
    word.eq_ignore_ascii_case(short) || word.eq_ignore_ascii_case(long)
}

#[cfg(test)]
mod tests {
    use super::*;

    const BOUNDS: Bounds = Bounds { least: 0.0, most: 30.0, default: 5.0 };

    fn number(text: &str) -> Result<f64, i16> {
        Datum::read(&mut Scanner::new(text))
            .and_then(|datum| datum.number(BOUNDS))
            .map_err(|error| error.code)
    }

    /// IEEE 488.2, 7.7.2: NRf, with white space allowed before and after the E; SCPI-1999 vol. 1, 7.2.1: MIN, MAX, DEF.
    #[test]
    fn every_form_of_number_is_understood() {
        for (text, value) in [
            ("6", 6.0),
            ("+6", 6.0),
            ("6.", 6.0),
            (".5", 0.5),
            ("6.5E0", 6.5),
            ("65e-1", 6.5),
            ("0.65 E +1", 6.5),
            ("MIN", 0.0),
            ("maximum", 30.0),
            ("DEF", 5.0),
        ] {
            assert_eq!(number(text), Ok(value), "{text}");
        }
    }

    /// Codes of SCPI-1999 vol. 2, 21.8.9 and 21.8.10.
    #[test]
    fn what_is_not_a_number_in_range_is_refused_with_its_code() {
        for (text, code) in [
            ("--6", -121),
            ("6.0.1", -121),
            (".", -120),
            ("6E", -131),
            ("6 V", -131),
            ("6V", -131),
            ("30.001", -222),
            ("-1", -222),
            ("1E400", -222),
            ("INF", -222),
            ("MINI", -141),
            ("\"6\"", -158),
            ("\"6", -151),
            ("#15hello", -168),
            ("(@1)", -178),
        ] {
            assert_eq!(number(text), Err(code), "{text}");
        }
    }

    #[test]
    fn a_doubled_quote_in_a_string_stands_for_one() {
        assert_eq!(Datum::read(&mut Scanner::new("'it''s'")), Ok(Datum::Text("it's".to_owned())));
    }

    #[test]
    fn a_boolean_is_a_word_or_a_rounded_number() {
        let boolean = |text| Datum::read(&mut Scanner::new(text)).and_then(|datum| datum.boolean());
        assert_eq!(boolean("on"), Ok(true));
        assert_eq!(boolean("0.4"), Ok(false));
        assert_eq!(boolean("-0.6"), Ok(true));
        assert_eq!(boolean("MAYBE"), Err(ScpiError::CHARACTER_DATA));
    }
}
