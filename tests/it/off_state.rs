//! Off-state line, budget, on-resistance, rebound and storage on simulated boards, held against what the boards are.

#![expect(clippy::expect_used, reason = "a test stops at what it cannot read")]

use crate::virtual_run::{Run, run, run_setup};
use ebbmark::analysis::FindingCode;
use ebbmark::profile::{Limit, Pack, Profile, QuantityName, Rebound, Storage};
use ebbmark::sim::{Condition, Setup};
use ebbmark::trace::{Sample, SwitchState};
use ebbmark::units::{Amps, Ohms, Siemens, Volts};
use ebbmark::verdict::Outcome;
use std::time::Duration;

const SEEDS: u64 = 200;

const PROFILES: [(&str, &str); 3] = [
    ("river-node", include_str!("../../profiles/river-node.toml")),
    ("garden-probe", include_str!("../../profiles/garden-probe.toml")),
    ("mast-beacon", include_str!("../../profiles/mast-beacon.toml")),
];

fn profile(index: usize) -> Profile {
    let (name, text) = PROFILES[index];
    Profile::read(name, text).expect("a shipped profile")
}

fn codes(run: &Run) -> Vec<FindingCode> {
    run.verdict.findings.iter().map(|finding| finding.code).collect()
}

fn text(run: &Run, code: FindingCode) -> &str {
    let found = run.verdict.findings.iter().find(|finding| finding.code == code);
    &found.unwrap_or_else(|| panic!("no {code:?} in {:#?}", run.verdict.findings)).text
}

/// Of 200 boards, each inside U with 95 %, fewer than 180 are inside once in two thousand times; of 600 fewer than 553
/// once in 900 (binomial distribution).
#[test]
fn the_truth_lies_within_the_uncertainty_of_every_derived_quantity() {
    let names = [
        QuantityName::OffConductance,
        QuantityName::OffConstantCurrent,
        QuantityName::OnResistance,
        QuantityName::ReboundMargin,
        QuantityName::StorageTime,
    ];
    let mut of_all = [(0_u64, 0_u64); 5];
    for (index, (name, _)) in PROFILES.iter().enumerate() {
        let profile = profile(index);
        let mut inside = [(0_u64, 0_u64, 0.0); 5];
        for seed in 0..SEEDS {
            let run = run(&profile, Condition::Good, seed);
            for (quantity, (inside, count, squares)) in names.iter().zip(&mut inside) {
                let Some(truth) = run.true_value(*quantity, &profile) else { continue };
                let (value, expanded) =
                    run.measured(*quantity).unwrap_or_else(|| panic!("{name} seed {seed}: no {quantity:?}"));
                *inside += u64::from((value - truth).abs() <= expanded);
                *count += 1;
                *squares += ((value - truth) / (expanded / 2.0)).powi(2);
            }
        }
        for ((quantity, (inside, count, squares)), all) in names.iter().zip(inside).zip(&mut of_all) {
            *all = (all.0 + inside, all.1 + count);
            let rms = (squares / count as f64).sqrt();
            // Truth and storage share what the profile states of the battery, so nothing is left to scatter there.
            let honest = count == 0 || *quantity == QuantityName::StorageTime || (0.3..1.25).contains(&rms);
            assert!(honest, "{name}: {quantity:?} errs by {rms} standard uncertainties in the mean square");
            assert!(inside * 200 >= count * 180, "{name}: {quantity:?} inside {inside} of {count}");
        }
    }
    for (quantity, (inside, count)) in names.iter().zip(of_all) {
        assert!(inside * 600 >= count * 553, "{quantity:?} inside {inside} of {count}");
    }
}

#[test]
fn good_boards_fit_their_budget_and_stay_off_when_lifted() {
    for (index, (name, _)) in PROFILES.iter().enumerate() {
        let profile = profile(index);
        for seed in 0..SEEDS {
            let run = run(&profile, Condition::Good, seed);
            // Noise next to a threshold may look like a slow detector now and then.
            let usual = [FindingCode::StorageDrain, FindingCode::SlowerThanDesign];
            let remarks = codes(&run).into_iter().filter(|code| !usual.contains(code));
            assert_eq!(remarks.collect::<Vec<_>>(), [], "{name} seed {seed}: {:#?}", run.verdict.findings);
        }
    }
}

