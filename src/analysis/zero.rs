//! The zero of the bench, taken off a small current.
//!
//! The fixed part of a maker's claim (share of range, counts) bounds the ammeter's offset, whatever it may be on the day.
//! A reading with an empty fixture, on the same range and at the same voltage, is that very offset together with what
//! leaks in the fixture and what the voltmeter draws: all of it cancels in the difference. What stays is the share of
//! the reading, now of the board's current alone; the last digit; how well the zero itself is known; and what the
//! offset has moved since. Nobody states that last part, so it is taken to grow from nothing to the whole fixed part
//! within [`AS_GOOD_AS_NONE`]: an old zero is never better than none.

use super::accuracy;
use super::cause::Cause;
use super::contribution::Contribution;
use super::plateau::Course;
use crate::trace::Zero;
use crate::units::{Amps, Ohms, Unit, Volts};
use std::time::Duration;

/// After so long a zero says nothing that the claim does not. A day is how often benches are commonly zeroed at least.
const AS_GOOD_AS_NONE: Duration = Duration::from_secs(24 * 3600);

/// A zero counts for a voltage within this share of its own.
const NEAR: f64 = 0.02;

/// Up to this voltage nothing leaks in a fixture worth the name: the ammeter's offset is all there is.
const NO_VOLTAGE: Volts = Volts(0.1);

/// How far the input resistance of a voltmeter may be off what is stated, as a share, either way. Makers state 10 Mohm to
/// within 1 % (common practice); the definitions do not say.
pub(super) const INPUT_RESISTANCE: f64 = 0.01;

/// What the bench adds to a current at one voltage: the mean of zeros, each with its share.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Baseline<'z> {
    parts: Vec<(&'z Zero, f64)>,
    /// Taken at this voltage, so that leakage and the voltmeter are in it; else the ammeter's offset only.
    pub(super) at_voltage: bool,
}

/// The board's current at `at` out of `value`, which the ammeter read on `range` besides the `passing` current of the
/// voltmeter, and what ammeter, zero and voltmeter add to its uncertainty.
pub(super) fn without_zero(
    course: &Course<'_>,
    range: Option<Amps>,
    at: Volts,
    value: f64,
    passing: Amps,
) -> (f64, Vec<Contribution>) {
    let claims = &course.trace.claims;
    let baseline = Baseline::of(&claims.zero, range, at);
    let mut parts = Vec::new();
    let board = value - baseline.as_ref().map_or(0.0, Baseline::current);
    match &baseline {
        None => parts.extend(accuracy::of_current(claims, range, Amps(value) + passing)),
        Some(zero) => {
            let shared = if zero.at_voltage { 0.0 } else { passing.0 };
            let lines = accuracy::of_current(claims, range, Amps(board + shared));
            // The offset is in the zero; only what it has moved since counts.
            parts.extend(lines.into_iter().filter(|line| line.cause != Some(Cause::AmmeterOffset(range))));
            let claim = claims.current_accuracy(range, Amps(value) + passing);
            parts.extend(claim.map(|claim| zero.drift(claim.absolute)));
        }
    }
    parts.extend(baseline.as_ref().map(Baseline::own));
    if !baseline.is_some_and(|zero| zero.at_voltage) {
        parts.extend(claims.sense_resistance.and_then(|input| meter_loading(input, at)));
    }
    (board, parts)
}

/// What a voltmeter behind the ammeter draws is taken off by its stated input resistance.
pub(super) fn meter_loading(input: Ohms, at: Volts) -> Option<Contribution> {
    let sensitivity = at.0 / input.0.powi(2);
    let line = Contribution::rectangular("input resistance of the voltmeter", INPUT_RESISTANCE * input.0)
        .through(sensitivity, Unit::Ohm)
        .estimated(input.0);
    (input > Ohms::ZERO).then(|| line.due_to(Cause::VoltmeterInput))
}

