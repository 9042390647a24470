//! The zeros of a bench with nothing in its fixture.

use super::ending::cut_short;
use super::small_range::{INPUT_TOLERANCE, OnSmallRange, groups, on_small_ranges};
use crate::trace::{Sample, Trace};
use crate::units::{Amps, Volts};
use serde::{Deserialize, Serialize};

/// What was asked for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ZeroTask {
    /// Readings for each mean.
    pub readings: usize,
    /// The ammeter's large range, which is not zeroed.
    pub large_range: Amps,
    /// How far the terminals may lie from the set-point.
    pub arrival_tolerance: Volts,
    /// The largest off current a board may have, where a profile limits it.
    pub off_current: Option<Amps>,
}

/// The ammeter with an empty fixture, on one range at one voltage.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct FixtureZero {
    /// Full scale of the range.
    pub full_scale_a: f64,
    /// Voltage at the terminals.
    pub at_v: f64,
    /// Mean reading, less what the voltmeter draws by its stated input resistance.
    pub current_a: f64,
    /// Standard deviation of one reading.
    pub noise_a: f64,
    /// Standard uncertainty of the mean: its scatter and the last digit.
    pub standard_uncertainty_a: f64,
    /// How many readings.
    pub readings: usize,
}

/// A zero beyond this multiple of the claim is no zero.
const ABSURD: f64 = 5.0;

/// What leaks in a fixture may be this share of the off current that is to be judged.
const LEAKAGE_SHARE: f64 = 0.1;

/// The zeros in `trace`, and all that speaks against them: with any problem they must not be used.
pub fn zeros(trace: &Trace, task: &ZeroTask) -> (Vec<FixtureZero>, Vec<String>) {
    let mut problems: Vec<String> = cut_short(&trace.ending).into_iter().collect();
    let mut found: Vec<FixtureZero> = Vec::new();
    for read in on_small_ranges(trace, task.large_range, task.readings, IS_IT_EMPTY) {
        match read {
            Ok(read) => {
                problems.extend(read.not_arrived(task.arrival_tolerance, DRAWS_TOO_MUCH));
                problems.extend(suspect(&read));
                found.push(zero(&read));
            }
            Err(problem) => problems.push(problem),
        }
    }
    if found.is_empty() && problems.is_empty() {
        problems.push(occupied(&groups(trace)));
    }
    problems.extend(task.off_current.and_then(|most| leaks(&found, most)));
    (found, problems)
}

fn zero(read: &OnSmallRange) -> FixtureZero {
    FixtureZero {
        full_scale_a: read.range.0,
        at_v: read.at.value,
        current_a: read.current(),
        noise_a: read.reading.deviation,
        standard_uncertainty_a: read
            .reading
            .standard_uncertainty(read.claim.map_or(0.0, |claim| claim.resolution)),
        readings: read.reading.count,
    }
}

/// More than claim and voltmeter can explain.
fn suspect(read: &OnSmallRange) -> Option<String> {
    let claim = read.claim?;
    let allowed =
        ABSURD * claim.limit(read.reading.value) + claim.resolution + INPUT_TOLERANCE * read.passing;
    let credible = read.current().abs() <= allowed;
    (!credible).then(|| {
        format!(
            "zero of {} on the {} range at {}, at most {} is credible: {IS_IT_EMPTY}",
            Amps(read.current()),
            read.range,
            Volts(read.at.value),
            Amps(allowed)
        )
    })
}

const DRAWS_TOO_MUCH: &str = "something in the fixture that draws more than the current limit";

const IS_IT_EMPTY: &str = "is a board still in the fixture? Take out whatever is in it, clean it of flux, and look that the \
                           voltmeter sits where the bench file says";

/// The small ranges were never reached.
fn occupied(groups: &[&[Sample]]) -> String {
    let last = groups.iter().filter(|group| group[0].set > Volts::ZERO).flat_map(|group| group.last());
    let flows = last.filter_map(|sample| sample.current.amps()).map(|amps| amps.0).fold(0.0, f64::max);
    format!("{} flow, so the small ranges were not used: {IS_IT_EMPTY}", Amps(flows))
}

