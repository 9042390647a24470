//! Whole runs in search mode: how many set-points they take against the least there can be, and that odd boards are found.
#![expect(clippy::expect_used, reason = "a profile without limits stops the test")]
#![expect(clippy::print_stdout, reason = "the ratios are worth a look even when they hold")]

#[path = "../bench/optimum.rs"]
mod optimum;
#[path = "../bench/probe_cost.rs"]
mod probe_cost;
#[path = "../bench/tally.rs"]
mod tally;

use crate::river;
use ebbmark::analysis::{FindingCode, analyse};
use ebbmark::bench::{VirtualBench, drive, run_ready};
use ebbmark::procedure::{Plan, Prior, Procedure, Spread};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::{Condition, Setup};
use ebbmark::trace::Trace;
use ebbmark::units::Volts;
use ebbmark::verdict::{Outcome, Verdict, judge};
use optimum::optimum;
use probe_cost::probe_cost;
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::time::Duration;
use tally::Tally;

/// A good board whose thresholds lie anywhere in their limits, apart from each other.
fn anywhere_in_the_limits(profile: &Profile, seed: u64) -> Setup {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    let mut setup = Setup::new(profile, Condition::Good, seed);
    let mut draw = |name| {
        let limit = profile.limits[&name];
        rng.random_range(limit.min.expect("a minimum")..limit.max.expect("a maximum"))
    };
    let (trip, re_enable) = (draw(QuantityName::Trip), draw(QuantityName::ReEnable));
    (setup.board.trip, setup.board.hysteresis) = (Volts(trip), Volts(re_enable - trip));
    setup
}

struct Run {
    tally: Tally,
    trace: Trace,
    verdict: Verdict,
}

fn run(profile: &Profile, setup: &Setup, prior: Prior) -> Run {
    let mut bench = VirtualBench::new(setup, setup.ability());
    let plan = Plan::new(profile, &setup.ability()).with_prior(prior);
    let mut tally = Tally::default();
    let driven = drive(Procedure::new(plan), &mut bench, setup.claims(), &mut tally, std::future::pending());
    let trace = run_ready(driven);
    let verdict = judge(&analyse(&trace, profile), profile, &trace.ending);
    Run { tally, trace, verdict }
}

fn measured(run: &Run, name: QuantityName) -> (f64, f64) {
    let judged = run.verdict.judged.iter().find(|judged| judged.quantity.name == name);
    let judged = judged.unwrap_or_else(|| panic!("no {}: {:#?}", name.key(), run.verdict.findings));
    (judged.quantity.value, judged.expanded_uncertainty())
}

#[test]
fn a_run_takes_hardly_more_set_points_than_the_least_there_can_be() {
    const SEEDS: u64 = 400;
    let profile = river::profile();
    let (mut narrowing, mut confirmed, mut seconds) = (0.0, 0.0, 0.0);
    for seed in 0..SEEDS {
        let tally = run(&profile, &anywhere_in_the_limits(&profile, seed), Prior::default()).tally;
        narrowing += f64::from(tally.narrowing) / SEEDS as f64;
        confirmed += f64::from(tally.narrowing + tally.confirming) / SEEDS as f64;
        seconds += tally.narrowing_s / SEEDS as f64;
    }
    let (down, up) = probe_cost(&anywhere_in_the_limits(&profile, 0).ability(), &profile);
    // 240 mV and 320 mV in cells of 2 mV.
    let least = optimum(120, 160, down, up);
    println!(
        "{narrowing:.2} set-points to narrow, {confirmed:.2} with confirmation, {:.2} at least: {:.3}, {:.3}; {seconds:.3} s, \
         {:.3} s at least: {:.3}",
        least.probes,
        narrowing / least.probes,
        confirmed / least.probes,
        least.cost,
        seconds / least.cost
    );
    assert!(narrowing / least.probes < 1.03 && seconds / least.cost < 1.03);
    assert!(confirmed / least.probes < 1.15);
}

