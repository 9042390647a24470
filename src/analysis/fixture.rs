//! A profile and short traces for the tests of this room.

use crate::profile::{Limit, Load, Profile, QuantityName, Ramp, Supply, Timing};
use crate::trace::{Claims, Current, Ending, OutputState, Sample, Stop, Trace};
use crate::units::{Amps, Ohms, Volts, Watts};
use std::collections::BTreeMap;
use std::time::Duration;

/// A logger's cut-off near 6 V with a 55 ohm load.
pub(crate) fn profile() -> Profile {
    let limit = |min, max| Limit { at: None, min: Some(min), max: Some(max) };
    Profile {
        board: "RN-204".to_owned(),
        revision: "C".to_owned(),
        title: "test board".to_owned(),
        serial_number: regex_lite::Regex::new("RN[0-9]{6}").expect("a pattern"),
        supply: Supply {
            start: Volts(7.6),
            floor: Volts(5.2),
            maximum: Volts(8.4),
            current_limit: Amps(0.35),
        },
        load: Load { resistance: Ohms(55.0), tolerance: 0.01, rating: Watts(3.0) },
        timing: Timing { detect_delay: Duration::from_millis(5), release_delay: Duration::from_millis(20) },
        ramp: Ramp::Staircase { step: Volts(0.01) },
        limits: BTreeMap::from([
            (QuantityName::Trip, limit(5.88, 6.12)),
            (QuantityName::ReEnable, limit(6.24, 6.56)),
            (QuantityName::Hysteresis, limit(0.3, 0.5)),
            (QuantityName::OffCurrent, Limit { at: Some(Volts(5.8)), ..limit(1e-6, 4e-6) }),
        ]),
    }
}

/// A completed trace of `(set-point in V, current in A)` at 100 ms a sample, terminals at the set-point.
pub(crate) fn staircase(readings: &[(f64, f64)]) -> Trace {
    let samples = readings.iter().zip(1..).map(|(&(set, amps), tick)| Sample {
        at: Duration::from_millis(100 * tick),
        set: Volts(set),
        sense: Some(Volts(set)),
        current: Current::Value(Amps(amps)),
        load: None,
        range: None,
        limited: None,
    });
    Trace {
        samples: samples.collect(),
        settings: Vec::new(),
        claims: Claims::default(),
        ending: Ending { stop: Stop::Completed, output: OutputState::Off },
    }
}

/// Current of the test board's load at `volts`.
pub(crate) fn on(volts: f64) -> (f64, f64) {
    (volts, volts / 55.0)
}

/// Current of the test board's open switch at `volts`.
pub(crate) fn off(volts: f64) -> (f64, f64) {
    (volts, 2.5e-6)
}
