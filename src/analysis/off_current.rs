//! The off current at the voltage its limit names, on the smallest range that could show it.
//!
//! It counts only where the board is certainly off (below every set-point at which it was ever on), the terminals have
//! arrived and the reading has settled. What a voltmeter behind the ammeter draws is not
//! the board's and is taken off, and so is the bench's own zero where it was read.

use super::contribution::Contribution;
use super::finding::{About, Finding, FindingCode};
use super::off_limits::{adequate, coarse_finding, outside_finding};
use super::plateau::{Course, Plateau, SAME_SET};
use super::quantity::Quantity;
use super::settled::Settled;
use super::zero;
use crate::profile::QuantityName;
use crate::statistics::line::{Line, Point};
use crate::trace::SwitchState;
use crate::units::{Amps, Unit, Volts};
use std::ops::Range;

/// Readings within this share of the wanted voltage count for it.
const NEAR: f64 = 0.02;
/// Spread of voltage over which a line is worth drawing, as a share.
const SPAN: f64 = 0.002;
/// Terminals this near to the set-point, in volts and as a share of it, have arrived.
const ARRIVED: (f64, f64) = (0.02, 0.01);

/// The off current where the board rests off, `below` this, and what is to be said about it; `attributed` when its path
/// has been told already.
pub(super) fn off_current(
    course: &Course<'_>,
    below: Volts,
    attributed: bool,
) -> (Option<Quantity>, Vec<Finding>) {
    let readings = Readings::find(course, below);
    let limit = course.profile.limits.get(&QuantityName::OffCurrent).copied().unwrap_or_default();
    let Some(at) = limit.at.or_else(|| readings.highest()) else {
        return (None, readings.moves().or_else(|| readings.overload_finding()).into_iter().collect());
    };
    let mut coarse = None;
    for range in readings.ranges() {
        let on_range: Vec<Settled> =
            readings.settled.iter().filter(|settled| same(settled.range, range)).copied().collect();
        let Some(quantity) = estimate(course, &on_range, at) else { continue };
        let expanded = quantity.expanded_uncertainty(course.profile.decision.coverage);
        if adequate(&quantity, expanded, &limit) {
            let finding = outside_finding(&quantity, &limit, at, (!attributed).then_some(&on_range));
            return (Some(quantity), finding.into_iter().collect());
        }
        coarse = coarse.or_else(|| Some((range, coarse_finding(&quantity, expanded, range))));
    }
    // On a range too coarse for the limits, what seems to move is its own noise.
    let is_noise = coarse.as_ref().is_some_and(|(range, _)| readings.moves_on_no_smaller_than(*range));
    let moves = if is_noise { None } else { readings.moves() };
    let coarse = coarse.map(|(_, finding)| finding);
    (None, moves.or(coarse).or_else(|| readings.overload_finding()).into_iter().collect())
}

/// All settled readings of the off current that count, on whatever range.
pub(super) fn off_readings(course: &Course<'_>, below: Volts) -> Vec<Settled> {
    Readings::find(course, below).settled
}

/// The off current at `at`, as the smallest range saw it.
pub(super) fn off_current_at(course: &Course<'_>, below: Volts, at: Volts) -> Option<Quantity> {
    let readings = Readings::find(course, below);
    readings.ranges().into_iter().find_map(|range| {
        let on_range: Vec<Settled> =
            readings.settled.iter().filter(|settled| same(settled.range, range)).copied().collect();
        estimate(course, &on_range, at)
    })
}

/// All settled readings that count, and the ranges that overflowed.
struct Readings {
    settled: Vec<Settled>,
    overloaded: Option<(Volts, Option<Amps>)>,
    /// Where, and on which range, the last reading still moved.
    moving: Option<(Volts, Option<Amps>)>,
}

impl Readings {
    fn find(course: &Course<'_>, below: Volts) -> Self {
        let mut found = Self { settled: Vec::new(), overloaded: None, moving: None };
        let was_on = |plateau: &Plateau| plateau.in_scope && plateau.settled == SwitchState::On;
        let Some(armed) = course.plateaus.iter().position(was_on) else {
            return found;
        };
        // Far below the floor the detector may be asleep, unless the profile says how far down it works.
        let awake = course.profile.off_line().map_or(f64::INFINITY, |line| line.from.0 - SAME_SET);
        for (index, plateau) in course.plateaus.iter().enumerate().skip(armed) {
            let counts = plateau.in_scope || plateau.set.0 >= awake;
            if !counts || plateau.set.0 <= SAME_SET || plateau.set > below {
                continue;
            }
            for samples in course.ranges(index) {
                found.take(course, samples);
            }
        }
        found
    }

