//! What one cycle gave: between which voltages the board changed, each way, read from the trace of its run.
//!
//! Only the last change in a direction counts, and only where the set-point came there by a step of the ramp: arming
//! leaps across the threshold and bounds nothing. The voltage that counts stood at the terminals before the change:
//! while on it is the set-point less what the leads drop, which is in proportion to it.

use super::Order;
use crate::trace::{Accuracy, Claims, Sample, SwitchState, Trace};
use crate::units::{Amps, Celsius, Ohms, Volts};
use serde::{Deserialize, Serialize};

/// One threshold in one cycle. The bracket says where the ramp was; at a rate, the board's delay comes on top.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Crossing {
    /// Lower end of the bracket, at the terminals.
    #[serde(rename = "low_v")]
    pub low: Volts,
    /// Upper end.
    #[serde(rename = "high_v")]
    pub high: Volts,
    /// The set-point at which it had changed.
    #[serde(rename = "set_v")]
    pub set: Volts,
    /// How fast the terminals moved there, V/s, positive in the direction of the ramp.
    #[serde(rename = "rate_v_per_s")]
    pub rate: f64,
    /// Time from one step to the next, s.
    #[serde(rename = "period_s")]
    pub period: f64,
    /// Time from setting a step to the middle of its reading, s.
    #[serde(rename = "seen_after_s")]
    pub seen_after: f64,
}

/// What one cycle gave, and under which conditions.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Cycle {
    /// Which of the plan's cycles it is.
    pub order: Order,
    /// Temperature of the board as measured, degC; absent where nobody measured it.
    #[serde(rename = "temperature_c", default, skip_serializing_if = "Option::is_none")]
    pub temperature: Option<Celsius>,
    /// Load as measured, ohm.
    #[serde(rename = "load_ohm")]
    pub load: Ohms,
    /// The trip; absent where the board did not trip.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub trip: Option<Crossing>,
    /// The re-enable; absent where it did not come back.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub re_enable: Option<Crossing>,
    /// What is claimed of the instrument the voltages were read with; absent where nothing is.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub claim: Option<Accuracy>,
    /// Longest a step takes to arrive at the terminals, s.
    #[serde(rename = "settle_s", default)]
    pub settle: f64,
    /// Time over which one reading averages, s.
    #[serde(rename = "integration_s", default)]
    pub integration: f64,
    /// How long the run took on the bench's clock, s.
    #[serde(rename = "duration_s")]
    pub duration: f64,
}

/// A direction of the ramp, and with it which threshold.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Edge {
    /// Down through the trip.
    Trip,
    /// Up through the re-enable.
    ReEnable,
}

impl Edge {
    /// Both, in the order in which a cycle meets them.
    pub const ALL: [Self; 2] = [Self::Trip, Self::ReEnable];

    /// The sign of the ramp.
    pub fn sign(self) -> f64 {
        match self {
            Self::Trip => -1.0,
            Self::ReEnable => 1.0,
        }
    }

    /// What this cycle says of it.
    pub fn of(self, cycle: &Cycle) -> Option<&Crossing> {
        match self {
            Self::Trip => cycle.trip.as_ref(),
            Self::ReEnable => cycle.re_enable.as_ref(),
        }
    }
}

/// What is known of a cycle beside its trace.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Ramp {
    step: Volts,
    load: Ohms,
    zero: Amps,
}

/// Steps of the ramp over which rate and drop are taken.
const BEFORE: usize = 10;
/// A step of the ramp may be this much larger than ordered: whole digits of the supply.
const SAME_STEP: f64 = 1.5;

/// Reads a cycle that was measured in steps of `step`, on a board that drives `load`; `zero` is the standard uncertainty
/// of a current near zero.
pub fn read(
    trace: &Trace,
    order: Order,
    temperature: Option<Celsius>,
    load: Ohms,
    step: Volts,
    zero: Amps,
) -> Cycle {
    let ramp = Ramp { step, load, zero };
    let claims = &trace.claims;
    let times = claims.times;
    Cycle {
        order,
        temperature,
        load,
        trip: ramp.last(trace, Edge::Trip),
        re_enable: ramp.last(trace, Edge::ReEnable),
        claim: if trace.samples.iter().any(|sample| sample.sense.is_some()) {
            claims.sense
        } else {
            claims.set
        },
        settle: times.map_or(0.0, |times| times.settle.as_secs_f64()),
        integration: times.map_or(0.0, |times| times.integration.as_secs_f64()),
        duration: trace.samples.last().map_or(0.0, |sample| sample.at.as_secs_f64()),
    }
}

impl Ramp {
    fn state(&self, sample: &Sample) -> SwitchState {
        SwitchState::of(sample.current, sample.terminals(), self.load, self.zero)
    }

    /// True when the set-point went from one sample to the next by a step of the ramp in this direction.
    fn is_step(&self, from: &Sample, to: &Sample, edge: Edge) -> bool {
        let advance = (to.set - from.set).0 * edge.sign();
        advance > 0.0 && advance <= self.step.0 * SAME_STEP
    }

    fn last(&self, trace: &Trace, edge: Edge) -> Option<Crossing> {
        let (before, after) = match edge {
            Edge::Trip => (SwitchState::On, SwitchState::Off),
            Edge::ReEnable => (SwitchState::Off, SwitchState::On),
        };
        let samples = &trace.samples;
        // The first reading that is no longer in the state before, followed by no reading back in it until the state
        // after has come: a reading in the middle of the change already has changed.
        let ends_changed = |from: usize| {
            samples[from..]
                .iter()
                .map(|sample| self.state(sample))
                .find(|state| *state != SwitchState::Neither)
                == Some(after)
        };
        let seen = (1..samples.len()).rev().find(|&seen| {
            self.state(&samples[seen - 1]) == before
                && self.state(&samples[seen]) != before
                && self.is_step(&samples[seen - 1], &samples[seen], edge)
                && ends_changed(seen)
        })?;
        self.crossing(trace, edge, seen)
    }

