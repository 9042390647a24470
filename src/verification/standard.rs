//! A known resistor on the small ranges of the ammeter: does it still read the current that must flow?

use super::KnownLoad;
use super::ending::cut_short;
use super::small_range::{INPUT_TOLERANCE, OnSmallRange, groups, on_small_ranges};
use crate::trace::{Claims, Trace};
use crate::units::{Amps, Unit, Volts, with_decimals_of};
use crate::verdict::COVERAGE_FACTOR;
use serde::{Deserialize, Serialize};

/// What was asked for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct StandardTask {
    /// The resistor in the place of the board.
    pub resistor: KnownLoad,
    /// Readings for each mean.
    pub readings: usize,
    /// The ammeter's large range, which is not compared.
    pub large_range: Amps,
    /// How far the terminals may lie from the set-point.
    pub arrival_tolerance: Volts,
}

/// A known resistor on one small range.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct StandardFound {
    /// What the resistor is said to be.
    pub stated_ohm: f64,
    /// Its tolerance, as a fraction of one.
    pub tolerance: f64,
    /// Full scale of the range.
    pub full_scale_a: f64,
    /// Voltage at the terminals.
    pub at_v: f64,
    /// Current through the resistor by that voltage.
    pub expected_a: f64,
    /// Expanded uncertainty of that (k = 2): the resistor's tolerance, and the voltage.
    pub expected_expanded_uncertainty_a: f64,
    /// Mean reading, less what the voltmeter draws by its stated input resistance.
    pub measured_a: f64,
    /// Expanded uncertainty of that (k = 2): the ammeter's claim, the scatter, and the voltmeter's input.
    pub expanded_uncertainty_a: f64,
    /// The normalised error E_n: the difference over the root of the sum of both squared expanded uncertainties.
    pub normalised_error: f64,
    /// How many readings.
    pub readings: usize,
}

/// Less than this share of the current that must flow is no reading of the resistor.
const NEXT_TO_NOTHING: f64 = 0.05;

/// A comparison that cannot see an error of this share says nothing.
const BLUNT: f64 = 0.1;

/// The resistor on every small range that was read, and what is wrong.
///
/// Expected and measured agree when E_n is at most 1, as for reference boards. What the ammeter's range drops is left
/// out: some 100 ohm before a megohm, far below what the resistor is known to.
pub fn standard(trace: &Trace, task: &StandardTask) -> (Vec<StandardFound>, Vec<String>) {
    let mut problems: Vec<String> = cut_short(&trace.ending).into_iter().collect();
    let mut found: Vec<StandardFound> = Vec::new();
    for read in on_small_ranges(trace, task.large_range, task.readings, IS_IT_THE_ONE) {
        match read {
            Ok(read) => match read.not_arrived(task.arrival_tolerance, DRAWS_TOO_MUCH) {
                Some(problem) => problems.push(problem),
                None => found.push(compared(&read, task.resistor, &trace.claims)),
            },
            Err(problem) => problems.push(problem),
        }
    }
    if found.is_empty() && problems.is_empty() {
        problems.push(not_read(trace));
    }
    problems.extend(found.iter().filter_map(apart));
    problems.extend(found.iter().min_by(|a, b| a.full_scale_a.total_cmp(&b.full_scale_a)).and_then(blunt));
    (found, problems)
}

/// Tolerance, claims and the voltmeter's input as rectangles (JCGM 100:2008, 4.3.7), besides the scatter.
fn compared(read: &OnSmallRange, resistor: KnownLoad, claims: &Claims) -> StandardFound {
    let expected = read.at.value / resistor.resistance.0;
    let measured = read.current();
    let voltage_claim = claims.sense.or(claims.set);
    let of_voltage = read
        .at
        .standard_uncertainty(0.0)
        .hypot(voltage_claim.map_or(0.0, |claim| claim.standard_uncertainty(read.at.value)));
    let of_expected =
        (expected * resistor.tolerance / 3.0_f64.sqrt()).hypot(of_voltage / resistor.resistance.0);
    let of_measured = read
        .reading
        .standard_uncertainty(0.0)
        .hypot(read.claim.map_or(0.0, |claim| claim.standard_uncertainty(read.reading.value)))
        .hypot(read.passing * INPUT_TOLERANCE / 3.0_f64.sqrt());
    let (of_expected, of_measured) = (COVERAGE_FACTOR * of_expected, COVERAGE_FACTOR * of_measured);
    StandardFound {
        stated_ohm: resistor.resistance.0,
        tolerance: resistor.tolerance,
        full_scale_a: read.range.0,
        at_v: read.at.value,
        expected_a: expected,
        expected_expanded_uncertainty_a: of_expected,
        measured_a: measured,
        expanded_uncertainty_a: of_measured,
        normalised_error: (measured - expected).abs() / of_expected.hypot(of_measured),
        readings: read.reading.count,
    }
}

