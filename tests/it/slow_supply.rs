//! A supply whose far steps take longer, as its definition states for each volt: a run waits for them and for no more.

use crate::river;
use crate::virtual_run::{Run, run_able, run_setup};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::{Condition, Setup};
use ebbmark::trace::{OutputState, Slew, Stop};
use ebbmark::units::Volts;
use ebbmark::verdict::Outcome;
use std::time::Duration;

/// A good board behind a supply that goes so many volts a second.
fn behind(profile: &Profile, slew: f64, seed: u64) -> Setup {
    let mut setup = Setup::new(profile, Condition::Good, seed);
    setup.supply.slew = slew;
    setup
}

fn time(run: &Run) -> f64 {
    run.trace.samples.last().map_or(0.0, |sample| sample.at.as_secs_f64())
}

#[test]
fn boards_pass_behind_a_slow_supply_and_what_is_stated_is_true() {
    let thresholds = [QuantityName::Trip, QuantityName::ReEnable];
    let all = [thresholds, [QuantityName::DetectDelay, QuantityName::ReleaseDelay]].concat();
    // At 2 V/s a step across a threshold takes longer than any delay worth its name.
    let benches: [(f64, &[QuantityName]); 3] = [(200.0, &all), (20.0, &all), (2.0, &thresholds)];
    let mut profile = river::profile();
    for seed in 0..40 {
        for (slew, names) in benches {
            let delays = names.len() > thresholds.len();
            (profile.measure.detect_delay, profile.measure.release_delay) = (delays, delays);
            let run = run_setup(&profile, &behind(&profile, slew, seed));
            let what = format!("{slew} V/s, seed {seed}");
            let ending = (&run.trace.ending.stop, run.trace.ending.output);
            assert_eq!(ending, (&Stop::Completed, OutputState::Off), "{what}");
            assert_eq!(run.verdict.outcome, Outcome::Pass, "{what}: {:?}", run.verdict.findings);
            for name in names {
                let (value, expanded) = run.measured(*name).unwrap_or_else(|| panic!("{what}: no {name:?}"));
                let truth = run.true_value(*name, &profile).expect("known");
                let inside = (value - truth).abs() <= 1.5 * expanded;
                assert!(inside, "{what}: {name:?} {value}, not {truth}, U {expanded}");
            }
        }
    }
}

/// By hand: to wait after every step as long as after the farthest, 7.3 V, takes 3.65 s a step at 2 V/s.
#[test]
fn the_wait_goes_with_the_distance() {
    let profile = river::profile();
    let setup = behind(&profile, 2.0, 1);
    let by_distance = run_setup(&profile, &setup);
    let mut ability = setup.ability();
    let per_volt = Duration::from_millis(500);
    assert_eq!(ability.slew, Slew { up: per_volt, down: per_volt });
    ability.settle += ability.slew.time(profile.supply.start, Volts(0.3));
    ability.slew = Slew::default();
    let always = run_able(&profile, &setup, ability);
    assert!(time(&always) > 5.0 * time(&by_distance), "{} s and {} s", time(&by_distance), time(&always));
}
