//! Estimates against what the simulated boards really are, over seeds.

use super::{Boards, QUESTION, plan};
use crate::river;
use ebbmark::profile::QuantityName;
use ebbmark::study::{Estimates, Jitter, Plan};
use ebbmark::units::{Celsius, Volts};
use std::time::Duration;

/// A k = 2 interval covers about 95 % (JCGM 100:2008, 6.3.3); of the few tens looked at here some may miss.
const LEAST: f64 = 0.88;

/// Counts hits and misses, and names the seeds of the misses.
#[derive(Default)]
struct Tally {
    looked: usize,
    missed: Vec<String>,
}

impl Tally {
    fn look(&mut self, what: &str, seed: u64, found: f64, truth: f64, uncertainty: f64) {
        self.looked += 1;
        if (found - truth).abs() > uncertainty {
            self.missed.push(format!("seed {seed}, {what}: {found} ± {uncertainty}, truth {truth}"));
        }
    }

    #[track_caller]
    fn enough(&self, looked: usize) {
        let share = 1.0 - self.missed.len() as f64 / self.looked as f64;
        assert!(
            share >= LEAST && self.looked == looked,
            "{share} of {}:\n{}",
            self.looked,
            self.missed.join("\n")
        );
    }
}

#[test]
fn thresholds_and_jitter_lie_inside_their_intervals() {
    const SEEDS: u64 = 30;
    const JITTER: f64 = 3e-3;
    let (profile, plan) = (river::profile(), plan(20));
    let (mut means, mut jitters, mut drifting) = (Tally::default(), Tally::default(), 0);
    for seed in 0..SEEDS {
        let boards = Boards { jitter: Volts(JITTER), ..Boards::still(seed) };
        let setup = boards.setup(&profile, &plan, plan.orders().next().expect("an order"));
        let estimates = Estimates::of(&plan, &boards.study(&profile, &plan), QUESTION);
        for cell in &estimates.cells {
            let truth = match cell.quantity {
                QuantityName::Trip => setup.board.trip,
                _ => setup.board.re_enable(),
            };
            let threshold = &cell.threshold;
            assert_eq!((threshold.count, threshold.missing), (20, 0), "seed {seed}");
            let uncertainty = 2.0 * threshold.standard_uncertainty_v();
            means.look(cell.quantity.key(), seed, threshold.mean_v, truth.0, uncertainty);
            let Jitter::Found { low_v: Some(low), high_v: Some(high), .. } = threshold.jitter else {
                panic!("seed {seed}: {:?}", threshold.jitter);
            };
            jitters.look("jitter", seed, 0.5 * (low + high), JITTER, 0.5 * (high - low));
            drifting += usize::from(cell.drift.expect("twenty cycles").significant);
        }
    }
    means.enough(2 * SEEDS as usize);
    jitters.enough(2 * SEEDS as usize);
    // One in twenty at 95 %, and both thresholds of a board together.
    assert!(drifting <= 10, "{drifting} of {} cells drift, and none does in truth", 2 * SEEDS);
}

/// Simulated thresholds fall by 100 ppm of their value at 25 degC for each kelvin.
#[test]
fn the_temperature_coefficient_lies_inside_its_interval() {
    const SEEDS: u64 = 20;
    let profile = river::profile();
    let plan = Plan { temperatures: [-20.0, 25.0, 60.0].map(|t| Some(Celsius(t))).to_vec(), ..plan(6) };
    let mut tally = Tally::default();
    for seed in 0..SEEDS {
        let boards = Boards { jitter: Volts(2e-3), ..Boards::still(seed) };
        let estimates = Estimates::of(&plan, &boards.study(&profile, &plan), QUESTION);
        for line in estimates.temperature.iter().filter(|line| line.quantity != QuantityName::Hysteresis) {
            let found = &line.coefficient;
            let uncertainty = found.expanded_uncertainty_per_k;
            tally.look(line.quantity.key(), seed, found.relative_per_k, -100e-6, uncertainty);
            assert!(uncertainty < 20e-6, "seed {seed}: {found:?}");
        }
    }
    tally.enough(2 * SEEDS as usize);
}

#[test]
fn delays_and_thresholds_at_rest_come_from_the_slope_over_the_rate() {
    const SEEDS: u64 = 8;
    let profile = river::profile();
    let plan = Plan { rates: vec![Some(0.05), Some(0.2), Some(0.5)], ..plan(4) };
    let mut tally = Tally::default();
    for seed in 0..SEEDS {
        let boards = Boards {
            jitter: Volts(2e-3),
            change: |setup| {
                setup.board.detect_delay = Duration::from_millis(150);
                setup.board.release_delay = Duration::from_millis(220);
            },
            ..Boards::still(seed)
        };
        let setup = boards.setup(&profile, &plan, plan.orders().next().expect("an order"));
        let estimates = Estimates::of(&plan, &boards.study(&profile, &plan), QUESTION);
        for (quantity, volts, seconds) in [
            (QuantityName::Trip, setup.board.trip, 0.150),
            (QuantityName::ReEnable, setup.board.re_enable(), 0.220),
        ] {
            let found = estimates.at_rest.iter().find(|it| it.quantity == quantity).expect("found");
            let uncertainty = 2.0 * found.statistical_v.hypot(found.instrument_v.unwrap_or(0.0));
            tally.look(quantity.key(), seed, found.value_v, volts.0, uncertainty);
            let delay = found.delay.expect("three rates");
            tally.look("delay", seed, delay.delay_s, seconds, delay.expanded_uncertainty_s);
            assert!(delay.expanded_uncertainty_s < 0.1, "seed {seed}: {delay:?}");
        }
    }
    tally.enough(4 * SEEDS as usize);
}

/// A board whose threshold falls by 1 mV a cycle, and one that stays: the line over the cycles tells them apart.
#[test]
fn a_board_that_wanders_is_told_from_one_that_stays() {
    let (profile, plan) = (river::profile(), plan(12));
    for seed in 0..6 {
        let boards = Boards { jitter: Volts(1e-3), ..Boards::still(seed) };
        let still = boards.study(&profile, &plan);
        let wandering: Vec<_> = plan
            .orders()
            .map(|order| {
                let mut boards = boards;
                boards.jitter = Volts::ZERO;
                let mut falling = plan.clone();
                falling.cycles = 1;
                // The same board some temperature higher: 100 ppm of 6 V are 0.6 mV a kelvin.
                falling.temperatures = vec![Some(Celsius(25.0 + f64::from(order.cycle) / 0.6))];
                let (cycle, ..) = boards.cycle(&profile, &falling, &[], order, ebbmark::sim::Faults::none());
                cycle
            })
            .collect();
        let drift = |cycles: &[_]| {
            let estimates = Estimates::of(&plan, cycles, QUESTION);
            estimates.cells[0].drift.expect("twelve cycles")
        };
        let (stays, wanders) = (drift(&still), drift(&wandering));
        assert!(wanders.significant, "seed {seed}: {wanders:?}");
        assert!(
            (wanders.first_to_last_v + 0.011).abs() <= wanders.expanded_uncertainty_v,
            "seed {seed}: {wanders:?}"
        );
        assert!(stays.first_to_last_v.abs() < 5e-3, "seed {seed}: {stays:?}");
    }
}
