//! Noise at the detector: how often it changes a state, and what dwelling near a threshold does to its place.

use super::{armed, quiet, wait};
use ebbmark::sim::{Setup, World};
use ebbmark::units::Volts;
use std::time::Duration;

const DEVIATION: f64 = 1e-3;
const RATE: f64 = 1000.0;

/// A good board with noise of 1 mV, a thousand independent values a second, and hardly a delay.
fn noisy(seed: u64) -> Setup {
    let mut setup = quiet(seed);
    setup.board.noise = Volts(DEVIATION);
    setup.board.noise_rate = RATE;
    setup.board.detect_delay = Duration::from_micros(50);
    setup.supply.set_step = Volts(1e-6);
    setup
}

/// Holds the terminals `deviations` above the trip; true when the board trips within `millis`.
fn trips(setup: &Setup, deviations: f64, millis: u64) -> bool {
    let mut world = armed(setup);
    let series = setup.wiring.lead_resistance.0 + setup.ammeter.ranges[5].burden.0;
    let terminals = setup.board.trip.0 + deviations * DEVIATION;
    let load = setup.board.load.0 + setup.board.on_resistance.0;
    world.set_volts(Volts(terminals * (1.0 + series / load) + setup.board.detector_current.0 * series));
    wait(&mut world, millis);
    !world.board_on()
}

#[test]
fn noise_trips_as_often_as_its_tail_says() {
    // Three deviations out, one value in 741 crosses (tables of the normal distribution): in half a second at a
    // thousand a second, 1 - exp(-0.675) = 49 % of the boards trip.
    let boards = 600_u32;
    let tripped = (0..u64::from(boards)).filter(|seed| trips(&noisy(*seed), 3.0, 500)).count();
    let expected = 0.491 * f64::from(boards);
    let deviation = (expected * 0.509).sqrt();
    assert!(
        (tripped as f64 - expected).abs() < 4.0 * deviation,
        "{tripped} of {boards}, {expected} expected"
    );
}

#[test]
fn noise_does_not_reach_far() {
    for seed in 0..50 {
        assert!(!trips(&noisy(seed), 8.0, 600_000), "seed {seed}");
    }
}

#[test]
fn the_longer_the_dwell_the_earlier_the_trip() {
    let mean_trip = |dwell: u64| {
        let boards = 40;
        let sum: f64 = (0..boards)
            .map(|seed| {
                let setup = noisy(seed);
                let mut world = armed(&setup);
                let mut set = setup.board.trip + Volts(0.06);
                while world.board_on() {
                    set = set - Volts(1e-3);
                    world.set_volts(set);
                    wait(&mut world, dwell);
                }
                set.0 - setup.board.trip.0
            })
            .sum();
        sum / boards as f64
    };
    let (short, long) = (mean_trip(20), mean_trip(1000));
    assert!(long > short + 0.5e-3, "{short} V above the trip at 20 ms, {long} V at 1 s");
}

#[test]
fn noise_is_the_seed_s() {
    let settled = |seed| {
        let setup = noisy(seed);
        let mut world: World = armed(&setup);
        world.set_volts(setup.board.trip + Volts(0.02));
        let mut tripped_at = None;
        for millis in 0..2000 {
            wait(&mut world, 1);
            if !world.board_on() {
                tripped_at.get_or_insert(millis);
            }
        }
        tripped_at
    };
    for seed in 0..20 {
        assert_eq!(settled(seed), settled(seed), "seed {seed}");
    }
}