impl<'z> Baseline<'z> {
    /// On the line between the zeros around `at`, or the nearest to it; else that at no voltage. `None` where there is
    /// neither.
    pub(super) fn of(zeros: &'z [Zero], range: Option<Amps>, at: Volts) -> Option<Self> {
        let range = range?;
        let mut zeros: Vec<&Zero> =
            zeros.iter().filter(|zero| (zero.full_scale / range - 1.0).abs() < 1e-3).collect();
        zeros.sort_by(|a, b| a.at.0.total_cmp(&b.at.0));
        let distance = |zero: &Zero| (zero.at - at).abs();
        let nearest = *zeros.iter().min_by(|a, b| distance(a).0.total_cmp(&distance(b).0))?;
        if distance(nearest) <= at.abs() * NEAR {
            return Some(Self { parts: vec![(nearest, 1.0)], at_voltage: true });
        }
        let around = zeros.windows(2).find_map(|pair| match pair {
            [below, above] if below.at < at && at < above.at => Some((*below, *above)),
            _ => None,
        });
        if let Some((below, above)) = around {
            let share = (at - below.at) / (above.at - below.at);
            return Some(Self { parts: vec![(below, 1.0 - share), (above, share)], at_voltage: true });
        }
        let zero = *zeros.first().filter(|zero| zero.at.abs() <= NO_VOLTAGE)?;
        Some(Self { parts: vec![(zero, 1.0)], at_voltage: false })
    }

    /// What is taken off, in amperes.
    pub(super) fn current(&self) -> f64 {
        self.parts.iter().map(|(zero, share)| share * zero.current.0).sum()
    }

    /// How much of it is `zero`.
    pub(super) fn share_of(&self, zero: &Zero) -> f64 {
        let of_it = self.parts.iter().filter(|(part, _)| std::ptr::eq(*part, zero));
        of_it.map(|(_, share)| share).sum()
    }

    /// Share of the claim's fixed part that the offset may have moved by since.
    pub(super) fn moved(&self) -> f64 {
        (self.age().as_secs_f64() / AS_GOOD_AS_NONE.as_secs_f64()).min(1.0)
    }

    fn age(&self) -> Duration {
        self.parts.iter().map(|(zero, _)| zero.age).max().unwrap_or(AS_GOOD_AS_NONE)
    }

    /// How well the zero is known.
    fn own(&self) -> Contribution {
        let squares: f64 =
            self.parts.iter().map(|(zero, share)| (share * zero.standard_uncertainty.0).powi(2)).sum();
        let degrees =
            self.parts.iter().map(|(zero, _)| degrees_of_freedom(zero)).fold(f64::INFINITY, f64::min);
        Contribution::scatter(OWN, squares.sqrt(), degrees)
    }

    /// What the offset may have moved by since, out of the `fixed` part of the claim.
    fn drift(&self, fixed: f64) -> Contribution {
        let hours = self.age().as_secs_f64() / 3600.0;
        Contribution::rectangular(&format!("drift since the zero, {hours:.1} h"), self.moved() * fixed)
    }
}

/// Name of the zero's own scatter in a budget.
const OWN: &str = "zero of the bench";

/// How well one zero is known, as a line of a budget.
pub(super) fn scatter(zero: &Zero) -> Contribution {
    Contribution::scatter(OWN, zero.standard_uncertainty.0, degrees_of_freedom(zero))
}

