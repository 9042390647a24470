//! What is kept of a look at the bench itself: a check, the zeros, a reference board.

use super::{BenchUsed, Instrument, Moment, RunId, SCHEMA, Software};
use crate::trace::{Trace, Zero};
use crate::units::{Amps, Volts};
use crate::verification::{AtRest, FixtureZero, Leads, LoadFound, ReferenceResult, StandardFound, Step};
use jiff::civil::Date;
use jiff::{SignedDuration, Timestamp};
use serde::{Deserialize, Serialize};
use std::time::Duration;

/// One line of `bench.jsonl`.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct BenchEntry {
    /// Layout of this line: [`SCHEMA`].
    pub schema: u32,
    /// Where the bench stands.
    pub station: String,
    /// When it was done.
    pub taken: Moment,
    /// The bench, its instruments as they named themselves.
    pub bench: BenchUsed,
    /// Who did it, where that is known.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub operator: Option<String>,
    /// The program.
    pub software: Software,
    /// What was done and found.
    pub found: BenchFound,
    /// What is wrong; empty when the bench is in order.
    pub problems: Vec<String>,
    /// Every reading, where the bench was read. They stay on disk when a line is read back: whoever tests a board asks
    /// for what was found, many times a day.
    #[serde(skip_deserializing, skip_serializing_if = "Vec::is_empty")]
    pub traces: Vec<Trace>,
}

/// What was found, by what was done.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(tag = "kind", rename_all = "snake_case")]
pub enum BenchFound {
    /// `bench check`.
    Check(CheckFound),
    /// `bench zero`.
    Zero {
        /// The ammeter with an empty fixture.
        zeros: Vec<FixtureZero>,
    },
    /// `bench check --reference`.
    Reference {
        /// The profile it was held against, by its board and revision.
        profile: String,
        /// The run in the log.
        run: RunId,
        /// Known and measured.
        result: ReferenceResult,
    },
}

/// What a check found.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct CheckFound {
    /// Each instrument by itself.
    pub instruments: Vec<InstrumentFound>,
    /// The meters with the output off.
    pub rest: Vec<AtRest>,
    /// Set-point against voltmeter, where the output was switched on.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub steps: Vec<Step>,
    /// What lies between supply and board, where a known load was in place.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub leads: Option<Leads>,
    /// That load as the meters see it.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub load: Option<LoadFound>,
    /// A known resistor on the ammeter's small ranges, where one was in place.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub standard: Vec<StandardFound>,
}

/// One instrument by itself.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct InstrumentFound {
    /// Its name in the bench file.
    pub name: String,
    /// The roles it plays.
    pub roles: Vec<String>,
    /// The port it is on.
    pub port: String,
    /// Its reply to `*IDN?`; absent when it is not ready.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub identity: Option<String>,
    /// Median time from a short question to its answer, s.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub response_s: Option<f64>,
    /// The longest of them, s.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub slowest_response_s: Option<f64>,
    /// What its error queue held from before.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub left_in_queue: Vec<String>,
    /// Settings of its port.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub port_settings: Option<String>,
    /// Day until which its calibration holds.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub calibration_due: Option<Date>,
    /// Days left until then; negative when it is overdue.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub calibration_days_left: Option<i32>,
    /// Why it is not ready.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub not_ready: Option<String>,
}

impl BenchEntry {
    /// An entry of this program.
    pub fn new(
        station: &str,
        taken: Moment,
        bench: BenchUsed,
        found: BenchFound,
        problems: Vec<String>,
    ) -> Self {
        Self {
            schema: SCHEMA,
            station: station.to_owned(),
            taken,
            bench,
            operator: None,
            software: Software::this(),
            found,
            problems,
            traces: Vec::new(),
        }
    }

    /// True when nothing was found wrong.
    pub fn is_good(&self) -> bool {
        self.problems.is_empty()
    }

