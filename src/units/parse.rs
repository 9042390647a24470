//! Reads a quantity as people write it: a number, a space if they like, a prefix and a unit.

use super::{AMPERE_HOUR, DAY, Unit, YEAR};
use std::time::Duration;

/// Why a text is not a quantity of the wanted unit.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum UnitError {
    /// The text does not begin with a number.
    #[error("read \"{read}\", wanted {} such as \"{}\": it does not begin with a number", .wanted.kind(), .wanted.example())]
    NotANumber {
        /// The text as found.
        read: String,
        /// The unit that was wanted.
        wanted: Unit,
    },
    /// A number without a unit.
    #[error("read \"{read}\", wanted {} such as \"{}\": the unit is missing", .wanted.kind(), .wanted.example())]
    MissingUnit {
        /// The text as found.
        read: String,
        /// The unit that was wanted.
        wanted: Unit,
    },
    /// A unit of another kind.
    #[error("read \"{read}\", which is {}, wanted {} such as \"{}\"", .found.kind(), .wanted.kind(), .wanted.example())]
    WrongUnit {
        /// The text as found.
        read: String,
        /// The unit that was wanted.
        wanted: Unit,
        /// The unit that was found.
        found: Unit,
    },
    /// A unit that could be meant in more than one way, or is not known.
    #[error("read \"{read}\", wanted {} such as \"{}\": \"{symbol}\" is not a unit{}", .wanted.kind(), .wanted.example(), hint(.meant))]
    DoubtfulUnit {
        /// The text as found.
        read: String,
        /// The unit that was wanted.
        wanted: Unit,
        /// The part that was not understood.
        symbol: String,
        /// What the writer may have meant.
        meant: Option<String>,
    },
    /// Infinite, or too large for the number format.
    #[error("read \"{read}\", wanted {} such as \"{}\": the number is too large", .wanted.kind(), .wanted.example())]
    NotFinite {
        /// The text as found.
        read: String,
        /// The unit that was wanted.
        wanted: Unit,
    },
    /// A time below zero.
    #[error("read \"{read}\", wanted a time of zero or more")]
    Negative {
        /// The text as found.
        read: String,
    },
}

fn hint(meant: &Option<String>) -> String {
    meant.as_ref().map_or_else(String::new, |meant| format!("; did you mean \"{meant}\"?"))
}

/// Reads `text` as a value of `wanted` and returns it in SI units (per cent as a fraction of one).
///
/// # Errors
/// See [`UnitError`].
pub fn parse_quantity(text: &str, wanted: Unit) -> Result<f64, UnitError> {
    let read = || text.to_owned();
    let trimmed = text.trim();
    let (number, symbol) = split_number(trimmed);
    let value: f64 = number.parse().map_err(|_| UnitError::NotANumber { read: read(), wanted })?;
    if symbol.is_empty() {
        return Err(UnitError::MissingUnit { read: read(), wanted });
    }
    let Some((power, factor, unit)) = symbol_scale(symbol) else {
        let meant = nearest_symbol(symbol, wanted);
        return Err(UnitError::DoubtfulUnit { read: read(), wanted, symbol: symbol.to_owned(), meant });
    };
    if unit != wanted {
        return Err(UnitError::WrongUnit { read: read(), wanted, found: unit });
    }
    let value = scaled(number, value, power) * factor;
    if value.is_finite() { Ok(value) } else { Err(UnitError::NotFinite { read: read(), wanted }) }
}

/// Reads a time such as `"20 ms"`, `"90 min"`, `"8 h"` or `"365 d"`.
///
/// # Errors
/// As [`parse_quantity`], and [`UnitError::Negative`].
pub fn parse_duration(text: &str) -> Result<Duration, UnitError> {
    let seconds = parse_quantity(text, Unit::Second)?;
    if seconds < 0.0 {
        return Err(UnitError::Negative { read: text.to_owned() });
    }
    Duration::try_from_secs_f64(seconds)
        .map_err(|_| UnitError::NotFinite { read: text.to_owned(), wanted: Unit::Second })
}

/// Reads a share such as `"1 %"` and returns it as a fraction, 0.01.
///
/// # Errors
/// As [`parse_quantity`].
pub fn parse_fraction(text: &str) -> Result<f64, UnitError> {
    parse_quantity(text, Unit::Percent)
}

