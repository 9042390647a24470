//! A trace cut into plateaus: consecutive samples at one set-point, of which the last is the settled one.

use crate::profile::{Profile, QuantityName};
use crate::trace::{Claims, Current, Sample, SwitchState, Trace};
use crate::units::{Amps, Ohms, Volts};
use std::ops::Range;
use std::time::Duration;

/// Set-points closer than this are the same set-point; no supply of a bench resolves less.
pub(super) const SAME_SET: f64 = 10e-6;

/// Share of the floor below which a board may be under its lowest operating voltage and read anything: the
/// discharge at the end lies there.
const IN_SCOPE: f64 = 0.75;
/// The supply may fall short of a voltage of the profile by this share: its step, its accuracy.
pub(super) const REACHED: f64 = 0.005;

/// Less than this share of the settling time between two readings leaves none for it, whatever the clock errs.
const SURELY_SETTLING: f64 = 0.9;

/// Consecutive samples at one set-point.
#[derive(Clone, Debug)]
pub(super) struct Plateau {
    /// The set-point.
    pub(super) set: Volts,
    /// Its samples.
    pub(super) samples: Range<usize>,
    /// Time of the last sample at the set-point before: the step came right after it.
    pub(super) began: Duration,
    /// Time of its last sample.
    pub(super) ended: Duration,
    /// State of the switch at the last sample.
    pub(super) settled: SwitchState,
    /// High enough for a board to work; thresholds are looked for only there.
    pub(super) in_scope: bool,
}

/// The samples of a trace with their states and plateaus.
pub(super) struct Course<'t> {
    pub(super) trace: &'t Trace,
    pub(super) profile: &'t Profile,
    pub(super) states: Vec<SwitchState>,
    /// Samples at which the switch is closed, as the load's voltage tells, and the load draws nothing.
    pub(super) stopped: Vec<bool>,
    pub(super) plateaus: Vec<Plateau>,
}

impl<'t> Course<'t> {
    /// Cuts `trace` into plateaus.
    pub(super) fn new(trace: &'t Trace, profile: &'t Profile) -> Self {
        let drawn: Vec<SwitchState> =
            trace.samples.iter().map(|sample| state_of(sample, &trace.claims, profile)).collect();
        let states = with_load(trace, &drawn, profile);
        let stopped = drawn.iter().zip(&states).map(|(drawn, state)| drawn != state).collect();
        let supply = &profile.supply;
        // Before the board was armed at the start voltage, the pre-check may have stood as high as the floor.
        let (mut scope, armed) = (supply.floor * (1.0 + REACHED), supply.start * (1.0 - REACHED));
        let mut plateaus: Vec<Plateau> = Vec::new();
        for (index, sample) in trace.samples.iter().enumerate() {
            if sample.set >= armed {
                scope = supply.floor * IN_SCOPE;
            }
            match plateaus.last_mut() {
                Some(last) if (last.set - sample.set).abs().0 < SAME_SET => {
                    last.samples.end = index + 1;
                    last.ended = sample.at;
                    last.settled = states[index];
                }
                last => {
                    let began = last.map_or(sample.at, |last| last.ended);
                    plateaus.push(Plateau {
                        set: sample.set,
                        samples: index..index + 1,
                        began,
                        ended: sample.at,
                        settled: states[index],
                        in_scope: sample.set >= scope,
                    });
                }
            }
        }
        Self { trace, profile, states, stopped, plateaus }
    }

    /// True for a plateau that was read before its step can have settled, as steps and ramps for a delay are: a change there is
    /// one of time, not of voltage. False where no times are claimed.
    pub(super) fn is_read_at_once(&self, plateau: usize) -> bool {
        let first = self.plateaus[plateau].samples.start;
        let Some((before, times)) = first.checked_sub(1).zip(self.trace.claims.times) else { return false };
        let at = |sample: usize| self.trace.samples[sample].at;
        let way = self.trace.claims.slew.time(self.trace.samples[before].set, self.plateaus[plateau].set);
        at(first).saturating_sub(at(before) + times.integration)
            < (times.settle + way).mul_f64(SURELY_SETTLING)
    }

