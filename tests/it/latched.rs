//! A board that stays off once tripped, until its supply has gone: all is measured that such a board has.

use crate::river;
use crate::virtual_run::{Run, assert_safe, run_setup};
use ebbmark::analysis::{FindingCode, from_ramps};
use ebbmark::profile::{Limit, Profile, QuantityName, Ramp};
use ebbmark::sim::{Condition, DeepConduction, Setup};
use ebbmark::units::{Amps, Volts};
use ebbmark::verdict::Outcome;
use std::time::Duration;

fn profile() -> Profile {
    let mut profile = river::profile();
    profile.latched = true;
    profile.ramp = Ramp::Staircase { step: Volts(10e-3) };
    for name in [QuantityName::ReEnable, QuantityName::Hysteresis] {
        profile.limits.remove(&name);
    }
    let limit = |max| Limit { at: None, min: None, max: Some(max) };
    profile.limits.insert(QuantityName::DetectDelay, limit(8e-3));
    profile.limits.insert(QuantityName::DeepCurrent, limit(1e-3));
    profile.measure.detect_delay = true;
    profile.measure.deep_floor = Some(Volts(0.3));
    if let Some(rebound) = &mut profile.pack.rebound {
        rebound.hold = Some(Duration::from_secs(1));
    }
    profile
}

fn codes(run: &Run) -> Vec<FindingCode> {
    run.verdict.findings.iter().map(|finding| finding.code).collect()
}

#[test]
fn a_latched_board_passes_with_all_it_has_measured() {
    let mut profile = profile();
    for rates in [None, Some(3)] {
        profile.measure.ramp_rates = rates;
        for seed in 0..30 {
            let run = run_setup(&profile, &Setup::new(&profile, Condition::Latched, seed));
            let what = format!("seed {seed}, {rates:?}");
            assert_safe(&run, &profile, &what);
            assert_eq!(run.verdict.outcome, Outcome::Pass, "{what}: {:#?}", run.verdict);
            let truth = [
                (QuantityName::Trip, run.truth.trip.0),
                (QuantityName::DetectDelay, run.truth.detect_delay.as_secs_f64()),
                (QuantityName::OffConductance, run.truth.off_conductance(Volts(2.0), Volts(5.8)).0),
            ];
            for (name, truth) in truth {
                let (value, expanded) = run.measured(name).unwrap_or_else(|| panic!("{what}: no {name:?}"));
                assert!((value - truth).abs() <= 1.5 * expanded, "{what}: {name:?} {value}, not {truth}");
            }
            assert!(run.measured(QuantityName::DeepCurrent).is_some(), "{what}");
            let never = [QuantityName::ReEnable, QuantityName::Hysteresis, QuantityName::ReleaseDelay];
            assert!(never.iter().all(|name| run.measured(*name).is_none()), "{what}");
            assert_eq!(from_ramps(&run.trace, &profile).len(), usize::from(rates.is_some()), "{what}");
        }
    }
}

#[test]
fn what_a_latched_board_does_wrong_is_found_as_on_any_other() {
    let profile = profile();
    for seed in 0..10 {
        let what = format!("seed {seed}");
        let mut deep = Setup::new(&profile, Condition::Latched, seed);
        let window = DeepConduction { from: Volts(0.55), to: Volts(0.85), peak: Amps(20e-3) };
        deep.board.deep_conduction = Some(window);
        let run = run_setup(&profile, &deep);
        assert_eq!(
            (run.verdict.outcome, codes(&run)[0]),
            (Outcome::Fail, FindingCode::ConductsWhenDeep),
            "{what}: {:?}",
            run.verdict.findings
        );

        let mut slow = Setup::new(&profile, Condition::Latched, seed);
        slow.board.detect_delay = Duration::from_millis(60);
        let run = run_setup(&profile, &slow);
        assert_safe(&run, &profile, &what);
        assert_eq!(run.verdict.outcome, Outcome::Fail, "{what}: {:#?}", run.verdict);

        let back = run_setup(&profile, &Setup::new(&profile, Condition::Good, seed));
        assert_safe(&back, &profile, &what);
        assert_eq!(
            (back.verdict.outcome, codes(&back)[0]),
            (Outcome::Fail, FindingCode::NotLatched),
            "{what}"
        );
    }
}

/// A supply that cannot sink leaves the board alive for a while; it forgets only once that is over.
#[test]
fn a_latched_board_behind_a_supply_that_cannot_sink_is_measured_too() {
    let profile = profile();
    for seed in 0..5 {
        let mut setup = Setup::new(&profile, Condition::NoSink, seed);
        setup.board.latches = true;
        let run = run_setup(&profile, &setup);
        let what = format!("seed {seed}");
        assert_safe(&run, &profile, &what);
        assert!(run.measured(QuantityName::DetectDelay).is_some(), "{what}: {:?}", run.verdict.findings);
    }
}