/// Comparisons in the passing sense, so that what is not a number never agrees.
fn apart(found: &StandardFound) -> Option<String> {
    let agrees = found.normalised_error <= 1.0;
    if agrees {
        return None;
    }
    let range = Amps(found.full_scale_a);
    let flows = found.measured_a.abs() > NEXT_TO_NOTHING * found.expected_a;
    if !flows {
        return Some(format!(
            "known resistor on the {range} range: {} where {} must flow: is the resistor in the fixture? Then the fuse \
             and the leads of the ammeter",
            Amps(found.measured_a),
            Amps(found.expected_a)
        ));
    }
    let shown = |value: f64, expanded: f64| {
        let (value, expanded, unit) = with_decimals_of(value, expanded, Unit::Ampere);
        format!("{value} ± {expanded} {unit}")
    };
    Some(format!(
        "known resistor on the {range} range: measured {}, expected {}: E_n = {:.2}, wanted at most 1: {IS_IT_THE_ONE}. \
         Else have the ammeter calibrated; trust no off current until then",
        shown(found.measured_a, found.expanded_uncertainty_a),
        shown(found.expected_a, found.expected_expanded_uncertainty_a),
        found.normalised_error
    ))
}

/// Agreement that means nothing.
fn blunt(found: &StandardFound) -> Option<String> {
    let spread = found.expected_expanded_uncertainty_a.hypot(found.expanded_uncertainty_a);
    let sees = spread <= BLUNT * found.expected_a;
    (!sees).then(|| {
        format!(
            "known resistor: {} flow and are compared to {}, which shows next to nothing; take a smaller or closer \
             resistor, or more voltage",
            Amps(found.expected_a),
            Amps(spread)
        )
    })
}

/// The small ranges were never reached.
fn not_read(trace: &Trace) -> String {
    let on = groups(trace).into_iter().filter(|group| group[0].set > Volts::ZERO);
    let last = on.filter_map(|group| group.last()?.current.amps()).map(|amps| amps.0);
    let flows = last.fold(0.0, f64::max);
    format!("{} flow, so no small range was read: {IS_IT_THE_ONE}", Amps(flows))
}

const IS_IT_THE_ONE: &str = "look whether it is the resistor named, clean, dry and alone in the fixture";