    /// The settled sample of a plateau.
    pub(super) fn settled(&self, plateau: usize) -> &'t Sample {
        &self.trace.samples[self.plateaus[plateau].samples.end - 1]
    }

    /// The samples of a plateau in groups of one ammeter range each.
    pub(super) fn ranges(&self, plateau: usize) -> impl Iterator<Item = Range<usize>> {
        let all = self.plateaus[plateau].samples.clone();
        let samples = &self.trace.samples[all.clone()];
        let mut start = all.start;
        samples.chunk_by(|a, b| a.range == b.range).map(move |group| {
            let group = start..start + group.len();
            start = group.end;
            group
        })
    }

    /// Voltage at the board's terminals: sensed, or else the set-point, less the drop on the way as far as it is claimed.
    pub(super) fn terminals(&self, sample: &Sample) -> Volts {
        terminals(sample, &self.trace.claims)
    }

    /// What the voltmeter draws through the ammeter with `volts` at the terminals; zero where none does.
    pub(super) fn voltmeter_current(&self, volts: Volts) -> Amps {
        let resistance = self.trace.claims.sense_resistance.filter(|resistance| *resistance > Ohms::ZERO);
        resistance.map_or(Amps::ZERO, |resistance| volts / resistance)
    }

    /// Standard uncertainty of a current reading, as claimed; zero without a claim.
    pub(super) fn current_uncertainty(&self, range: Option<Amps>, reading: Amps) -> Amps {
        current_uncertainty(&self.trace.claims, range, reading)
    }

    /// True for a current that is a number but neither the load's nor that of an open switch.
    pub(super) fn is_between(&self, sample: usize) -> bool {
        self.states[sample] == SwitchState::Neither && self.trace.samples[sample].current.amps().is_some()
    }

    /// The first of two successive samples in scope that both answer `wanted`, and how many do in all; one alone may have
    /// caught a change.
    pub(super) fn lasting(&self, wanted: impl Fn(usize) -> bool) -> Option<(&'t Sample, usize)> {
        let mut samples =
            self.in_scope().flat_map(|plateau| plateau.samples.clone()).filter(|at| wanted(*at));
        let mut before = samples.next()?;
        let (mut first, mut count) = (None, 1);
        for sample in samples {
            if sample == before + 1 {
                first = first.or(Some(before));
            }
            (before, count) = (sample, count + 1);
        }
        Some((&self.trace.samples[first?], count))
    }

    /// Plateaus on which thresholds may lie, in the order of the run.
    pub(super) fn in_scope(&self) -> impl Iterator<Item = &Plateau> + Clone {
        self.plateaus.iter().filter(|plateau| plateau.in_scope)
    }

    /// True when a voltmeter sits at the terminals.
    pub(super) fn has_voltmeter(&self) -> bool {
        self.trace.samples.iter().any(|sample| sample.sense.is_some())
    }
}

/// The states that the current tells, and the load's voltage once the load has drawn its current.
fn with_load(trace: &Trace, drawn: &[SwitchState], profile: &Profile) -> Vec<SwitchState> {
    let mut has_drawn = false;
    let state = |(sample, drawn): (&Sample, &SwitchState)| {
        has_drawn |= *drawn == SwitchState::On && sample.set >= profile.supply.floor;
        if has_drawn { drawn.with_load(sample.load, terminals(sample, &trace.claims)) } else { *drawn }
    };
    trace.samples.iter().zip(drawn).map(state).collect()
}

/// A small range of the ammeter drops so much that the terminals of an open board fall far below what it works at.
/// What it does down there says nothing about its thresholds.
pub(super) fn pulled_down(sample: &Sample, claims: &Claims, profile: &Profile) -> bool {
    let lowest_trip = profile.limits.get(&QuantityName::Trip).and_then(|limit| limit.min).map(Volts);
    sample.current.amps().is_none()
        && sample.set < lowest_trip.unwrap_or(profile.supply.floor)
        && terminals(sample, claims) < profile.supply.floor.min(sample.set) * IN_SCOPE
}

fn state_of(sample: &Sample, claims: &Claims, profile: &Profile) -> SwitchState {
    let (volts, load) = (terminals(sample, claims), profile.load.resistance);
    if pulled_down(sample, claims, profile) {
        return SwitchState::Neither;
    }
    let Some(reading) = sample.current.amps() else {
        // An overload on a range too small to show an open switch with a leak says nothing about the load.
        let least = Current::Value(sample.range.unwrap_or(volts / load));
        return match SwitchState::of(least, volts, load, Amps::ZERO) {
            SwitchState::Off => SwitchState::Neither,
            SwitchState::On | SwitchState::Neither => SwitchState::On,
        };
    };
    let uncertainty = current_uncertainty(claims, sample.range, reading);
    SwitchState::of(sample.current, volts, load, uncertainty)
}

fn terminals(sample: &Sample, claims: &Claims) -> Volts {
    let drop = claims.lead_resistance.zip(sample.current.amps()).map(|(leads, amps)| amps * leads);
    sample.terminals() - drop.unwrap_or(Volts::ZERO)
}

fn current_uncertainty(claims: &Claims, range: Option<Amps>, reading: Amps) -> Amps {
    let accuracy = claims.current_accuracy(range, reading);
    Amps(accuracy.map_or(0.0, |accuracy| accuracy.standard_uncertainty(reading.0)))
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{profile, staircase};
    use super::*;

    #[test]
    fn a_voltmeter_before_the_ammeter_is_a_drop_away_from_the_board() {
        let (mut trace, profile) = (staircase(&[(6.0, 0.11)]), profile());
        trace.samples[0].set = Volts(6.1);
        trace.claims.lead_resistance = Some(Ohms(0.18));
        let terminals = Course::new(&trace, &profile).terminals(&trace.samples[0]);
        assert!((terminals.0 - 5.9802).abs() < 1e-12, "{terminals}");
    }

    #[test]
    fn samples_at_one_set_point_are_one_plateau_and_the_last_one_counts() {
        let trace = staircase(&[(7.6, 0.0), (7.6, 0.138), (7.5, 0.136), (0.3, 0.0), (0.3, 0.0)]);
        let profile = profile();
        let course = Course::new(&trace, &profile);
        let lengths: Vec<usize> = course.plateaus.iter().map(|plateau| plateau.samples.len()).collect();
        assert_eq!(lengths, [2, 1, 2]);
        assert_eq!(course.plateaus[0].settled, SwitchState::On);
        assert_eq!(course.plateaus[1].began, course.plateaus[0].ended);
        assert!(course.plateaus[1].in_scope && !course.plateaus[2].in_scope);
    }
}
