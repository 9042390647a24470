//! A profile and short traces for the tests of this room.

use crate::profile::Profile;
use crate::trace::{Claims, Current, Ending, OutputState, Sample, Stop, Trace};
use crate::units::{Amps, Volts};
use std::time::Duration;

/// A logger's cut-off near 6 V with a 55 ohm load: delays of 5 ms and 20 ms.
pub(crate) fn profile() -> Profile {
    Profile::read("river-node.toml", include_str!("../../profiles/river-node.toml")).expect("a good profile")
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
        was_limited: None,
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