    /// The readings of one plateau on one range.
    fn take(&mut self, course: &Course<'_>, samples: Range<usize>) {
        let Some(last) = course.trace.samples.get(samples.end - 1) else { return };
        let off_set = (course.terminals(last) - last.set).abs().0;
        if off_set > ARRIVED.0 + ARRIVED.1 * last.set.0 {
            return;
        }
        if last.current.amps().is_none() {
            self.overloaded = Some((last.set, last.range));
        } else if course.states[samples.end - 1] == SwitchState::Off {
            let standing = Settled::standing(course, samples);
            self.moving = standing.is_none().then_some((last.set, last.range)).or(self.moving);
            self.settled.extend(standing);
        }
    }

    /// Ranges seen, smallest first; an unknown range comes last.
    fn ranges(&self) -> Vec<Option<Amps>> {
        let mut ranges: Vec<Option<Amps>> = self.settled.iter().map(|settled| settled.range).collect();
        let key = |range: &Option<Amps>| range.map_or(f64::INFINITY, |range| range.0);
        ranges.sort_by(|a, b| key(a).total_cmp(&key(b)));
        ranges.dedup_by(|a, b| same(*a, *b));
        ranges
    }

    fn highest(&self) -> Option<Volts> {
        self.settled.iter().map(|settled| settled.volts).max_by(|a, b| a.0.total_cmp(&b.0))
    }

    /// Whether no smaller range than this has shown a current that moves.
    fn moves_on_no_smaller_than(&self, range: Option<Amps>) -> bool {
        let scale = |range: Option<Amps>| range.map_or(f64::INFINITY, |range| range.0);
        self.moving.is_none_or(|(_, moving)| scale(moving) >= scale(range))
    }

    /// Where no reading stood.
    fn moves(&self) -> Option<Finding> {
        let (set, _) = self.moving?;
        Some(Finding {
            code: FindingCode::OffCurrentMoves,
            about: About::Bench,
            text: format!(
                "with the board off at {set} the current still moved when its reading ended, so that it is not stated: a \
                     capacitor charges, forms or gives back what it absorbed. Dwell longer, and look first at the input \
                     capacitor."
            ),
        })
    }

    fn overload_finding(&self) -> Option<Finding> {
        let (set, range) = self.overloaded?;
        let range = range.map_or_else(String::new, |range| format!(" on the {range} range"));
        Some(Finding {
            code: FindingCode::RangeNotAdequate,
            about: About::Bench,
            text: format!(
                "with the board off at {set} the ammeter overloaded{range}: the off current is larger than the \
                 range. Measure it on the next larger range."
            ),
        })
    }
}

fn same(a: Option<Amps>, b: Option<Amps>) -> bool {
    match (a, b) {
        (Some(a), Some(b)) => a.0.total_cmp(&b.0).is_eq(),
        (None, None) => true,
        _ => false,
    }
}

/// The current at `at`: the line through the readings around it, the mean of those at it, the straight line between the
/// nearest on either side, or the mean of those near it.
fn estimate(course: &Course<'_>, readings: &[Settled], at: Volts) -> Option<Quantity> {
    let within = |share: f64| -> Vec<Settled> {
        let close = |settled: &&Settled| (settled.volts - at).abs().0 <= share * at.0.abs();
        readings.iter().filter(close).copied().collect()
    };
    let (here, near) = (within(SPAN), within(NEAR));
    let (value, mut parts) = if let Some(line) = line_through(&near, at) {
        let scatter = line.uncertainty_at(at.0, line.scatter.unwrap_or(0.0));
        (line.at(at.0), vec![Contribution::scatter(SCATTER, scatter, near.len() as f64 - 2.0)])
    } else if !here.is_empty() {
        mean(&here, at)
    } else if let Some(between) = between(readings, at) {
        between
    } else if !near.is_empty() {
        mean(&near, at)
    } else {
        return None;
    };
    let range = readings.first()?.range;
    let passing = course.voltmeter_current(at);
    let (value, of_bench) = zero::without_zero(course, range, at, value, passing);
    parts.extend(of_bench);
    Some(Quantity::new(QuantityName::OffCurrent, value, parts))
}

/// Name of the readings' own scatter in the budget.
const SCATTER: &str = "scatter of the readings";

/// A line, where there are enough plateaus at different voltages on both sides.
fn line_through(near: &[Settled], at: Volts) -> Option<Line> {
    let lowest = near.iter().map(|settled| settled.volts.0).fold(f64::INFINITY, f64::min);
    let highest = near.iter().map(|settled| settled.volts.0).fold(f64::NEG_INFINITY, f64::max);
    let around = lowest <= at.0 && at.0 <= highest && highest - lowest >= SPAN * at.0;
    (near.len() > 3 && around).then(|| Line::fit(near.iter().map(point))).flatten()
}