const DRAWS_TOO_MUCH: &str = "a resistor that draws more than the current limit";

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::fixture::staircase;
    use crate::trace::{Accuracy, Current, Overload, RangeAccuracy};
    use crate::units::Ohms;

    const TASK: StandardTask = StandardTask {
        resistor: KnownLoad { resistance: Ohms(1e6), tolerance: 0.01 },
        readings: 20,
        large_range: Amps(0.01),
        arrival_tolerance: Volts(0.012),
    };

    /// 3 V at the terminals, a reading on the large range and 22 on 100 µA, the first two of which are wild; the ammeter
    /// reads `gain` times what flows through 1 Mohm and the voltmeter's 10 Mohm.
    fn trace(gain: f64) -> Trace {
        let mut readings = vec![(3.0, 0.0)];
        for index in 0..22 {
            let noise = if index % 2 == 0 { 0.5e-9 } else { -0.5e-9 };
            let wild = if index < 2 { 1e-6 } else { 0.0 };
            readings.push((3.0, 3.3e-6 * gain + noise + wild));
        }
        let mut trace = staircase(&readings);
        for (index, sample) in trace.samples.iter_mut().enumerate() {
            sample.range = Some(if index == 0 { TASK.large_range } else { Amps(1e-4) });
        }
        let accuracy = Accuracy { relative: 5e-4, absolute: 25e-9, resolution: 1e-10 };
        trace.claims.current = vec![RangeAccuracy { full_scale: Amps(1e-4), accuracy }];
        trace.claims.sense = Some(Accuracy { relative: 3.5e-5, absolute: 50e-6, resolution: 1e-5 });
        trace.claims.sense_resistance = Some(Ohms(10e6));
        trace
    }

    /// By hand, in nA. Expected: 1 % of 3000 / sqrt 3 = 17.3205, and (35e-6 x 3 V + 50 µV) / sqrt 3 = 89.49 µV, with the
    /// digit's 2.887 µV 89.54 µV, over 1 Mohm 0.08954: together 17.3207, U = 34.641.
    /// Measured: 5e-4 x 3300 + 25 = 26.65 / sqrt 3 = 15.3864, digit 0.1 / sqrt 12 = 0.02887, scatter 0.1147, voltmeter
    /// 1 % of 300 / sqrt 3 = 1.7321: together 15.4841, U = 30.968. Both: 46.466.
    #[test]
    fn a_good_meter_agrees_and_a_wrong_one_does_not_by_the_normalised_error() {
        let (found, problems) = standard(&trace(1.0), &TASK);
        assert_eq!(problems, Vec::<String>::new());
        let found = &found[0];
        assert!((found.expected_a - 3e-6).abs() < 1e-15 && (found.measured_a - 3e-6).abs() < 1e-13);
        assert!((found.expected_expanded_uncertainty_a - 34.641e-9).abs() < 1e-12, "{found:?}");
        assert!((found.expanded_uncertainty_a - 30.968e-9).abs() < 1e-12, "{found:?}");
        assert!(found.normalised_error < 1e-3, "{found:?}");

        // 2 % of 3300 nA are 66 nA; the claim grows to 26.683 nA, so that both are 46.489 nA: 1.420.
        let (found, problems) = standard(&trace(1.02), &TASK);
        assert!((found[0].normalised_error - 1.420).abs() < 1e-3, "{found:?}");
        assert!(problems[0].contains("E_n = 1.42, wanted at most 1"), "{problems:?}");
    }

    #[track_caller]
    fn refused(trace: &Trace, task: &StandardTask, phrase: &str) {
        let (_, problems) = standard(trace, task);
        assert!(problems.iter().any(|told| told.contains(phrase)), "no {phrase:?} in {problems:?}");
    }

    fn reading(current: Current, sense: f64) -> Trace {
        let mut trace = trace(1.0);
        for sample in &mut trace.samples {
            (sample.current, sample.sense) = (current, Some(Volts(sense)));
        }
        trace
    }

    /// A fuse of the small ranges alone: the large one let the voltage through.
    #[test]
    fn a_blown_fuse_is_named_with_and_without_noise() {
        refused(&reading(Current::Value(Amps::ZERO), 3.0), &TASK, "fuse blown");
        let mut noisy = reading(Current::Value(Amps::ZERO), 0.0);
        for (index, sample) in noisy.samples.iter_mut().enumerate() {
            sample.current = Current::Value(Amps(if index % 2 == 0 { 1e-10 } else { 0.0 }));
        }
        refused(&noisy, &TASK, "no path through the ammeter (its fuse");
    }

    #[test]
    fn an_empty_fixture_another_resistor_and_a_blunt_comparison_are_told() {
        refused(&trace(0.3 / 3.3), &TASK, "is the resistor in the fixture?");
        let mut large = trace(1.0);
        large.samples.truncate(1);
        large.samples[0].current = Current::Value(Amps(54e-3));
        refused(&large, &TASK, "54.00 mA flow, so no small range was read");
        refused(&reading(Current::Overload(Overload::Overload), 3.0), &TASK, "the ammeter overloads");
        let loose = KnownLoad { resistance: Ohms(1e6), tolerance: 0.2 };
        refused(&trace(1.0), &StandardTask { resistor: loose, ..TASK }, "shows next to nothing");
    }
}
