//! When a maker's claim holds: at which temperatures, for how long after calibration, and what a degree outside adds.
//!
//! ```toml
//! [ammeter.valid]                     # or source.valid, voltmeter.valid; may be left out
//! from = "18 degC"
//! to = "28 degC"
//! since_calibration = "365 d"
//! ```
//!
//! Makers commonly state 23 °C ± 5 °C and a year, and a coefficient for each degree beyond.

use super::check::not_negative;
use crate::document::{At, Table};
use crate::trace::Accuracy;
use crate::units::{Celsius, Quantity};
use std::time::Duration;

/// When a claim holds. What is not stated is taken to hold always.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Validity {
    /// Lowest and highest temperature of the room.
    pub temperature: Option<(Celsius, Celsius)>,
    /// Time after a calibration.
    pub since_calibration: Option<Duration>,
}

/// What each degree outside the stated temperatures adds to a claim.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct PerDegree {
    /// To the share of the reading, as a fraction of one.
    pub relative: f64,
    /// To the fixed part, in the reading's SI unit.
    pub absolute: f64,
}

impl Validity {
    /// Reads the table `valid` of a part, where it has one.
    pub(super) fn read(part: &mut Table<'_, '_>) -> Self {
        let Some(mut table) = part.optional_table("valid") else { return Self::default() };
        let from = table.optional_quantity::<Celsius>("from");
        let to = table.optional_quantity::<Celsius>("to");
        let since = table.optional_duration("since_calibration");
        match (&from, &to) {
            (Some(from), Some(to)) if from.value >= to.value => {
                table.problem(from, &format!("not below {to}"));
            }
            (Some(one), None) | (None, Some(one)) => {
                table.problem(one, "one end of a range; wanted \"from\" and \"to\"");
            }
            _ => {}
        }
        let temperature = from.zip(to).map(|(from, to)| (from.value, to.value));
        Self { temperature, since_calibration: since.map(|since| since.value) }
    }

    /// How many degrees `room` lies outside; none where nothing is stated.
    pub fn degrees_outside(&self, room: Celsius) -> f64 {
        let Some((from, to)) = self.temperature else { return 0.0 };
        (from - room).max(room - to).max(Celsius::ZERO).0
    }
}

impl PerDegree {
    /// Reads the keys `per_degree_<share>`, `per_degree_of_range` and `per_degree_fixed`, where they are there.
    pub(super) fn read<Q: Quantity>(table: &mut Table<'_, '_>, share: &str, full_scale: Option<f64>) -> Self {
        let relative = table.optional_fraction(&format!("per_degree_{share}"));
        let of_range = full_scale.and_then(|_| table.optional_fraction("per_degree_of_range"));
        let fixed = table.optional_quantity::<Q>("per_degree_fixed");
        not_negative(&relative, table);
        not_negative(&of_range, table);
        not_negative(&fixed.as_ref().map(|fixed| fixed.with(fixed.value.si())), table);
        let value = |share: Option<At<f64>>| share.map_or(0.0, |share| share.value);
        Self {
            relative: value(relative),
            absolute: value(of_range) * full_scale.unwrap_or(0.0)
                + fixed.map_or(0.0, |fixed| fixed.value.si()),
        }
    }

    /// True where the maker states nothing.
    pub fn is_nothing(&self) -> bool {
        *self == Self::default()
    }

    /// `claim` for a room so many degrees outside what it is stated for.
    pub fn widened(&self, claim: Accuracy, degrees: f64) -> Accuracy {
        Accuracy {
            relative: claim.relative + self.relative * degrees,
            absolute: claim.absolute + self.absolute * degrees,
            ..claim
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::sample::{good, problems};
    use super::*;

    #[test]
    fn degrees_count_from_the_nearer_end() {
        let validity =
            Validity { temperature: Some((Celsius(18.0), Celsius(28.0))), since_calibration: None };
        for (room, degrees) in [(23.0, 0.0), (28.0, 0.0), (31.5, 3.5), (10.0, 8.0)] {
            assert!((validity.degrees_outside(Celsius(room)) - degrees).abs() < 1e-12, "{room}");
        }
        assert!(Validity::default().degrees_outside(Celsius(60.0)).abs() < 1e-12);
    }

    /// By hand, common practice for a 6.5-digit meter: (0.05 % + 0.002 % x 5) of 2.5 µA + (0.025 % + 0.003 % x 5) of
    /// 100 µA = 1.5 nA + 40 nA.
    #[test]
    fn a_claim_grows_by_its_coefficients_for_each_degree_outside() {
        let meter = good("bench-meter-current").ammeter.expect("it is an ammeter");
        let degrees = meter.valid.degrees_outside(Celsius(33.0));
        let range = &meter.ranges[0];
        let claim = range.per_degree.widened(range.accuracy, degrees);
        assert!((claim.limit(2.5e-6) - 41.5e-9).abs() < 1e-15, "{claim:?}");
        assert_eq!(range.per_degree.widened(range.accuracy, 0.0), range.accuracy);
        assert_eq!(meter.valid.since_calibration, Some(Duration::from_secs(365 * 86_400)));
    }

    #[test]
    fn what_cannot_be_is_refused_at_its_place() {
        let told = problems("bench-meter-current", &[("from = \"18 degC\"", "from = \"28 degC\"")]);
        assert!(told.contains("ammeter.valid.from = \"28 degC\": not below ammeter.valid.to"), "{told}");
        let told = problems("bench-meter-current", &[("to = \"28 degC\"", "")]);
        assert!(told.contains("ammeter.valid.from = \"18 degC\": one end of a range"), "{told}");
        let told = problems("bench-meter-current", &[("\"0.003 %\"", "\"-0.003 %\"")]);
        assert!(told.contains("per_degree_of_range = \"-0.003 %\": below zero"), "{told}");
        let told = problems("programmable-supply", &[("from = \"18 degC\"", ""), ("to = \"28 degC\"", "")]);
        assert!(told.contains("what a degree adds needs [source.valid]"), "{told}");
    }
}