/// A plateau's mean, with its readings as weight.
pub(super) fn point(settled: &Settled) -> Point {
    Point { x: settled.volts.0, y: settled.amps.0, weight: settled.count as f64 }
}

/// The mean over several plateaus brought to `at`, its scatter, and what their distance to `at` may do.
///
/// The current changes with voltage by something between nothing and in proportion: the middle of the two is taken, as a
/// rectangle (JCGM 100:2008, 4.3.7).
fn mean(plateaus: &[Settled], at: Volts) -> (f64, Vec<Contribution>) {
    let count: f64 = plateaus.iter().map(|settled| settled.count as f64).sum();
    let weighted = |value: &dyn Fn(&Settled) -> f64| {
        plateaus.iter().map(|settled| settled.count as f64 * value(settled)).sum::<f64>() / count
    };
    let mean = weighted(&|settled| settled.amps.0);
    let volts = Volts(weighted(&|settled| settled.volts.0));
    let half_way = mean * ((at - volts) / volts) / 2.0;
    let mut parts = vec![Contribution::rectangular("distance to the wanted voltage", half_way)];
    if count > 1.0 {
        let own: f64 = plateaus.iter().map(|settled| settled.squares).sum();
        let among = count * weighted(&|settled| (settled.amps.0 - mean).powi(2));
        let scatter = ((own + among) / (count - 1.0) / count).sqrt();
        parts.push(Contribution::scatter(SCATTER, scatter, count - 1.0));
    }
    (mean + half_way, parts)
}