/// What each fault is called, on every seed of every profile.
#[test]
fn what_draws_too_much_or_too_little_is_told_by_its_path() {
    type Fault = (&'static str, fn(&mut Setup), FindingCode, &'static str);
    let faults: [Fault; 6] = [
        (
            "pull-up a decade low",
            |setup| setup.board.pull_up = setup.board.pull_up / 10.0,
            FindingCode::OffPathResistive,
            "a decade low",
        ),
        (
            "pull-up a decade high",
            |setup| setup.board.pull_up = setup.board.pull_up * 10.0,
            FindingCode::OffPathResistive,
            "open, or a decade high",
        ),
        (
            "leaking switch",
            |setup| setup.board.leakage = Amps(40e-6),
            FindingCode::OffPathConstant,
            "Lift the load",
        ),
        (
            "flux film of 2 Mohm",
            |setup| setup.board.leakage_conductance = Siemens(1.0 / 2e6),
            FindingCode::OffPathResistive,
            "flux residue",
        ),
        (
            "detector that draws nothing",
            |setup| setup.board.detector_current = Amps::ZERO,
            FindingCode::OffPathConstant,
            "draws too little",
        ),
        (
            "film on the fixture of 1 Mohm",
            |setup| setup.board.leakage_conductance = Siemens(1.0 / 1e6),
            FindingCode::OffPathResistive,
            "beside the design's",
        ),
    ];
    for (index, (name, _)) in PROFILES.iter().enumerate() {
        let profile = profile(index);
        for (fault, apply, code, words) in faults {
            for seed in 0..20 {
                let mut setup = Setup::new(&profile, Condition::Good, seed);
                apply(&mut setup);
                let run = run_setup(&profile, &setup);
                let told = codes(&run).into_iter().filter(|code| {
                    matches!(
                        code,
                        FindingCode::OffPathResistive
                            | FindingCode::OffPathConstant
                            | FindingCode::OffCurrentBends
                    )
                });
                assert_eq!(told.collect::<Vec<_>>(), [code], "{name}, {fault}, seed {seed}");
                let text = text(&run, code);
                assert!(text.contains(words), "{name}, {fault}, seed {seed}: {text}");
            }
        }
    }
}

/// 100 kohm in place of 1 Mohm draws 10 uA a volt (Ohm's law).
#[test]
fn a_pull_up_of_100_kohm_is_ten_microamperes_a_volt() {
    let profile = profile(1);
    let low_pull_up = |seed: u64| {
        let mut setup = Setup::new(&profile, Condition::Good, seed);
        setup.board.pull_up = Ohms(100e3);
        run_setup(&profile, &setup)
    };
    let inside = (0..40).filter(|seed| {
        let (slope, expanded) = low_pull_up(*seed).measured(QuantityName::OffConductance).expect("a line");
        assert!(expanded < 30e-9, "seed {seed}: {slope} ± {expanded}");
        (slope - 10e-6).abs() <= expanded
    });
    // Of 40 boards, each inside U with 95 %, fewer than 34 are inside three times in a thousand (binomial distribution).
    let inside = inside.count();
    assert!(inside >= 34, "{inside} of 40");
    let run = low_pull_up(2);
    assert!(text(&run, FindingCode::OffPathResistive).contains("kΩ in all"));
    assert_eq!(codes(&run)[0], FindingCode::OffCurrentHigh, "first what is out, then why");
    assert!(!text(&run, FindingCode::OffCurrentHigh).contains("look first"), "the path is told once");
}

/// No small range while the board could conduct, and no reading of the line above the lowest trip the limits allow.
#[test]
fn the_small_range_is_used_only_while_the_board_is_certainly_off() {
    for index in 0..PROFILES.len() {
        let profile = profile(index);
        let lowest_trip = profile.limits[&QuantityName::Trip].min.expect("a window");
        for condition in [Condition::Good, Condition::LeakingSwitch, Condition::NoSink, Condition::HighTrip] {
            for seed in 0..20 {
                let run = run(&profile, condition, seed);
                let small =
                    |sample: &&Sample| sample.range.is_some_and(|range| range < profile.supply.current_limit);
                let small: Vec<&Sample> = run.trace.samples.iter().filter(small).collect();
                assert!(small.len() > 30, "{condition} seed {seed}: {}", small.len());
                for sample in small {
                    let state = SwitchState::of(
                        sample.current,
                        sample.terminals(),
                        profile.load.resistance,
                        Amps(1e-8),
                    );
                    assert_eq!(state, SwitchState::Off, "{condition} seed {seed}: {sample:?}");
                    assert!(sample.set.0 < lowest_trip, "{condition} seed {seed}: {sample:?}");
                }
            }
        }
    }
}

