//! Whole runs in virtual time over many seeds: what is measured is true, and the output never stays on.

use crate::river;
use crate::virtual_run::{Run, faulty_run, run};
use ebbmark::analysis::FindingCode;
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::Condition;
use ebbmark::trace::OutputState;
use ebbmark::units::Volts;
use ebbmark::verdict::Outcome;
use std::collections::BTreeMap;

/// A k = 2 interval covers about 95 % (JCGM 100:2008, 6.3.3); where rectangular parts dominate, more.
const LEAST_COVERAGE: f64 = 0.95;

const MEASURED: [QuantityName; 5] = [
    QuantityName::Trip,
    QuantityName::ReEnable,
    QuantityName::Hysteresis,
    QuantityName::OnCurrent,
    QuantityName::OffCurrent,
];

#[test]
fn the_stated_uncertainty_covers_the_truth() {
    const SEEDS: u64 = 1000;
    let profile = river::profile();
    let mut covered = BTreeMap::<QuantityName, u64>::new();
    for seed in 0..SEEDS {
        let run = run(&profile, Condition::Good, seed);
        for name in MEASURED {
            let (value, uncertainty) =
                run.measured(name).unwrap_or_else(|| panic!("seed {seed}: no {}", name.key()));
            let truth = run.true_value(name, &profile).unwrap_or(f64::NAN);
            *covered.entry(name).or_default() += u64::from((value - truth).abs() <= uncertainty);
        }
    }
    for name in MEASURED {
        let share = covered[&name] as f64 / SEEDS as f64;
        assert!(share >= LEAST_COVERAGE, "{}: {share} of {SEEDS} seeds", name.key());
    }
}

#[test]
fn no_board_outside_the_guard_zone_is_judged_wrongly() {
    let profile = river::profile();
    let conditions = [
        (Condition::Good, 1000),
        (Condition::HighTrip, 300),
        (Condition::NarrowHysteresis, 300),
        (Condition::LeakingSwitch, 300),
        (Condition::LowPullUp, 300),
    ];
    for (condition, seeds) in conditions {
        for seed in 0..seeds {
            let run = run(&profile, condition, seed);
            if let Some(wanted) = true_outcome(&profile, &run) {
                let outcome = run.verdict.outcome;
                assert_eq!(outcome, wanted, "{condition} seed {seed}: {:#?}", run.verdict.findings);
            }
        }
    }
}

/// What a perfect bench would say; `None` when a true value lies within the guard band of a limit.
fn true_outcome(profile: &Profile, run: &Run) -> Option<Outcome> {
    let mut outcome = Some(Outcome::Pass);
    for (name, limit) in &profile.limits {
        let truth = run.true_value(*name, profile)?;
        let (_, guard) = run.measured(*name)?;
        // The reading may lie a guard band from the truth, and the decision a guard band from the reading.
        let clear = |distance: f64| distance.abs() > 2.0 * guard;
        let distances = [limit.min.map(|min| truth - min), limit.max.map(|max| max - truth)];
        for distance in distances.into_iter().flatten() {
            match (distance < 0.0, clear(distance)) {
                (true, true) => return Some(Outcome::Fail),
                (_, false) => outcome = None,
                _ => {}
            }
        }
    }
    outcome
}

#[test]
fn whatever_fails_the_output_is_off_or_reported() {
    const RUNS: u64 = 10_000;
    let profile = river::profile();
    let mut reported = 0;
    for seed in 0..RUNS {
        let condition = Condition::ALL[(seed % Condition::ALL.len() as u64) as usize];
        let (trace, output_on) = faulty_run(&profile, condition, seed);
        match trace.ending.output {
            OutputState::Off => assert!(!output_on, "seed {seed} {condition}: output on, but reported off"),
            OutputState::MayBeOn => reported += 1,
        }
    }
    assert!(reported > 0, "no run exercised the report");
}

#[test]
fn the_same_seed_gives_the_same_bytes() {
    let profile = river::profile();
    for seed in 0..120 {
        let condition = Condition::ALL[(seed % Condition::ALL.len() as u64) as usize];
        let bytes = || serde_json::to_string(&faulty_run(&profile, condition, seed).0).expect("plain data");
        assert_eq!(bytes(), bytes(), "seed {seed} {condition}");
    }
}

/// A slow board's thresholds are judged like any other's: the run finds that it is slow and takes its time.
#[test]
fn a_slow_board_is_measured_right_and_called_slow() {
    const SEEDS: u64 = 300;
    let profile = river::profile();
    let mut covered = 0;
    for seed in 0..SEEDS {
        let run = run(&profile, Condition::SlowDetector, seed);
        let (trip, uncertainty) = run.measured(QuantityName::Trip).expect("a trip");
        covered += u64::from((trip - run.truth.trip.0).abs() <= uncertainty);
        let codes: Vec<FindingCode> = run.verdict.findings.iter().map(|finding| finding.code).collect();
        assert!(codes.contains(&FindingCode::DwellShorterThanDelay), "seed {seed}: {codes:?}");
    }
    let share = covered as f64 / SEEDS as f64;
    assert!(share >= LEAST_COVERAGE, "U covers the trip in {share} of {SEEDS} seeds");
}

#[test]
fn the_ramp_goes_on_below_the_trip_to_the_floor() {
    let profile = river::profile();
    let run = run(&profile, Condition::Good, 5);
    let below =
        run.trace.samples.iter().filter(|sample| sample.sense.is_some_and(|sense| sense < run.truth.trip));
    let mut heights: Vec<i64> = below
        .filter(|sample| sample.set > profile.supply.floor - Volts(0.01))
        .map(|sample| (sample.set.0 * 1000.0).round() as i64)
        .collect();
    heights.sort_unstable();
    heights.dedup();
    let survey = heights.windows(2).filter(|pair| pair[1] - pair[0] > 10);
    assert!(survey.count() >= 8, "set-points below the trip: {heights:?} mV");
}
