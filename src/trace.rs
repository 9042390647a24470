//! What a run measured: timed samples, the settings made, what the bench claims about its readings, and how it ended.
//!
//! The trace is the only thing the analysis sees, so the same trace gives the same answer whether it came from a
//! bench a second ago, from a record of last year or from a CSV file.

mod burst;
pub mod csv;
mod doubt;
mod drift;
mod ending;
mod slew;
mod switch_state;
mod zero;

pub use burst::Burst;
pub use doubt::Doubt;
pub use drift::{Drift, WHOLE_LINE_PERIODS};
pub use ending::{BenchFault, Ending, FaultKind, OutputState, Stop};
pub use slew::Slew;
pub use switch_state::SwitchState;
pub use zero::Zero;

use crate::units::{Amps, Celsius, Ohms, Volts};
use serde::{Deserialize, Serialize};
use std::time::Duration;

/// A run's samples and all that is needed to read them.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Trace {
    /// Readings in the order they were taken; times never decrease.
    pub samples: Vec<Sample>,
    /// What was set in the instruments, in order.
    pub settings: Vec<Setting>,
    /// What the instruments' makers claim about these readings.
    pub claims: Claims,
    /// How the run ended.
    pub ending: Ending,
}

/// All roles read together at one set-point.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Sample {
    /// Time since the start of the run at the middle of the measurement.
    #[serde(rename = "time_s", with = "seconds")]
    pub at: Duration,
    /// The supply's set-point.
    #[serde(rename = "set_v")]
    pub set: Volts,
    /// Voltage at the board's terminals; `None` on a bench without a voltmeter there.
    #[serde(rename = "sense_v", default, skip_serializing_if = "Option::is_none")]
    pub sense: Option<Volts>,
    /// Current through the ammeter: into the board, and into a voltmeter behind the ammeter.
    #[serde(rename = "current_a")]
    pub current: Current,
    /// Voltage at the load, behind the switch; `None` on a bench without a voltmeter there.
    #[serde(rename = "load_v", default, skip_serializing_if = "Option::is_none")]
    pub load: Option<Volts>,
    /// Full scale of the ammeter's range; `None` when not known.
    #[serde(rename = "range_a", default, skip_serializing_if = "Option::is_none")]
    pub range: Option<Amps>,
    /// True while the supply limits the current; `None` when the supply cannot tell.
    #[serde(rename = "limit", default, skip_serializing_if = "Option::is_none")]
    pub limited: Option<bool>,
    /// True when the supply limited the current at any time since the reading before, however briefly; `None` when
    /// nothing remembers that.
    #[serde(rename = "was_limit", default, skip_serializing_if = "Option::is_none")]
    pub was_limited: Option<bool>,
}

impl Sample {
    /// The best known voltage at the terminals: sensed, or else the set-point.
    pub fn terminals(&self) -> Volts {
        self.sense.unwrap_or(self.set)
    }
}

/// A current reading. An overload is not a number and compares with nothing.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(untagged)]
pub enum Current {
    /// A finite value.
    Value(Amps),
    /// The meter said the current is above its range.
    Overload(Overload),
}

impl Current {
    /// An overloaded reading.
    pub const OVERLOAD: Self = Self::Overload(Overload::Overload);

    /// The value, unless overloaded.
    pub fn amps(self) -> Option<Amps> {
        match self {
            Current::Value(amps) => Some(amps),
            Current::Overload(_) => None,
        }
    }
}

/// The word that stands in files where a reading overflowed.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Overload {
    /// `"overload"`
    Overload,
}

/// Something that was set in an instrument.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Setting {
    /// Time since the start of the run when it was set.
    #[serde(rename = "time_s", with = "seconds")]
    pub at: Duration,
    /// What was set, in plain words with unit.
    pub what: String,
}

/// What the makers of the instruments claim about the readings in a trace.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Claims {
    /// Of the supply's set-point, at its terminals.
    pub set: Option<Accuracy>,
    /// Of the voltmeter at the board's terminals.
    pub sense: Option<Accuracy>,
    /// Of the voltmeter at the load.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub load: Option<Accuracy>,
    /// Of the ammeter, a line per range, smallest range first.
    pub current: Vec<RangeAccuracy>,
    /// Resistance between where the voltage is known and the board, where no voltmeter sits at the board.
    pub lead_resistance: Option<Ohms>,
    /// Input resistance of the voltmeter at the terminals, where its current passes the ammeter.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub sense_resistance: Option<Ohms>,
    /// How long readings and steps take; `None` when not known.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub times: Option<Times>,
    /// How much longer a step takes the farther it goes.
    #[serde(default, skip_serializing_if = "Slew::is_none")]
    pub slew: Slew,
    /// What the bench showed with an empty fixture, where that was read.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub zero: Vec<Zero>,
    /// Temperature of the room, where it is known; what it adds is in the claims already.
    #[serde(rename = "room_degc", default, skip_serializing_if = "Option::is_none")]
    pub room: Option<Celsius>,
    /// Temperature at the board, where a thermometer in the fixture shows it.
    #[serde(rename = "fixture_degc", default, skip_serializing_if = "Option::is_none")]
    pub fixture: Option<Celsius>,
    /// What short readings of the voltage at the board showed, where they were taken.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub burst: Option<Burst>,
    /// Why these claims may not hold.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub doubts: Vec<Doubt>,
}

