//! Delays from ramps of several rates within one run: on virtual benches they hold the truth, and agree with the steps.

use crate::river;
use crate::virtual_run::{Run, assert_safe, run_setup};
use ebbmark::analysis::{FindingCode, RampFit, from_ramps};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::{Condition, Setup};
use ebbmark::units::Farads;
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::time::Duration;

const DELAYS: [(QuantityName, QuantityName); 2] =
    [(QuantityName::DetectDelay, QuantityName::Trip), (QuantityName::ReleaseDelay, QuantityName::ReEnable)];

/// Coverage factor of what is stated about ramps.
const K: f64 = 2.0;

fn profile(rates: u32) -> Profile {
    let mut profile = river::profile();
    (profile.measure.detect_delay, profile.measure.release_delay) = (true, true);
    profile.measure.ramp_rates = Some(rates);
    profile
}

fn fits(run: &Run, profile: &Profile) -> [RampFit; 2] {
    let fits = from_ramps(&run.trace, profile);
    fits.try_into().unwrap_or_else(|found| panic!("not one for each threshold: {found:?}"))
}

/// True threshold and delay.
fn truth(run: &Run, threshold: QuantityName) -> (f64, f64) {
    let truth = &run.truth;
    match threshold {
        QuantityName::Trip => (truth.trip.0, truth.detect_delay.as_secs_f64()),
        _ => (truth.re_enable.0, truth.release_delay.as_secs_f64()),
    }
}

/// Errors of threshold and delay as multiples of what is stated.
fn errors(run: &Run, fit: &RampFit) -> (f64, f64) {
    let (threshold, delay) = truth(run, fit.threshold);
    let fit = fit.at_rest;
    ((fit.value - threshold) / (K * fit.uncertainty), (fit.delay - delay) / (K * fit.delay_uncertainty))
}

fn codes(run: &Run) -> Vec<FindingCode> {
    run.verdict.findings.iter().map(|finding| finding.code).collect()
}

#[test]
fn good_boards_agree_with_the_steps_and_their_verdict_stays() {
    for rates in [3, 5] {
        let profile = profile(rates);
        for seed in 0..60 {
            let run = run_setup(&profile, &Setup::new(&profile, Condition::Good, seed));
            let what = format!("{rates} rates, seed {seed}");
            assert_safe(&run, &profile, &what);
            for fit in fits(&run, &profile) {
                assert!(fit.ramps >= 4 * rates as usize, "{what}: {fit:?}");
                let (threshold, delay) = errors(&run, &fit);
                assert!(
                    threshold.abs() <= 1.0 && delay.abs() <= 1.0,
                    "{what}: {threshold} {delay} U, {fit:?}"
                );
                // Steps of 42 ms in four phases; twice the slope's uncertainty of three points with 1 : 2 : 4.
                assert!(K * fit.at_rest.delay_uncertainty < 14e-3, "{what}: {fit:?}");
                assert!(
                    (-1.0..-0.5).contains(&(fit.at_rest.correlation() * towards(&fit))),
                    "{what}: {fit:?}"
                );
            }
            assert_eq!(codes(&run), [FindingCode::DelayFromRamps; 2], "{what}: {:?}", run.verdict.findings);
        }
    }
}

/// A trip that is taken too high makes the ramps seem to reach farther below it, a re-enable voltage less far above.
fn towards(fit: &RampFit) -> f64 {
    if fit.threshold == QuantityName::Trip { -1.0 } else { 1.0 }
}

/// Boards of all delays from 0.1 ms to 200 ms, as slow as a hold can tell, also far slower than their profile says, on benches with long leads, with a
/// a supply that cannot sink. What the ramps say holds, and so does whatever is stated: where a board
/// is so slow that the steps across its threshold begin beyond it, the two contradict each other and nothing is stated.
#[test]
fn any_delay_lies_inside_what_the_ramps_state() {
    let profile = profile(3);
    let conditions = [Condition::Good, Condition::Good, Condition::NoSink];
    let (mut fitted, mut stated, mut differ) = (0, 0, 0);
    for seed in 0..150 {
        let mut rng = ChaCha8Rng::seed_from_u64(seed);
        let mut setup = Setup::new(&profile, conditions[seed as usize % conditions.len()], seed);
        let mut delay = || Duration::from_secs_f64(10.0_f64.powf(rng.random_range(-4.0..-0.7)));
        (setup.board.detect_delay, setup.board.release_delay) = (delay(), delay());
        setup.board.load_capacitance = Farads(1e-6);
        let run = run_setup(&profile, &setup);
        let what = format!("seed {seed}: {:?} {:?}", setup.board.detect_delay, setup.board.release_delay);
        assert_safe(&run, &profile, &what);
        for fit in from_ramps(&run.trace, &profile) {
            fitted += 1;
            let (threshold, delay) = errors(&run, &fit);
            assert!(threshold.abs() <= 1.0 && delay.abs() <= 1.0, "{what}: {threshold} {delay} U, {fit:?}");
        }
        for (name, threshold) in DELAYS {
            let Some((value, expanded)) = run.measured(name) else { continue };
            stated += 1;
            let delay = truth(&run, threshold).1;
            assert!((value - delay).abs() <= expanded, "{what}: {name:?} {value} s, stated {expanded} s");
        }
        differ += codes(&run).iter().filter(|code| **code == FindingCode::DelaysDiffer).count();
    }
    assert!(fitted >= 290 && stated >= 280, "only {fitted} fitted and {stated} stated of 300");
    assert!(differ <= 15, "{differ} of 300 contradicted");
}