/// The current at `at` on the straight line between the nearest plateaus below and above, and their scatter.
fn between(readings: &[Settled], at: Volts) -> Option<(f64, Vec<Contribution>)> {
    let by_volts = |a: &&Settled, b: &&Settled| a.volts.0.total_cmp(&b.volts.0);
    let below = readings.iter().filter(|settled| settled.volts < at).max_by(by_volts)?;
    let above = readings.iter().filter(|settled| settled.volts > at).min_by(by_volts)?;
    let share = (at - below.volts) / (above.volts - below.volts);
    let scatter = |settled: &Settled, source, share: f64| {
        let spread = settled.scatter()?;
        let line = Contribution::scatter(source, spread, settled.count as f64 - 1.0);
        Some(line.through(share, Unit::Ampere).estimated(settled.amps.0))
    };
    let value = below.amps.0 + share * (above.amps.0 - below.amps.0);
    let lines = [
        scatter(below, "scatter of the readings below", 1.0 - share),
        scatter(above, "scatter of the readings above", share),
    ];
    Some((value, lines.into_iter().flatten().collect()))
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::trace::{Accuracy, Current, RangeAccuracy, Trace};
    use crate::units::Ohms;

    /// Off at the voltages and currents given, each read three times on `range`, between a trip and a re-enable.
    fn run(readings: &[(f64, f64)], range: f64) -> Trace {
        let down = [on(7.6), on(6.1), off(5.9), off(5.2)];
        let up = [off(6.3), on(6.5)];
        let read: Vec<(f64, f64)> = readings.iter().flat_map(|reading| [*reading; 3]).collect();
        let mut trace = staircase(&[&down[..], &read[..], &up[..]].concat());
        for (index, sample) in trace.samples.iter_mut().enumerate() {
            let low = (down.len()..down.len() + read.len()).contains(&index);
            sample.range = Some(Amps(if low { range } else { 1.0 }));
        }
        let line = |full_scale: f64| RangeAccuracy {
            full_scale: Amps(full_scale),
            accuracy: Accuracy { relative: 1e-3, absolute: full_scale * 1e-4, resolution: 0.0 },
        };
        trace.claims.current = vec![line(1e-4), line(1e-2), line(1.0)];
        trace
    }

    fn found(trace: &Trace) -> (Option<Quantity>, Vec<FindingCode>) {
        let profile = profile();
        let (quantity, findings) = off_current(&Course::new(trace, &profile), Volts(6.0), false);
        (quantity, findings.iter().map(|finding| finding.code).collect())
    }

    #[test]
    fn the_smallest_range_counts_with_its_own_claim() {
        let (quantity, findings) = found(&run(&[(5.5, 2.4e-6), (5.8, 2.5e-6)], 1e-4));
        let quantity = quantity.expect("an off current");
        assert!((quantity.value - 2.5e-6).abs() < 1e-12);
        // 0.1 % of 2.5 uA and 10 nA, a rectangle each.
        let expected = 2.5e-9_f64.hypot(10e-9) / 3.0_f64.sqrt();
        assert!((quantity.standard_uncertainty - expected).abs() < 1e-11, "{quantity:?}");
        assert!(findings.is_empty(), "{findings:?}");
    }

    /// A voltmeter of 10 Mohm at 5.8 V draws 580 nA.
    #[test]
    fn what_a_voltmeter_behind_the_ammeter_draws_is_taken_off() {
        let mut trace = run(&[(5.5, 2.95e-6), (5.8, 3.08e-6)], 1e-4);
        let reading = found(&trace).0.expect("an off current");
        assert!((reading.value - 3.08e-6).abs() < 1e-12);
        trace.claims.sense_resistance = Some(Ohms(10e6));
        let board = found(&trace).0.expect("an off current");
        assert!((board.value - 2.5e-6).abs() < 1e-12, "{board:?}");
        let share = |quantity: &Quantity, source| {
            quantity
                .contributions
                .iter()
                .find(|part| part.source == source)
                .map(|part| part.standard_uncertainty)
        };
        let input = share(&board, "input resistance of the voltmeter").expect("in the budget");
        assert!(
            (input - 5.8e-9 / 3.0_f64.sqrt()).abs() < 1e-15,
            "1 % of 580 nA as a rectangle, found {input}"
        );
        let gain = |quantity| share(quantity, "ammeter gain").expect("in the budget");
        assert!((gain(&board) - gain(&reading)).abs() < 1e-15, "the meter read the sum");
        assert!(reading.value - board.value > 2.0 * reading.standard_uncertainty, "{reading:?}");
    }

    #[test]
    fn limits_and_hints_are_held_against_the_boards_own_current() {
        let mut trace = run(&[(5.2, 4.0e-6), (5.8, 4.3e-6)], 1e-4);
        assert_eq!(found(&trace).1, [FindingCode::OffCurrentHigh]);
        trace.claims.sense_resistance = Some(Ohms(10e6));
        assert_eq!(found(&trace).1, []);
        // 29 uA through 200 kohm at the board, 29.58 uA in the meter.
        let mut trace = run(&[(5.2, 26.52e-6), (5.8, 29.58e-6)], 1e-4);
        trace.claims.sense_resistance = Some(Ohms(10e6));
        let profile = profile();
        let (_, findings) = off_current(&Course::new(&trace, &profile), Volts(6.0), false);
        let text = &findings.first().expect("too high").text;
        assert!(text.contains("29.00 µA") && text.contains("about 200.0 kΩ"), "{text}");
    }

    #[test]
    fn between_two_plateaus_it_is_interpolated() {
        let (quantity, _) = found(&run(&[(5.5, 2.2e-6), (5.9, 2.6e-6)], 1e-4));
        assert!((quantity.expect("an off current").value - 2.5e-6).abs() < 1e-12);
    }

    #[test]
    fn a_range_that_cannot_see_it_gives_no_number() {
        let (quantity, findings) = found(&run(&[(5.5, 2.4e-6), (5.8, 2.5e-6)], 0.1));
        assert_eq!(quantity, None);
        assert_eq!(findings, [FindingCode::RangeNotAdequate]);
    }

    #[test]
    fn an_overloaded_range_gives_no_number() {
        let mut trace = run(&[(5.8, 2.5e-6)], 1e-4);
        for sample in trace.samples.iter_mut().filter(|sample| sample.range == Some(Amps(1e-4))) {
            sample.current = Current::OVERLOAD;
        }
        trace.samples.retain(|sample| sample.set != Volts(5.9) && sample.set != Volts(5.2));
        assert_eq!(found(&trace), (None, vec![FindingCode::RangeNotAdequate]));
    }

    #[test]
    fn a_coarse_range_still_fails_what_is_far_outside() {
        let (quantity, findings) = found(&run(&[(5.5, 90e-6), (5.8, 100e-6)], 1e-2));
        assert!(quantity.is_some());
        assert_eq!(findings, [FindingCode::OffCurrentHigh]);
    }

    #[test]
    fn a_current_still_falling_does_not_count() {
        let mut trace = run(&[(5.8, 2.5e-6)], 1e-4);
        for (index, sample) in trace.samples.iter_mut().filter(|sample| sample.set == Volts(5.8)).enumerate()
        {
            sample.current = Current::Value(Amps(9e-6 - 2e-6 * index as f64));
        }
        assert_eq!(found(&trace), (None, vec![FindingCode::OffCurrentMoves]));
    }

    #[test]
    fn terminals_that_have_not_come_down_do_not_count() {
        let mut trace = run(&[(5.8, 2.5e-6)], 1e-4);
        for sample in trace.samples.iter_mut().filter(|sample| sample.set == Volts(5.8)) {
            sample.sense = Some(Volts(6.0));
        }
        assert_eq!(found(&trace).0, None);
    }
}