/// Splits after the longest leading number; an exponent counts only when digits follow it.
fn split_number(text: &str) -> (&str, &str) {
    let bytes = text.as_bytes();
    let digits = |mut at: usize| {
        while bytes.get(at).is_some_and(u8::is_ascii_digit) {
            at += 1;
        }
        at
    };
    let sign = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    let mut end = digits(sign);
    if bytes.get(end) == Some(&b'.') {
        end = digits(end + 1);
    }
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        let exponent = digits(end + 1 + sign);
        if exponent > end + 1 + sign {
            end = exponent;
        }
    }
    (&text[..end], text[end..].trim_start())
}

/// Scales by a power of ten through the text, so that `"5.88 V"` and `"5880 mV"` are the same number.
fn scaled(number: &str, value: f64, power: i32) -> f64 {
    if power == 0 {
        return value;
    }
    let (mantissa, exponent) = number.split_once(['e', 'E']).unwrap_or((number, "0"));
    match exponent.parse::<i32>() {
        Ok(exponent) => {
            format!("{mantissa}e{}", exponent.saturating_add(power)).parse().unwrap_or(f64::INFINITY)
        }
        Err(_) => f64::INFINITY,
    }
}

/// Units with their symbols, to which a prefix may be set.
const UNITS: [(&str, Unit); 17] = [
    ("V", Unit::Volt),
    ("A", Unit::Ampere),
    ("ohm", Unit::Ohm),
    ("Ω", Unit::Ohm),
    ("\u{2126}", Unit::Ohm),
    ("W", Unit::Watt),
    ("S", Unit::Siemens),
    ("F", Unit::Farad),
    ("C", Unit::Coulomb),
    ("s", Unit::Second),
    ("degC", Unit::Celsius),
    ("°C", Unit::Celsius),
    ("%", Unit::Percent),
    ("ppm", Unit::Percent),
    ("ppm/K", Unit::PerKelvin),
    ("ppm/°C", Unit::PerKelvin),
    ("ppm/degC", Unit::PerKelvin),
];

/// Prefixes of the SI Brochure in the range a bench meets, as powers of ten.
const PREFIXES: [(&str, i32); 9] =
    [("p", -12), ("n", -9), ("u", -6), ("µ", -6), ("μ", -6), ("m", -3), ("k", 3), ("M", 6), ("G", 9)];

/// Units outside the SI that are accepted with it (SI Brochure, table 8), and the Julian year: symbol, value in the
/// SI unit, whether a prefix may be set to it.
const ACCEPTED: [(&str, f64, Unit, bool); 8] = [
    ("Ah", AMPERE_HOUR, Unit::Coulomb, true),
    ("A h", AMPERE_HOUR, Unit::Coulomb, true),
    ("min", 60.0, Unit::Second, false),
    ("h", 3600.0, Unit::Second, false),
    ("d", DAY, Unit::Second, false),
    ("days", DAY, Unit::Second, false),
    ("year", YEAR, Unit::Second, false),
    ("years", YEAR, Unit::Second, false),
];

/// Power of ten, further factor and unit of a symbol.
fn symbol_scale(symbol: &str) -> Option<(i32, f64, Unit)> {
    let plain = |symbol: &str| UNITS.iter().find(|(text, _)| *text == symbol).map(|(_, unit)| *unit);
    let accepted = |symbol: &str| ACCEPTED.into_iter().find(|(text, ..)| *text == symbol);
    if let Some(unit) = plain(symbol) {
        let power = match symbol {
            "%" => -2,
            ratio if ratio.starts_with("ppm") => -6,
            _ => 0,
        };
        return Some((power, 1.0, unit));
    }
    if let Some((_, factor, unit, _)) = accepted(symbol) {
        return Some((0, factor, unit));
    }
    PREFIXES.iter().find_map(|(prefix, power)| {
        let symbol = symbol.strip_prefix(prefix)?;
        if let Some((_, factor, unit, true)) = accepted(symbol) {
            return Some((*power, factor, unit));
        }
        let unit = plain(symbol)?;
        (!matches!(unit, Unit::Percent | Unit::PerKelvin | Unit::Celsius)).then_some((*power, 1.0, unit))
    })
}

