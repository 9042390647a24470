//! Numbers in replies and commands.
//!
//! A reply is read by the grammar of NRf in IEEE 488.2-1992, 7.7.2 and 8.7.2 to 8.7.4, and by nothing wider: what a
//! general parser accepts beyond it (`inf`, `nan`, an exponent without digits, a tail of other bytes) is how a broken
//! transmission turns into a plausible reading.

/// Infinity as SCPI-1999, volume 1, 7.2.1.4 writes it; instruments send it for an overload.
const INFINITY: f64 = 9.9e37;

/// "Not a number" as SCPI-1999, volume 1, 7.2.1.5 writes it.
const NOT_A_NUMBER: f64 = 9.91e37;

/// Half the distance between the two special values: instruments print them with more or fewer digits, some from
/// single precision (`9.8999995E+37`).
const MARGIN: f64 = (NOT_A_NUMBER - INFINITY) / 2.0;

/// Words sent in place of a number when a reading is above the range. Not standardised; common practice.
const OVERLOAD_WORDS: [&str; 4] = ["OL", "OVLD", "OVERLOAD", "OVERFLOW"];

/// What a numeric reply says.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Number {
    /// A finite value.
    Value(f64),
    /// The reading is above the range, on either side of zero.
    Overload,
    /// The instrument has no reading.
    NotANumber,
}

/// A reply that is not a number in any of the known forms.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error("not a number as IEEE 488.2 writes it")]
pub struct NotNumeric;

impl Number {
    /// Reads the reply to a numeric query; blanks around it are allowed, nothing else is.
    ///
    /// # Errors
    /// Anything but NR1, NR2, NR3, the special values of SCPI-1999 or a word for an overload.
    pub fn parse(reply: &str) -> Result<Self, NotNumeric> {
        let text = reply.trim_matches([' ', '\t']);
        if is_overload_word(text) {
            return Ok(Number::Overload);
        }
        if !is_nrf(text.as_bytes()) {
            return Err(NotNumeric);
        }
        let value: f64 = text.parse().map_err(|_| NotNumeric)?;
        Ok(if (value - NOT_A_NUMBER).abs() < MARGIN {
            Number::NotANumber
        } else if value.abs() > INFINITY - MARGIN {
            Number::Overload
        } else {
            Number::Value(value)
        })
    }

    /// The value, unless it is one of the special ones.
    pub fn value(self) -> Option<f64> {
        match self {
            Number::Value(value) => Some(value),
            Number::Overload | Number::NotANumber => None,
        }
    }
}

fn is_overload_word(text: &str) -> bool {
    let word = text.trim_start_matches(['+', '-']);
    let dashes = text.len() >= 2 && text.bytes().all(|byte| byte == b'-');
    dashes || OVERLOAD_WORDS.iter().any(|known| known.eq_ignore_ascii_case(word))
}

/// Whether the text is one NRf: sign, digits with at most one point, and an exponent that has digits.
fn is_nrf(text: &[u8]) -> bool {
    let unsigned = without_sign(text);
    let (whole, rest) = split_digits(unsigned);
    let (fraction, rest) = match rest {
        [b'.', rest @ ..] => split_digits(rest),
        rest => (0, rest),
    };
    let exponent = match rest {
        [] => return whole + fraction > 0,
        [b'E' | b'e', exponent @ ..] => without_sign(exponent),
        _ => return false,
    };
    let (digits, rest) = split_digits(exponent);
    whole + fraction > 0 && digits > 0 && rest.is_empty()
}

fn without_sign(text: &[u8]) -> &[u8] {
    match text {
        [b'+' | b'-', rest @ ..] => rest,
        all => all,
    }
}

/// The number of digits at the start, and what follows them.
fn split_digits(text: &[u8]) -> (usize, &[u8]) {
    let digits = text.iter().take_while(|byte| byte.is_ascii_digit()).count();
    (digits, &text[digits..])
}