    fn crossing(&self, trace: &Trace, edge: Edge, seen: usize) -> Option<Crossing> {
        let samples = &trace.samples;
        let mut first = seen - 1;
        while first > 0 && seen - first < BEFORE && self.is_step(&samples[first - 1], &samples[first], edge) {
            first -= 1;
        }
        let (from, last, changed) = (&samples[first], &samples[seen - 1], &samples[seen]);
        let ratio =
            mean(samples[first..seen].iter().map(|sample| at_board(sample, &trace.claims) / sample.set));
        let intervals = (seen - first) as f64;
        let period = changed.at.saturating_sub(from.at).as_secs_f64() / intervals;
        let step = (changed.set - from.set).0.abs() / intervals * ratio;
        let set_at = trace.settings.iter().rev().map(|setting| setting.at).find(|at| *at <= changed.at)?;
        let ends = [last.set * ratio, changed.set * ratio];
        let crossing = Crossing {
            low: ends[0].min(ends[1]),
            high: ends[0].max(ends[1]),
            set: changed.set,
            rate: step / period,
            period,
            seen_after: changed.at.saturating_sub(set_at).as_secs_f64(),
        };
        (crossing.low.is_finite() && crossing.high.is_finite() && crossing.rate.is_finite())
            .then_some(crossing)
    }
}

/// Voltage at the board: sensed, or the set-point less the claimed drop.
fn at_board(sample: &Sample, claims: &Claims) -> Volts {
    let drop = match (sample.sense, claims.lead_resistance, sample.current.amps()) {
        (None, Some(leads), Some(current)) => current * leads,
        _ => Volts::ZERO,
    };
    sample.terminals() - drop
}

fn mean(values: impl ExactSizeIterator<Item = f64>) -> f64 {
    let count = values.len() as f64;
    values.sum::<f64>() / count
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::trace::{Current, Ending, OutputState, Setting, Stop};
    use std::time::Duration;

    const ORDER: Order = Order { board: 0, temperature: 0, load: 0, cycle: 0, rate: 0 };

    /// Set-points 100 ms apart, set 60 ms before the middle of the reading; the leads drop a hundredth while on.
    fn trace(points: &[(f64, f64)]) -> Trace {
        let at = |index: usize| Duration::from_millis(100 * index as u64 + 100);
        let sample = |(index, &(set, share)): (usize, &(f64, f64))| Sample {
            at: at(index),
            set: Volts(set),
            sense: Some(Volts(set * if share > 0.0 { 0.99 } else { 1.0 })),
            current: Current::Value(Amps(set / 55.0 * share)),
            load: None,
            range: None,
            limited: None,
            was_limited: None,
        };
        let setting = |index| Setting { at: at(index) - Duration::from_millis(60), what: String::new() };
        Trace {
            samples: points.iter().enumerate().map(sample).collect(),
            settings: (0..points.len()).map(setting).collect(),
            claims: Claims::default(),
            ending: Ending { stop: Stop::Completed, output: OutputState::Off },
        }
    }

    fn cycle(points: &[(f64, f64)]) -> Cycle {
        read(&trace(points), ORDER, None, Ohms(55.0), Volts(0.02), Amps(1e-6))
    }

    #[test]
    fn the_bracket_is_the_terminal_voltage_before_the_change() {
        let down = [(7.6, 1.0), (6.04, 1.0), (6.02, 1.0), (6.0, 1.0), (5.98, 0.0), (5.98, 0.0), (5.9, 0.0)];
        let up = [(6.36, 0.0), (6.38, 0.0), (6.4, 1.0), (6.4, 1.0), (0.0, 0.0)];
        let cycle = cycle(&[&down[..], &up[..]].concat());
        let trip = cycle.trip.expect("it tripped");
        // While on a hundredth is missing at the terminals: 5.98 x 0.99 and 6.00 x 0.99.
        assert!((trip.low.0 - 5.9202).abs() < 1e-9 && (trip.high.0 - 5.94).abs() < 1e-9, "{trip:?}");
        // 20 mV less a hundredth in 100 ms.
        assert!((trip.rate - 0.198).abs() < 1e-9, "{trip:?}");
        assert!((trip.period - 0.1).abs() < 1e-9 && (trip.seen_after - 0.06).abs() < 1e-9, "{trip:?}");
        let back = cycle.re_enable.expect("it came back");
        assert!((back.low.0 - 6.38).abs() < 1e-9 && (back.high.0 - 6.4).abs() < 1e-9, "{back:?}");
    }

    #[test]
    fn a_reading_in_the_middle_of_the_change_has_changed_already() {
        let cycle = cycle(&[(6.02, 1.0), (6.0, 1.0), (5.98, 0.3), (5.96, 0.0), (5.96, 0.0)]);
        assert_eq!(cycle.trip.map(|trip| trip.set), Some(Volts(5.98)));
    }

    #[test]
    fn leaps_and_the_end_of_the_run_are_no_thresholds() {
        let cycle = cycle(&[(6.04, 1.0), (5.5, 0.0), (7.6, 1.0), (0.0, 0.0)]);
        assert_eq!((cycle.trip, cycle.re_enable), (None, None));
    }

    #[test]
    fn one_false_reading_is_no_change() {
        let cycle = cycle(&[(6.06, 1.0), (6.04, 0.0), (6.02, 1.0), (6.0, 1.0), (5.98, 0.0), (5.98, 0.0)]);
        assert_eq!(cycle.trip.map(|trip| trip.set), Some(Volts(5.98)));
    }
}