/// The growth of the zero with the voltage, against the largest off current of a good board.
fn leaks(zeros: &[FixtureZero], most: Amps) -> Option<String> {
    let smallest = zeros.iter().map(|zero| zero.full_scale_a).fold(f64::INFINITY, f64::min);
    let on_smallest = || zeros.iter().filter(|zero| zero.full_scale_a <= smallest);
    let low = on_smallest().min_by(|a, b| a.at_v.total_cmp(&b.at_v))?;
    let high = on_smallest().max_by(|a, b| a.at_v.total_cmp(&b.at_v))?;
    let leakage = high.current_a - low.current_a;
    (leakage > LEAKAGE_SHARE * most.0).then(|| {
        format!(
            "the fixture leaks {} at {}, more than a tenth of the {most} a board may draw: clean it of flux, dry it, and look \
             at its cables",
            Amps(leakage),
            Volts(high.at_v)
        )
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::fixture::staircase;
    use crate::trace::{Accuracy, RangeAccuracy};
    use crate::units::Ohms;

    const TASK: ZeroTask = ZeroTask {
        readings: 20,
        large_range: Amps(0.01),
        arrival_tolerance: Volts(0.012),
        off_current: Some(Amps(4e-6)),
    };

    /// An empty fixture: at 0 V and 5.8 V a reading on the large range and 22 on 100 µA, the first two of which are wild.
    /// The ammeter is 9 nA off, the voltmeter has 10 Mohm, and `leak` siemens are in the fixture.
    fn trace(leak: f64) -> Trace {
        let mut readings = Vec::new();
        for volts in [0.0, 5.8] {
            readings.push((volts, 0.0));
            for index in 0..22 {
                let noise = if index % 2 == 0 { 0.5e-9 } else { -0.5e-9 };
                let wild = if index < 2 { 1e-6 } else { 0.0 };
                readings.push((volts, 9e-9 + volts * (1e-7 + leak) + noise + wild));
            }
        }
        let mut trace = staircase(&readings);
        for (index, sample) in trace.samples.iter_mut().enumerate() {
            sample.range = Some(if index % 23 == 0 { TASK.large_range } else { Amps(1e-4) });
        }
        let accuracy = Accuracy { relative: 5e-4, absolute: 25e-9, resolution: 1e-10 };
        trace.claims.current = vec![RangeAccuracy { full_scale: Amps(1e-4), accuracy }];
        trace.claims.sense_resistance = Some(Ohms(10e6));
        trace
    }

    /// By hand: s of the mean is 0.5 nA x sqrt(20/19) / sqrt(20) = 0.1147 nA, the digit 0.1 nA / sqrt(12) = 0.0289 nA,
    /// together 0.1183 nA.
    #[test]
    fn the_ammeters_offset_and_what_leaks_are_found_with_their_uncertainty() {
        let (zeros, problems) = zeros(&trace(1e-9), &TASK);
        assert_eq!(problems, Vec::<String>::new());
        assert_eq!(zeros.len(), 2);
        assert!((zeros[0].current_a - 9e-9).abs() < 1e-14, "{zeros:?}");
        assert!((zeros[1].current_a - 14.8e-9).abs() < 1e-14, "9 nA and 5.8 V through 1 Gohm: {zeros:?}");
        assert!((zeros[1].standard_uncertainty_a - 0.1183e-9).abs() < 1e-13, "{zeros:?}");
    }

    #[track_caller]
    fn refused(trace: &Trace, phrase: &str) {
        let (_, problems) = zeros(trace, &TASK);
        assert!(problems.iter().any(|told| told.contains(phrase)), "no {phrase:?} in {problems:?}");
    }

    #[test]
    fn a_board_left_in_a_dead_ammeter_and_a_dirty_fixture_are_refused() {
        refused(&trace(4e-7), "is a board still in the fixture?");
        refused(&trace(8e-8), "the fixture leaks 464.0 nA");
        let mut dead = trace(0.0);
        for sample in &mut dead.samples {
            sample.current = crate::trace::Current::Value(Amps::ZERO);
        }
        refused(&dead, "fuse blown");
        let mut cut = trace(0.0);
        for sample in &mut cut.samples {
            sample.sense = sample.sense.map(|volts| volts * 0.5);
        }
        refused(&cut, "no path through the ammeter");
        let mut occupied = trace(0.0);
        occupied.samples.retain(|sample| sample.range == Some(TASK.large_range));
        refused(&occupied, "the small ranges were not used");
    }
}