/// Writes a number for a command with nine significant digits: NR2 where that is short, otherwise NR3.
///
/// Nine digits hold a nanovolt at one volt and hide the last bits of sums such as 0.1 + 0.2. What is not finite is
/// written as SCPI-1999 writes it, which every instrument refuses as a setting.
pub fn write_number(value: f64) -> String {
    if value.is_nan() {
        return "9.91E37".to_owned();
    }
    if value.is_infinite() {
        return if value > 0.0 { "9.9E37".to_owned() } else { "-9.9E37".to_owned() };
    }
    let scientific = format!("{value:.8E}");
    let rounded: f64 = scientific.parse().unwrap_or(value);
    if rounded == 0.0 {
        "0".to_owned()
    } else if (1e-4..1e9).contains(&rounded.abs()) {
        format!("{rounded}")
    } else {
        format!("{rounded:E}")
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    /// The forms of IEEE 488.2-1992: NR1 (8.7.2), NR2 (8.7.3), NR3 (8.7.4), and the flexible NRf of 7.7.2, which may
    /// leave out the digits on one side of the point.
    #[test]
    fn all_forms_of_ieee_488_2_are_read() {
        for (text, value) in [
            ("0", 0.0),
            ("12", 12.0),
            ("+12", 12.0),
            ("-12", -12.0),
            ("3.000", 3.0),
            ("+3.5", 3.5),
            ("-0.25", -0.25),
            ("+3.85000E-06", 3.85e-6),
            ("1.0E0", 1.0),
            ("-1.5E+3", -1500.0),
            ("1e3", 1000.0),
            ("10E-1", 1.0),
            (".5", 0.5),
            ("5.", 5.0),
            ("-.5E1", -5.0),
            ("000.10", 0.1),
            (" 3.1", 3.1),
            ("3.1 ", 3.1),
        ] {
            assert_eq!(Number::parse(text), Ok(Number::Value(value)), "{text:?}");
        }
    }

    #[test]
    fn what_a_broken_transmission_leaves_is_refused() {
        for text in [
            "",
            " ",
            "+",
            "-",
            ".",
            "E",
            "E5",
            "+E5",
            ".E5",
            "1.2E",
            "1.2E-",
            "1.2E+",
            "1.2345E-0x",
            "1.2.3",
            "1,2",
            "1 2",
            "1.2 E3",
            "1.2E 3",
            "+-1",
            "--1",
            "1-",
            "inf",
            "-inf",
            "Infinity",
            "nan",
            "NaN",
            "0x10",
            "1_000",
            "3.1\r",
            "3.1V",
            "3.1 V",
            "1.2E3.4",
            "١",
            "\u{fffd}3.1",
            "3.1;3.2",
            "\"3.1\"",
            "-",
        ] {
            assert_eq!(Number::parse(text), Err(NotNumeric), "{text:?}");
        }
    }

    /// SCPI-1999, volume 1, 7.2.1.4 and 7.2.1.5; spellings seen in instrument manuals.
    #[test]
    fn special_values_of_scpi_are_not_numbers() {
        for text in [
            "9.9E37",
            "+9.9E+37",
            "9.90000E+37",
            "9.9000000E+37",
            "9.8999995E+37",
            "-9.9E37",
            "-9.9E+37",
            "1E99",
        ] {
            assert_eq!(Number::parse(text), Ok(Number::Overload), "{text:?}");
        }
        for text in ["9.91E37", "+9.91E+37", "9.910000E+37", "9.9099998E+37"] {
            assert_eq!(Number::parse(text), Ok(Number::NotANumber), "{text:?}");
        }
        assert_eq!(Number::parse("9.7E37"), Ok(Number::Value(9.7e37)));
        assert_eq!(Number::parse("1E999999"), Ok(Number::Overload));
    }

    #[test]
    fn words_for_an_overload_are_known() {
        for text in ["OL", "+OL", "-OL", "ol", "OVLD", "OVERLOAD", "----", "--", " OL "] {
            assert_eq!(Number::parse(text), Ok(Number::Overload), "{text:?}");
        }
        assert_eq!(Number::parse("OLD"), Err(NotNumeric));
    }

    #[test]
    fn numbers_for_commands_are_short_and_without_rounding_noise() {
        for (value, text) in [
            (6.0, "6"),
            (5.97, "5.97"),
            (0.1 + 0.2, "0.3"),
            (0.35, "0.35"),
            (-1.25, "-1.25"),
            (0.0, "0"),
            (-0.0, "0"),
            (2.4e-6, "2.4E-6"),
            (1e-12, "1E-12"),
            (123_456.789, "123456.789"),
            (4.7e9, "4.7E9"),
            (f64::NAN, "9.91E37"),
            (f64::INFINITY, "9.9E37"),
            (f64::NEG_INFINITY, "-9.9E37"),
        ] {
            assert_eq!(write_number(value), text);
        }
    }

    proptest! {
        #[test]
        fn any_text_is_read_without_panic(text in "\\PC{0,20}") {
            let _ = Number::parse(&text);
        }

        #[test]
        fn what_is_written_is_read_back_to_nine_digits(value in -1e12..1e12_f64) {
            let read = Number::parse(&write_number(value)).expect("our own text").value().expect("a finite value");
            prop_assert!((read - value).abs() <= 1e-8 * value.abs(), "{value} became {read}");
        }

        #[test]
        fn a_reply_cut_anywhere_is_refused_or_has_no_exponent(digits in 0.0..9.99_f64, exponent in -20..20_i32, cut in 1..10_usize) {
            let whole = format!("{digits:.5}E{exponent:+03}");
            let part = &whole[..whole.len() - cut.min(whole.len() - 1)];
            if part.contains('E') && part.ends_with(['E', '+', '-']) {
                prop_assert_eq!(Number::parse(part), Err(NotNumeric));
            }
        }
    }
}
