//! Quantities as newtypes over `f64` in SI base units.
//!
//! The compiler keeps volts and amps apart; only operations with a physical meaning exist. Prefixes and unit
//! symbols live at the edge: `parse` reads `"250 mV"`, `display` writes it. Time in the core is
//! [`std::time::Duration`] since the start of the run.

mod display;
mod parse;

pub use display::{prefixed, under_prefix_of, with_decimals_of};
pub use parse::{UnitError, parse_duration, parse_fraction, parse_quantity};

use serde::{Deserialize, Serialize};
use std::ops::{Add, AddAssign, Div, Mul, Neg, Sub};

/// Coulombs of an ampere hour.
pub const AMPERE_HOUR: f64 = 3600.0;

/// Seconds of a day.
pub const DAY: f64 = 86_400.0;

/// Seconds of a Julian year of 365.25 days, the year of the IAU.
pub const YEAR: f64 = 365.25 * DAY;

/// A unit this program reads and writes. In records by its ASCII symbol; a ratio, which is one in SI, as `1`.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
pub enum Unit {
    /// Electric potential, V.
    #[serde(rename = "V")]
    Volt,
    /// Electric current, A.
    #[serde(rename = "A")]
    Ampere,
    /// Electric resistance, ohm.
    #[serde(rename = "ohm")]
    Ohm,
    /// Power, W.
    #[serde(rename = "W")]
    Watt,
    /// Electric conductance, S.
    #[serde(rename = "S")]
    Siemens,
    /// Capacitance, F.
    #[serde(rename = "F")]
    Farad,
    /// Electric charge, C; people write it in ampere hours.
    #[serde(rename = "C")]
    Coulomb,
    /// Time, s.
    #[serde(rename = "s")]
    Second,
    /// Celsius temperature, degree Celsius.
    #[serde(rename = "degC")]
    Celsius,
    /// A ratio, written in per cent or in parts per million.
    #[serde(rename = "1")]
    Percent,
    /// A relative change per kelvin, written in parts per million per kelvin.
    #[serde(rename = "1/K")]
    PerKelvin,
}

impl Unit {
    /// The symbol as printed, after the prefix; a charge is printed in ampere hours, a long time in days or years.
    pub fn symbol(self) -> &'static str {
        match self {
            Unit::Volt => "V",
            Unit::Ampere => "A",
            Unit::Ohm => "Ω",
            Unit::Watt => "W",
            Unit::Siemens => "S",
            Unit::Farad => "F",
            Unit::Coulomb => "Ah",
            Unit::Second => "s",
            Unit::Celsius => "°C",
            Unit::Percent => "%",
            Unit::PerKelvin => "ppm/K",
        }
    }

    /// The symbol in plain ASCII, for files read by other programs.
    pub fn ascii(self) -> &'static str {
        match self {
            Unit::Ohm => "ohm",
            Unit::Coulomb => "C",
            Unit::Celsius => "degC",
            other => other.symbol(),
        }
    }

    /// What the unit measures, in words.
    pub fn kind(self) -> &'static str {
        match self {
            Unit::Volt => "a voltage",
            Unit::Ampere => "a current",
            Unit::Ohm => "a resistance",
            Unit::Watt => "a power",
            Unit::Siemens => "a conductance",
            Unit::Farad => "a capacitance",
            Unit::Coulomb => "a charge",
            Unit::Second => "a time",
            Unit::Celsius => "a temperature",
            Unit::Percent => "a share in per cent",
            Unit::PerKelvin => "a temperature coefficient",
        }
    }

    /// A value of this unit as a user would write it, for error messages.
    pub fn example(self) -> &'static str {
        match self {
            Unit::Volt => "6.00 V",
            Unit::Ampere => "350 mA",
            Unit::Ohm => "55 ohm",
            Unit::Watt => "3 W",
            Unit::Siemens => "200 nS",
            Unit::Farad => "47 uF",
            Unit::Coulomb => "200 mAh",
            Unit::Second => "20 ms",
            Unit::Celsius => "23 °C",
            Unit::Percent => "1 %",
            Unit::PerKelvin => "100 ppm/K",
        }
    }
}

/// A newtype that knows its [`Unit`]; what generic readers and writers need.
pub trait Quantity: Copy {
    /// The unit of the wrapped number.
    const UNIT: Unit;
    /// Wraps a number given in SI units.
    fn from_si(value: f64) -> Self;
    /// The number in SI units.
    fn si(self) -> f64;
}