#[test]
fn a_narrow_hysteresis_restarts_when_lifted_and_the_margin_says_why() {
    let profile = profile(1);
    let hold = profile.pack.rebound.expect("a pack").hold.expect("a hold");
    for seed in 0..100 {
        let run = run(&profile, Condition::NarrowHysteresis, seed);
        assert_eq!(run.verdict.outcome, Outcome::Fail);
        assert!(codes(&run).contains(&FindingCode::RestartsAfterRebound), "seed {seed}: {:?}", codes(&run));
        let (margin, _) = run.measured(QuantityName::ReboundMargin).expect("a margin");
        assert!(margin < 0.0, "seed {seed}: {margin}");
        // Good boards are held for the whole time.
        let good = self::run(&profile, Condition::Good, seed);
        let risen = good.truth.trip + profile.pack.rebound.expect("a pack").rise(Amps(3.0 / 39.0));
        let lifted = good.trace.samples.iter().filter(|sample| (sample.set - risen).abs() < Volts(0.012));
        let times: Vec<Duration> = lifted.map(|sample| sample.at).collect();
        let held = times.last().zip(times.first()).map(|(last, first)| *last - *first);
        assert!(held.is_some_and(|held| held >= hold.mul_f64(0.9)), "seed {seed}: {held:?}");
    }
}

/// A board whose rise lies far above its hysteresis is never lifted above the profile's maximum.
#[test]
fn nothing_is_lifted_above_the_maximum() {
    let mut profile = profile(0);
    let rebound = Rebound {
        resistance: Ohms(1.0),
        recovery: Volts(5.0),
        tolerance: 0.0,
        hold: Some(Duration::from_millis(100)),
    };
    profile.pack = Pack { rebound: Some(rebound), storage: None };
    let run = run(&profile, Condition::Good, 3);
    let highest = run.trace.samples.iter().map(|sample| sample.set.0).fold(0.0, f64::max);
    assert!((highest - profile.supply.maximum.0).abs() < 1e-9, "{highest}");
}

#[test]
fn every_new_quantity_takes_a_limit_and_is_judged_by_it() {
    let mut profile = profile(0);
    let between = |min, max| Limit { at: None, min: Some(min), max: Some(max) };
    profile.limits.extend([
        (QuantityName::OffConductance, between(0.3e-6, 0.45e-6)),
        (QuantityName::OffConstantCurrent, between(0.2e-6, 0.6e-6)),
        (QuantityName::OnResistance, between(0.02, 0.1)),
        (QuantityName::ReboundMargin, Limit { at: None, min: Some(0.02), max: None }),
        (QuantityName::StorageTime, Limit { at: None, min: Some(86_400.0 * 30.0), max: None }),
    ]);
    for seed in 0..50 {
        let run = run(&profile, Condition::Good, seed);
        assert_eq!(run.verdict.outcome, Outcome::Pass, "seed {seed}: {:#?}", run.verdict);
        assert_eq!(run.verdict.judged.iter().filter(|judged| judged.decision.is_some()).count(), 9);
        let mut worn = Setup::new(&profile, Condition::Good, seed);
        worn.board.on_resistance = Ohms(0.15);
        let run = run_setup(&profile, &worn);
        assert_eq!(run.verdict.outcome, Outcome::Fail, "seed {seed}: a worn switch");
    }
}

/// 200 mAh against 3.85 uA without self-discharge: 5.9 years, by hand.
#[test]
fn a_stored_battery_lasts_as_long_as_its_charge_over_its_drain() {
    let mut profile = profile(1);
    let remaining = ebbmark::units::Coulombs(720.0);
    let storage = Storage { remaining, self_discharge: Amps::ZERO, tolerance: 0.0, at: None };
    profile.pack = Pack { rebound: None, storage: Some(storage) };
    let mut setup = Setup::new(&profile, Condition::Good, 5);
    (setup.board.pull_up, setup.board.detector_current) = (Ohms(2.85 / 2.85e-6), Amps(1e-6));
    (setup.board.leakage, setup.board.leakage_conductance) = (Amps::ZERO, Siemens(0.0));
    let (time, expanded) = run_setup(&profile, &setup).measured(QuantityName::StorageTime).expect("a time");
    let years = 86_400.0 * 365.25;
    assert!((time / years - 5.926).abs() < 0.06, "{} ± {}", time / years, expanded / years);
}
