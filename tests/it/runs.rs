//! Whole runs in virtual time over many seeds: what is measured is true, and the output never stays on.

use crate::river;
use crate::virtual_run::{Run, faulty_run, run, run_setup};
use ebbmark::analysis::FindingCode;
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::{Condition, Setup};
use ebbmark::trace::OutputState;
use ebbmark::units::{Ohms, Volts};
use ebbmark::verdict::Outcome;

/// What U promises, less three standard deviations of a count of so many boards.
fn least_coverage(boards: u64) -> f64 {
    0.95 - 3.0 * (0.95 * 0.05 / boards as f64).sqrt()
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
        let mut judged = 0;
        for seed in 0..seeds {
            let run = run(&profile, condition, seed);
            if let Some(wanted) = true_outcome(&profile, &run) {
                judged += 1;
                let outcome = run.verdict.outcome;
                assert_eq!(outcome, wanted, "{condition} seed {seed}: {:#?}", run.verdict.findings);
            }
        }
        assert!(
            judged * 10 >= seeds * 9,
            "{condition}: only {judged} of {seeds} boards lie clear of their limits"
        );
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
        assert!(codes.contains(&FindingCode::SlowerThanDesign), "seed {seed}: {codes:?}");
    }
    let share = covered as f64 / SEEDS as f64;
    assert!(share >= least_coverage(SEEDS), "U covers the trip in {share} of {SEEDS} seeds");
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

/// A reversed board's way in is a diode and whatever lies behind it, not only the load.
#[test]
fn a_reversed_board_of_any_resistance_never_sees_the_start_voltage() {
    let profile = river::profile();
    for behind in [0.2, 1.0, 3.0, 10.0, 11.0, 14.0, 20.0, 55.0] {
        let mut setup = Setup::new(&profile, Condition::Reversed, 3);
        setup.board.load = Ohms(behind);
        let run = run_setup(&profile, &setup);
        assert_eq!(run.verdict.outcome, Outcome::Invalid, "{behind} ohm: {:?}", run.verdict.findings);
        let first = run.verdict.findings.first().map(|finding| finding.code);
        assert_eq!(first, Some(FindingCode::Reversed), "{behind} ohm");
        assert!(run.trace.samples.iter().all(|sample| sample.set <= Volts(1.5)), "{behind} ohm");
    }
}

#[test]
fn a_board_that_stays_charged_is_not_handed_out_without_a_word() {
    let profile = river::profile();
    let mut setup = Setup::new(&profile, Condition::NoSink, 3);
    setup.supply.off_resistance = Ohms(1e9);
    let run = run_setup(&profile, &setup);
    let codes: Vec<FindingCode> = run.verdict.findings.iter().map(|finding| finding.code).collect();
    assert!(codes.contains(&FindingCode::StillCharged), "{codes:?} {:?}", run.trace.samples.last());
}