macro_rules! quantity {
    ($(#[$doc:meta])* $name:ident, $unit:expr) => {
        $(#[$doc])*
        #[derive(Clone, Copy, Debug, PartialEq, PartialOrd, Serialize, Deserialize)]
        #[serde(transparent)]
        pub struct $name(pub f64);

        impl $name {
            /// Nothing of it.
            pub const ZERO: Self = Self(0.0);

            /// Reads a value with its unit and optional prefix.
            ///
            /// # Errors
            /// A missing, wrong or doubtful unit, or text that is not a number.
            pub fn parse(text: &str) -> Result<Self, UnitError> {
                parse_quantity(text, $unit).map(Self)
            }

            /// The magnitude.
            pub fn abs(self) -> Self { Self(self.0.abs()) }

            /// The smaller of two values.
            pub fn min(self, other: Self) -> Self { Self(self.0.min(other.0)) }

            /// The larger of two values.
            pub fn max(self, other: Self) -> Self { Self(self.0.max(other.0)) }

            /// False for NaN and the infinities.
            pub fn is_finite(self) -> bool { self.0.is_finite() }
        }

        impl Quantity for $name {
            const UNIT: Unit = $unit;
            fn from_si(value: f64) -> Self { Self(value) }
            fn si(self) -> f64 { self.0 }
        }

        impl Add for $name {
            type Output = Self;
            fn add(self, other: Self) -> Self { Self(self.0 + other.0) }
        }

        impl AddAssign for $name {
            fn add_assign(&mut self, other: Self) { self.0 += other.0; }
        }

        impl Sub for $name {
            type Output = Self;
            fn sub(self, other: Self) -> Self { Self(self.0 - other.0) }
        }

        impl Neg for $name {
            type Output = Self;
            fn neg(self) -> Self { Self(-self.0) }
        }

        impl Mul<f64> for $name {
            type Output = Self;
            fn mul(self, factor: f64) -> Self { Self(self.0 * factor) }
        }

        impl Div<f64> for $name {
            type Output = Self;
            fn div(self, divisor: f64) -> Self { Self(self.0 / divisor) }
        }

        impl Div for $name {
            type Output = f64;
            fn div(self, other: Self) -> f64 { self.0 / other.0 }
        }

        impl std::fmt::Display for $name {
            fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                f.pad(&prefixed(self.0, $unit))
            }
        }
    };
}

quantity!(
    /// Electric potential in volts.
    Volts,
    Unit::Volt
);
quantity!(
    /// Electric current in amperes; positive into the board.
    Amps,
    Unit::Ampere
);
quantity!(
    /// Resistance in ohms.
    Ohms,
    Unit::Ohm
);
quantity!(
    /// Power in watts.
    Watts,
    Unit::Watt
);
quantity!(
    /// Conductance in siemens.
    Siemens,
    Unit::Siemens
);
quantity!(
    /// Capacitance in farads.
    Farads,
    Unit::Farad
);
quantity!(
    /// Electric charge in coulombs; one ampere hour is 3600 C.
    Coulombs,
    Unit::Coulomb
);
quantity!(
    /// Celsius temperature in degrees.
    Celsius,
    Unit::Celsius
);
quantity!(
    /// Temperature coefficient: relative change per kelvin, as a fraction of one.
    PerKelvin,
    Unit::PerKelvin
);

impl Div<Ohms> for Volts {
    type Output = Amps;
    fn div(self, resistance: Ohms) -> Amps {
        Amps(self.0 / resistance.0)
    }
}

impl Div<Amps> for Volts {
    type Output = Ohms;
    fn div(self, current: Amps) -> Ohms {
        Ohms(self.0 / current.0)
    }
}

impl Div<Amps> for Coulombs {
    type Output = f64;
    /// Seconds for which the charge lasts.
    fn div(self, current: Amps) -> f64 {
        self.0 / current.0
    }
}

impl Mul<Amps> for Volts {
    type Output = Watts;
    fn mul(self, current: Amps) -> Watts {
        Watts(self.0 * current.0)
    }
}

impl Mul<Ohms> for Amps {
    type Output = Volts;
    fn mul(self, resistance: Ohms) -> Volts {
        Volts(self.0 * resistance.0)
    }
}

impl Mul<Siemens> for Volts {
    type Output = Amps;
    fn mul(self, conductance: Siemens) -> Amps {
        Amps(self.0 * conductance.0)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ohms_law_holds_between_the_newtypes() {
        assert_eq!(Volts(7.0) / Ohms(3.5), Amps(2.0));
        assert_eq!(Amps(2.0) * Ohms(3.5), Volts(7.0));
        assert_eq!(Volts(7.0) * Amps(2.0), Watts(14.0));
    }

    #[test]
    fn display_takes_width_like_any_text() {
        assert_eq!(format!("{:>10}", Volts(6.0)), "   6.000 V");
    }
}