fn degrees_of_freedom(zero: &Zero) -> f64 {
    f64::from(zero.readings.saturating_sub(1).max(1))
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{profile, staircase};
    use super::*;
    use crate::trace::{Accuracy, RangeAccuracy, Trace};

    const RANGE: Amps = Amps(1e-4);
    const AT: Volts = Volts(5.8);

    fn zero(at: f64, nanoamps: f64) -> Zero {
        Zero {
            full_scale: RANGE,
            at: Volts(at),
            current: Amps(nanoamps * 1e-9),
            standard_uncertainty: Amps(0.2e-9),
            readings: 20,
            age: Duration::from_secs(6 * 3600),
        }
    }

    /// A meter of the 6.5-digit class: 0.05 % of reading and 0.025 % of 100 µA, 25 nA; a voltmeter of 10 Mohm.
    fn trace(zeros: &[Zero]) -> Trace {
        let mut trace = staircase(&[(5.8, 3.08e-6)]);
        let accuracy = Accuracy { relative: 5e-4, absolute: 25e-9, resolution: 0.0 };
        trace.claims.current = vec![RangeAccuracy { full_scale: RANGE, accuracy }];
        trace.claims.sense_resistance = Some(Ohms(10e6));
        trace.claims.zero = zeros.to_vec();
        trace
    }

    /// The current of a board that draws 2.5 µA by the meter, in nA, and its parts in nA by name.
    fn found(zeros: &[Zero]) -> (f64, Vec<(String, f64)>) {
        let (trace, profile) = (trace(zeros), profile());
        let course = Course::new(&trace, &profile);
        let (value, parts) = without_zero(&course, Some(RANGE), AT, 2.5e-6, Amps(0.58e-6));
        let parts = parts.into_iter().map(|part| (part.source, part.standard_uncertainty * 1e9)).collect();
        (value * 1e9, parts)
    }

    #[track_caller]
    fn same(parts: &[(String, f64)], wanted: &[(&str, f64)]) {
        assert_eq!(parts.len(), wanted.len(), "{parts:?}");
        for ((name, found), (wanted_name, wanted)) in parts.iter().zip(wanted) {
            assert!(
                name == wanted_name && (found - wanted).abs() < 2e-3,
                "{name} {found}, {wanted_name} {wanted}"
            );
        }
    }

    /// By hand: 0.05 % of 3.08 µA, 25 nA, and 1 % of 580 nA, each over sqrt(3).
    #[test]
    fn without_a_zero_the_whole_claim_counts() {
        let (value, parts) = found(&[]);
        assert!((value - 2500.0).abs() < 1e-9);
        let gain_and_offset = [("ammeter gain", 0.889), ("ammeter offset", 14.434)];
        same(&parts, &[&gain_and_offset[..], &[("input resistance of the voltmeter", 3.349)]].concat());
    }

    /// By hand: 0.05 % of 2.488 µA / sqrt(3) = 0.718 nA; a quarter of 25 nA after 6 of 24 hours, / sqrt(3) = 3.608 nA.
    #[test]
    fn a_zero_at_the_voltage_takes_offset_leakage_and_voltmeter_off() {
        let (value, parts) = found(&[zero(0.0, 9.0), zero(5.8, 12.0)]);
        assert!((value - 2488.0).abs() < 1e-9, "{value}");
        same(
            &parts,
            &[("ammeter gain", 0.718), ("drift since the zero, 6.0 h", 3.608), ("zero of the bench", 0.2)],
        );
    }

    /// By hand: half way between 0 V and 11.6 V the mean of 9 and 15 nA, and 0.2 / sqrt(2) = 0.141 nA.
    #[test]
    fn between_two_zeros_the_leakage_is_taken_as_a_resistance() {
        let (value, parts) = found(&[zero(11.6, 15.0), zero(0.0, 9.0)]);
        assert!((value - 2488.0).abs() < 1e-9, "{value}");
        assert!((parts[2].1 - 0.141).abs() < 1e-3, "{parts:?}");
    }

    /// By hand: 0.05 % of 3.071 µA / sqrt(3) = 0.887 nA.
    #[test]
    fn a_zero_at_no_voltage_takes_the_offset_off_and_leaves_the_voltmeter_in_doubt() {
        let (value, parts) = found(&[zero(0.0, 9.0)]);
        assert!((value - 2491.0).abs() < 1e-9, "{value}");
        same(
            &parts,
            &[
                ("ammeter gain", 0.887),
                ("drift since the zero, 6.0 h", 3.608),
                ("zero of the bench", 0.2),
                ("input resistance of the voltmeter", 3.349),
            ],
        );
    }

    #[test]
    fn a_zero_of_another_range_or_another_voltage_is_not_used() {
        let other_range = Zero { full_scale: Amps(1e-3), ..zero(5.8, 12.0) };
        let other_voltage = zero(3.0, 12.0);
        for zeros in [[other_range], [other_voltage]] {
            assert_eq!(found(&zeros), found(&[]));
        }
    }

    #[test]
    fn an_old_zero_is_no_better_than_none() {
        let old =
            |hours: u64| found(&[Zero { age: Duration::from_secs(hours * 3600), ..zero(5.8, 12.0) }]).1[1].1;
        let whole = 25.0 / 3.0_f64.sqrt();
        assert!((old(24) - whole).abs() < 1e-9 && (old(1000) - whole).abs() < 1e-9);
        assert!(old(1) < whole / 20.0);
    }
}