/// The known symbol of the wanted unit that differs from `symbol` by case or one letter.
fn nearest_symbol(symbol: &str, wanted: Unit) -> Option<String> {
    let names = UNITS.iter().filter(|(_, unit)| *unit == wanted).map(|(name, _)| *name);
    let all: Vec<String> = names
        .flat_map(|name| {
            std::iter::once(name.to_owned()).chain(PREFIXES.iter().map(move |(p, _)| format!("{p}{name}")))
        })
        .chain(ACCEPTED.iter().filter(|(_, _, unit, _)| *unit == wanted).map(|(name, ..)| (*name).to_owned()))
        .collect();
    let folded = symbol.to_lowercase();
    all.iter()
        .find(|known| known.to_lowercase() == folded)
        .or_else(|| {
            all.iter().find(|known| {
                strsim::damerau_levenshtein(&folded, &known.to_lowercase()) == 1 && known.chars().count() > 1
            })
        })
        .cloned()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn every_common_spelling_is_read() {
        for (text, unit, value) in [
            ("6.00 V", Unit::Volt, 6.0),
            ("250 mV", Unit::Volt, 0.25),
            ("2.4 uA", Unit::Ampere, 2.4e-6),
            ("2.4 µA", Unit::Ampere, 2.4e-6),
            ("2.4\u{3bc}A", Unit::Ampere, 2.4e-6),
            ("4.7 Mohm", Unit::Ohm, 4.7e6),
            ("4.7 MΩ", Unit::Ohm, 4.7e6),
            ("20 ms", Unit::Second, 0.02),
            ("1 %", Unit::Percent, 0.01),
            ("250 ppm", Unit::Percent, 250e-6),
            ("100 ppm/K", Unit::PerKelvin, 100e-6),
            ("100 ppm/°C", Unit::PerKelvin, 100e-6),
            ("-20 °C", Unit::Celsius, -20.0),
            ("1e-3 V", Unit::Volt, 1e-3),
            ("200 mAh", Unit::Coulomb, 720.0),
            ("2 A h", Unit::Coulomb, 7200.0),
            ("5 C", Unit::Coulomb, 5.0),
            ("36 h", Unit::Second, 129_600.0),
            ("2 years", Unit::Second, 63_115_200.0),
        ] {
            assert_eq!(parse_quantity(text, unit), Ok(value), "{text}");
        }
    }

    #[test]
    fn prefix_and_plain_spelling_are_the_same_number() {
        assert_eq!(parse_quantity("5880 mV", Unit::Volt), parse_quantity("5.88 V", Unit::Volt));
    }

    #[test]
    fn a_bad_unit_says_what_was_read_and_what_was_wanted() {
        let message = |text, unit| parse_quantity(text, unit).map_err(|e| e.to_string()).expect_err(text);
        assert_eq!(
            message("6.0", Unit::Volt),
            "read \"6.0\", wanted a voltage such as \"6.00 V\": the unit is missing"
        );
        assert_eq!(
            message("6.0 A", Unit::Volt),
            "read \"6.0 A\", which is a current, wanted a voltage such as \"6.00 V\""
        );
        assert_eq!(
            message("6.0 v", Unit::Volt),
            "read \"6.0 v\", wanted a voltage such as \"6.00 V\": \"v\" is not a unit; did you mean \"V\"?"
        );
        assert_eq!(
            message("six V", Unit::Volt),
            "read \"six V\", wanted a voltage such as \"6.00 V\": it does not begin with a number"
        );
        assert!(message("3 kyears", Unit::Second).contains("\"kyears\" is not a unit"));
        assert!(message("nan V", Unit::Volt).contains("does not begin with a number"));
        assert!(message("1e999 V", Unit::Volt).contains("too large"));
        assert!(parse_duration("-1 s").is_err());
    }

    #[test]
    fn long_times_are_read_in_minutes_hours_and_days() {
        for (text, seconds) in [("90 min", 5400), ("8 h", 28_800), ("365 d", 31_536_000), ("2 s", 2)] {
            assert_eq!(parse_duration(text), Ok(Duration::from_secs(seconds)), "{text}");
        }
        assert!(parse_duration("-1 h").is_err() && parse_duration("h").is_err());
        assert!(parse_duration("1e999 d").is_err());
    }

    proptest! {
        #[test]
        fn any_text_is_read_or_refused_without_panic(text in ".{0,24}") {
            let _ = parse_quantity(&text, Unit::Volt);
            let _ = parse_duration(&text);
        }

        #[test]
        fn what_is_read_is_finite(mantissa in "[+-]?[0-9]{1,4}(\\.[0-9]{0,4})?(e[+-]?[0-9]{1,3})?") {
            if let Ok(value) = parse_quantity(&format!("{mantissa} mV"), Unit::Volt) {
                prop_assert!(value.is_finite());
            }
        }
    }
}