    /// How old it is at `now`; `None` when it lies in the future, as after a clock was set back.
    pub fn age(&self, now: Timestamp) -> Option<Duration> {
        let age = now.duration_since(self.taken.utc);
        // Clocks are set right by seconds all the time.
        let age = if age > -CLOCK_SLACK { age.max(SignedDuration::ZERO) } else { age };
        Duration::try_from(age).ok()
    }

    /// True when `instruments` are the ones it was done with, by maker, model and serial number, in the same roles.
    pub fn is_of(&self, instruments: &[Instrument]) -> bool {
        let who = |instrument: &Instrument| {
            let Instrument { roles, maker, model, serial_number, .. } = instrument.clone();
            (roles, maker, model, serial_number)
        };
        self.bench.instruments.iter().map(who).eq(instruments.iter().map(who))
    }

    /// The zeros, aged, as a trace carries them; none of any other entry, or of one that found something wrong.
    pub fn zeros(&self, now: Timestamp) -> Vec<Zero> {
        let (BenchFound::Zero { zeros }, true, Some(age)) = (&self.found, self.is_good(), self.age(now))
        else {
            return Vec::new();
        };
        let zero = |zero: &FixtureZero| Zero {
            full_scale: Amps(zero.full_scale_a),
            at: Volts(zero.at_v),
            current: Amps(zero.current_a),
            standard_uncertainty: Amps(zero.standard_uncertainty_a),
            readings: u32::try_from(zero.readings).unwrap_or(u32::MAX),
            age,
        };
        zeros.iter().map(zero).collect()
    }
}

/// An entry this little in the future is from now.
const CLOCK_SLACK: SignedDuration = SignedDuration::from_secs(5);

#[cfg(test)]
mod tests {
    use super::*;
    use jiff::tz::TimeZone;

    fn at(text: &str) -> Timestamp {
        text.parse().expect("RFC 3339")
    }

    fn zero() -> BenchEntry {
        let used =
            BenchUsed { name: "b".to_owned(), instruments: vec![Instrument::default()], simulated: None };
        let zeros = vec![FixtureZero {
            full_scale_a: 1e-4,
            at_v: 5.8,
            current_a: 9e-9,
            noise_a: 5e-10,
            standard_uncertainty_a: 1e-10,
            readings: 20,
        }];
        let taken = Moment::new(at("2026-12-01T08:00:00Z"), &TimeZone::UTC);
        BenchEntry::new("bench-1", taken, used, BenchFound::Zero { zeros }, Vec::new())
    }

    #[test]
    fn an_entry_says_its_kind_and_is_read_back() {
        let text = serde_json::to_string(&zero()).expect("plain data");
        assert!(
            text.contains(r#""found":{"kind":"zero","zeros":[{"full_scale_a":0.0001,"at_v":5.8,"#),
            "{text}"
        );
        assert_eq!(serde_json::from_str::<BenchEntry>(&text).expect("its own text"), zero());
    }

    #[test]
    fn zeros_carry_their_age_and_those_of_a_doubtful_entry_are_not_used() {
        let aged = zero().zeros(at("2026-12-01T14:00:00Z"));
        assert_eq!((aged.len(), aged[0].age), (1, Duration::from_secs(6 * 3600)));
        let doubtful = BenchEntry { problems: vec!["a board in the fixture".to_owned()], ..zero() };
        assert!(doubtful.zeros(at("2026-12-01T14:00:00Z")).is_empty());
    }

    #[test]
    fn an_entry_from_the_future_has_no_age() {
        assert_eq!(zero().age(at("2026-12-01T07:00:00Z")), None);
        assert_eq!(zero().age(at("2026-12-01T07:59:58Z")), Some(Duration::ZERO));
    }

    #[test]
    fn another_instrument_in_a_role_is_another_bench() {
        let mut other = Instrument::default();
        assert!(zero().is_of(&[other.clone()]));
        other.serial_number = Some("2".to_owned());
        assert!(!zero().is_of(&[other]));
        assert!(!zero().is_of(&[]));
    }
}
