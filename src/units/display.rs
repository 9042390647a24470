//! Writes a quantity for people: a prefix that keeps the number between 1 and 1000, and its unit.

use super::{AMPERE_HOUR, DAY, Unit, YEAR};

/// Half a unit of the fourth digit more: what four digits round up to the next power of ten counts as that power.
const HALF_DIGIT: f64 = 1.000_05;

/// Writes `value` with four significant digits, a prefix and the unit: `6.000 V`, `2.400 µA`.
pub fn prefixed(value: f64, unit: Unit) -> String {
    let (scale, symbol) = scale_for(value, unit);
    let scaled = value / scale;
    let whole_digits = (scaled.abs() * HALF_DIGIT).max(1.0).log10().floor() + 1.0;
    let decimals = (4.0 - whole_digits).max(0.0) as usize;
    format!("{scaled:.decimals$} {symbol}")
}

/// Writes `value` with as many decimals as two significant digits of `uncertainty` need, both under one prefix.
///
/// Two significant digits of an expanded uncertainty are the custom of JCGM 100:2008, 7.2.6. Returns the value,
/// the uncertainty, and prefix plus unit.
pub fn with_decimals_of(value: f64, uncertainty: f64, unit: Unit) -> (String, String, String) {
    let (scale, symbol) = scale_for(value, unit);
    let spread = (uncertainty / scale).abs();
    let decimals = if spread > 0.0 && spread.is_finite() {
        (1.0 - spread.log10().floor()).clamp(0.0, 9.0) as usize
    } else {
        3
    };
    (format!("{:.decimals$}", value / scale), format!("{spread:.decimals$}"), symbol)
}

/// The number that `value` is under the prefix that [`with_decimals_of`] gives `reference`, so that limits can be
/// written in the unit of the value beside them.
pub fn under_prefix_of(value: f64, reference: f64, unit: Unit) -> f64 {
    value / scale_for(reference, unit).0
}

/// Times from here on are told in days, and from the second on in years.
const LONG: (f64, f64) = (2.0 * DAY, 2.0 * YEAR);

/// What one of the printed unit is in the SI unit, and its symbol.
fn scale_for(value: f64, unit: Unit) -> (f64, String) {
    match unit {
        Unit::Second if value.is_finite() && value.abs() >= LONG.1 => (YEAR, "years".to_owned()),
        Unit::Second if value.is_finite() && value.abs() >= LONG.0 => (DAY, "days".to_owned()),
        Unit::Coulomb => {
            let (scale, prefix) = prefix_for(value / AMPERE_HOUR, unit);
            (scale * AMPERE_HOUR, format!("{prefix}{}", unit.symbol()))
        }
        _ => {
            let (scale, prefix) = prefix_for(value, unit);
            (scale, format!("{prefix}{}", unit.symbol()))
        }
    }
}

fn prefix_for(value: f64, unit: Unit) -> (f64, &'static str) {
    if unit == Unit::Percent {
        return (0.01, "");
    }
    if unit == Unit::PerKelvin {
        return (1e-6, "");
    }
    if unit == Unit::Celsius || value == 0.0 || !value.is_finite() {
        return (1.0, "");
    }
    let prefixes =
        [(1e9, "G"), (1e6, "M"), (1e3, "k"), (1.0, ""), (1e-3, "m"), (1e-6, "µ"), (1e-9, "n"), (1e-12, "p")];
    let magnitude = value.abs() * HALF_DIGIT;
    prefixes.into_iter().find(|(scale, _)| magnitude >= *scale).unwrap_or((1e-12, "p"))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn four_digits_and_a_prefix() {
        assert_eq!(prefixed(6.0, Unit::Volt), "6.000 V");
        assert_eq!(prefixed(0.0999996, Unit::Volt), "100.0 mV");
        assert_eq!(prefixed(2.4e-6, Unit::Ampere), "2.400 µA");
        assert_eq!(prefixed(-0.107, Unit::Ampere), "-107.0 mA");
        assert_eq!(prefixed(0.01, Unit::Percent), "1.000 %");
        assert_eq!(prefixed(1e-4, Unit::PerKelvin), "100.0 ppm/K");
        assert_eq!(prefixed(0.0, Unit::Volt), "0.000 V");
        assert_eq!(prefixed(4.7e6, Unit::Ohm), "4.700 MΩ");
        assert_eq!(prefixed(720.0, Unit::Coulomb), "200.0 mAh");
        assert_eq!(prefixed(150.0, Unit::Second), "150.0 s");
        assert_eq!(prefixed(30.0 * DAY, Unit::Second), "30.00 days");
        assert_eq!(prefixed(5.93 * YEAR, Unit::Second), "5.930 years");
    }

    #[test]
    fn a_limit_takes_the_prefix_of_its_value() {
        for (value, reference, unit, number) in
            [(0.5, 0.4, Unit::Volt, 500.0), (1.5, 0.4, Unit::Volt, 1500.0), (0.02, 0.5, Unit::Percent, 2.0)]
        {
            let found = under_prefix_of(value, reference, unit);
            assert!((found - number).abs() < 1e-9 * number, "{value} beside {reference}: {found}");
        }
    }

    #[test]
    fn value_and_uncertainty_share_prefix_and_decimals() {
        let text = |value, u, unit| {
            let (value, u, unit) = with_decimals_of(value, u, unit);
            format!("{value} ± {u} {unit}")
        };
        assert_eq!(text(6.000_4, 0.001_6, Unit::Volt), "6.0004 ± 0.0016 V");
        assert_eq!(text(2.4e-6, 3.1e-8, Unit::Ampere), "2.400 ± 0.031 µA");
        assert_eq!(text(0.4, 0.0, Unit::Volt), "400.000 ± 0.000 mV");
    }
}