/// How long the instruments' readings and steps take.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Times {
    /// Time over which one current reading is averaged.
    #[serde(rename = "integration_s", with = "seconds")]
    pub integration: Duration,
    /// Time after a step of the supply, board on, until its output has settled.
    #[serde(rename = "settle_s", with = "seconds")]
    pub settle: Duration,
}

impl Claims {
    /// The ammeter's accuracy on the range with full scale `range`, or its best range that holds `reading`.
    pub fn current_accuracy(&self, range: Option<Amps>, reading: Amps) -> Option<Accuracy> {
        let fits = |line: &&RangeAccuracy| match range {
            Some(range) => line.full_scale >= range * 0.999,
            None => line.full_scale >= reading.abs(),
        };
        self.current.iter().find(fits).or_else(|| self.current.last()).map(|line| line.accuracy)
    }
}

/// Accuracy of one ammeter range.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct RangeAccuracy {
    /// Full scale of the range.
    pub full_scale: Amps,
    /// The claim on that range.
    pub accuracy: Accuracy,
}

/// A claimed error limit: `|error| <= relative * |reading| + absolute`, and the step of the last digit.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Accuracy {
    /// Share of the reading, as a fraction of one.
    pub relative: f64,
    /// Fixed part (share of range, counts, offset), in the reading's SI unit.
    pub absolute: f64,
    /// One step of the last digit, in the reading's SI unit.
    pub resolution: f64,
}

impl Accuracy {
    /// The claimed limit of error at `reading`.
    pub fn limit(&self, reading: f64) -> f64 {
        self.relative * reading.abs() + self.absolute
    }

    /// Standard uncertainty of one reading: the limit as a rectangular half-width (JCGM 100:2008, 4.3.7) and the
    /// digit as a rectangle of its own (F.2.2.1).
    pub fn standard_uncertainty(&self, reading: f64) -> f64 {
        (self.limit(reading).powi(2) / 3.0 + self.resolution.powi(2) / 12.0).sqrt()
    }
}

/// Durations in files are plain seconds.
mod seconds {
    use serde::{Deserialize, Deserializer, Serializer, de::Error};
    use std::time::Duration;

    pub(in crate::trace) fn serialize<S: Serializer>(
        time: &Duration,
        serializer: S,
    ) -> Result<S::Ok, S::Error> {
        serializer.serialize_f64(time.as_secs_f64())
    }

    pub(in crate::trace) fn deserialize<'de, D: Deserializer<'de>>(
        deserializer: D,
    ) -> Result<Duration, D::Error> {
        let seconds = f64::deserialize(deserializer)?;
        Duration::try_from_secs_f64(seconds).map_err(D::Error::custom)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_sample_is_written_under_its_file_names_and_read_back() {
        let sample = Sample {
            at: Duration::from_millis(250),
            set: Volts(6.0),
            sense: None,
            current: Current::OVERLOAD,
            load: Some(Volts(5.9)),
            range: Some(Amps(0.1)),
            limited: Some(false),
            was_limited: None,
        };
        let text = serde_json::to_string(&sample).expect("a sample is plain data");
        assert_eq!(
            text,
            r#"{"time_s":0.25,"set_v":6.0,"current_a":"overload","load_v":5.9,"range_a":0.1,"limit":false}"#
        );
        assert_eq!(serde_json::from_str::<Sample>(&text).expect("its own text"), sample);
    }

    /// A line of claims as logs before zeros and temperatures have it.
    #[test]
    fn claims_of_an_older_record_are_read_and_empty_ones_leave_no_mark() {
        let old = r#"{"set":null,"sense":null,"current":[],"lead_resistance":null}"#;
        let claims: Claims = serde_json::from_str(old).expect("an old record");
        assert_eq!(claims, Claims::default());
        assert_eq!(serde_json::to_string(&claims).expect("plain data"), old);
    }

    #[test]
    fn a_zero_is_written_with_its_units_and_read_back() {
        let zero = Zero {
            full_scale: Amps(1e-4),
            at: Volts(5.8),
            current: Amps(9e-9),
            standard_uncertainty: Amps(2e-10),
            readings: 20,
            age: Duration::from_secs(90),
        };
        let text = serde_json::to_string(&zero).expect("plain data");
        assert_eq!(
            text,
            r#"{"full_scale_a":0.0001,"at_v":5.8,"current_a":9e-9,"standard_uncertainty_a":2e-10,"readings":20,"age_s":90.0}"#
        );
        assert_eq!(serde_json::from_str::<Zero>(&text).expect("its own text"), zero);
    }

    #[test]
    fn the_standard_uncertainty_of_a_claim_is_rectangular() {
        let claim = Accuracy { relative: 0.001, absolute: 0.003, resolution: 0.0 };
        assert!((claim.standard_uncertainty(3.0) - 0.006 / 3.0_f64.sqrt()).abs() < 1e-12);
    }
}