#[test]
fn earlier_boards_save_set_points_and_a_board_unlike_them_is_measured_as_well() {
    let profile = river::profile();
    let spread = |mean| Some(Spread { mean: Volts(mean), deviation: Volts(0.01) });
    let earlier = Prior { trip: spread(6.0), re_enable: spread(6.4) };
    let (mut with, mut without) = (0, 0);
    let mut outside: [Vec<u64>; 2] = [Vec::new(), Vec::new()];
    for seed in 0..100 {
        let mut setup = Setup::new(&profile, Condition::Good, seed);
        let mut rng = ChaCha8Rng::seed_from_u64(seed);
        (setup.board.trip, setup.board.hysteresis) =
            (Volts(rng.random_range(5.985..6.015)), Volts(rng.random_range(0.39..0.41)));
        with += run(&profile, &setup, earlier).tally.narrowing;
        without += run(&profile, &setup, Prior::default()).tally.narrowing;

        let unlike = anywhere_in_the_limits(&profile, seed);
        let run = run(&profile, &unlike, earlier);
        let truths =
            [(QuantityName::Trip, unlike.board.trip.0), (QuantityName::ReEnable, unlike.board.re_enable().0)];
        for ((name, truth), outside) in truths.into_iter().zip(&mut outside) {
            let (found, uncertainty) = measured(&run, name);
            let times = (found - truth).abs() / uncertainty;
            assert!(times <= 2.0, "seed {seed}: {} {found} ± {uncertainty}, in truth {truth}", name.key());
            outside.extend((times > 1.0).then_some(seed));
        }
    }
    // Of 100 values that U covers with 95 %, more than 12 lie outside once in seven hundred times (binomial law).
    assert!(outside.iter().all(|seeds| seeds.len() <= 12), "outside at seeds {outside:?}");
    println!("{with} set-points with earlier boards known, {without} without");
    assert!(with * 4 < without * 3, "{with} set-points with earlier boards known, {without} without");
}

#[test]
fn a_supply_that_overshoots_does_not_bring_the_board_back_too_early() {
    let profile = river::profile();
    let mut covered = 0;
    for seed in 0..100 {
        let mut setup = anywhere_in_the_limits(&profile, seed);
        setup.supply.overshoot = 0.05;
        setup.supply.time_constant = Duration::from_millis(3);
        // Quick enough to follow every overshoot.
        setup.board.release_delay = Duration::from_micros(20);
        let run = run(&profile, &setup, Prior::default());
        let (re_enable, uncertainty) = measured(&run, QuantityName::ReEnable);
        covered += u32::from((re_enable - setup.board.re_enable().0).abs() <= uncertainty);
    }
    assert!(covered >= 95, "{covered} of 100");
}

#[test]
fn what_never_happens_is_looked_for_to_the_ends_of_the_range() {
    let profile = river::profile();
    let mut latched = Setup::new(&profile, Condition::Good, 4);
    latched.board.hysteresis = Volts(9.0);
    // A detector comes up off: such a board is never on.
    let run_of = |setup: &Setup| run(&profile, setup, Prior::default());
    assert_eq!(run_of(&latched).verdict.outcome, Outcome::Fail);
    let stuck = run_of(&Setup::new(&profile, Condition::NeverTrips, 4));
    let lowest = stuck.trace.samples.iter().skip(5).map(|sample| sample.set.0).filter(|set| *set > 2.0);
    let lowest = lowest.fold(f64::INFINITY, f64::min);
    assert!((lowest - profile.supply.floor.0).abs() < 1e-6, "{lowest} V");
    let first = stuck.verdict.findings.first().map(|finding| finding.code);
    assert_eq!(first, Some(FindingCode::NeverTrips));
}

#[test]
fn trips_far_outside_their_limits_are_found_wherever_they_lie() {
    let profile = river::profile();
    for (trip, hysteresis) in [(5.25, 0.4), (5.5, 1.9), (6.9, 0.3), (7.2, 0.2), (5.21, 2.3)] {
        let mut setup = Setup::new(&profile, Condition::Good, 7);
        (setup.board.trip, setup.board.hysteresis) = (Volts(trip), Volts(hysteresis));
        let run = run(&profile, &setup, Prior::default());
        // U leaves one in twenty outside; none twice as far.
        let (found, uncertainty) = measured(&run, QuantityName::Trip);
        assert!((found - trip).abs() <= 2.0 * uncertainty, "{trip} {hysteresis}: {found}");
        let (found, uncertainty) = measured(&run, QuantityName::ReEnable);
        assert!((found - trip - hysteresis).abs() <= 2.0 * uncertainty, "{trip} {hysteresis}: {found}");
    }
}
