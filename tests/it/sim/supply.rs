//! Laws of the simulated supply: settling, discharge, limits and protection.

use super::{armed, quiet, read, wait};
use ebbmark::sim::{Setup, World};
use ebbmark::units::{Amps, Ohms, Volts};
use std::time::Duration;

const SEEDS: std::ops::Range<u64> = 0..30;

fn sense(world: &mut World) -> f64 {
    let mark = world.mark();
    world.read_sense(&mark).0
}

/// A quiet bench whose supply cannot sink, with this bleed.
fn without_sink(seed: u64, bleed: Amps) -> Setup {
    let mut setup = quiet(seed);
    setup.supply.sinks = false;
    setup.supply.bleed = bleed;
    setup
}

#[test]
fn a_step_settles_with_the_supply_s_time_constant() {
    for seed in SEEDS {
        let mut world = armed(&quiet(seed));
        world.set_volts(Volts(5.5));
        wait(&mut world, 500);
        let from = sense(&mut world);
        world.set_volts(Volts(5.51));
        world.advance_to(world.now() + Duration::from_millis(3));
        let gone = (sense(&mut world) - from) / 0.010;
        assert!((gone - (1.0 - (-1.0_f64).exp())).abs() < 1e-3, "seed {seed}: {gone} of the step");
        wait(&mut world, 12);
        let left = 5.51 - sense(&mut world);
        assert!(left.abs() < 1e-3, "seed {seed}: {left} V left after 15 ms");
    }
}

#[test]
fn a_capacitor_falls_by_its_current_over_its_capacitance() {
    for seed in SEEDS {
        for bleed in [Amps(0.0), Amps(0.1e-3), Amps(5e-3)] {
            let setup = without_sink(seed, bleed);
            let mut world = armed(&setup);
            world.set_volts(Volts(5.8));
            wait(&mut world, 600_000);
            world.set_volts(Volts(0.5));
            let before = sense(&mut world);
            wait(&mut world, 100);
            let slope = (before - sense(&mut world)) / 0.1;
            let voltmeter = Amps(before * setup.voltmeter.input_conductance().0);
            let current = world.truth().off_current(Volts(before)) + voltmeter + bleed;
            let capacitance = setup.supply.output_capacitance.0 + setup.board.input_capacitance.0;
            let expected = current.0 / capacitance;
            assert!(
                (slope - expected).abs() < 0.01 * expected,
                "seed {seed}: {slope} V/s, {expected} V/s expected"
            );
        }
    }
}

#[test]
fn an_output_switched_off_empties_and_stays_empty() {
    for seed in SEEDS {
        let mut world = armed(&quiet(seed));
        world.set_output(false);
        wait(&mut world, 1000);
        let (volts, amps, _) = read(&mut world);
        assert!(volts.abs() < 0.1 && amps.abs() < 1e-6, "seed {seed}: {volts} V, {amps} A");
        wait(&mut world, 60_000);
        assert!(sense(&mut world).abs() < 1e-6, "seed {seed}");
    }
}

#[test]
fn a_current_limit_below_the_load_s_current_holds_current_and_voltage_down() {
    for seed in SEEDS {
        let setup = quiet(seed);
        let mut world = World::new(&setup);
        world.set_current_limit(Amps(0.02));
        world.set_volts(Volts(7.6));
        world.set_output(true);
        wait(&mut world, 2);
        let limited = (0..2000).any(|_| {
            wait(&mut world, 1);
            world.limited()
        });
        assert!(limited, "seed {seed}: the limit shows whenever the board tries to come on");

        let mut stuck = setup.clone();
        stuck.board.switch = ebbmark::sim::Switch::StuckClosed;
        let mut world = World::new(&stuck);
        world.set_current_limit(Amps(0.02));
        world.set_volts(Volts(7.6));
        world.set_output(true);
        wait(&mut world, 1000);
        let (volts, amps, _) = read(&mut world);
        let resistance = stuck.board.load.0 + stuck.board.on_resistance.0;
        assert!(world.limited() && (amps - 0.02).abs() < 1e-6, "seed {seed}: {amps} A");
        assert!((volts - 0.02 * resistance).abs() < 1e-3, "seed {seed}: {volts} V");
    }
}

#[test]
fn over_voltage_protection_switches_the_output_off_and_says_so() {
    let mut world = armed(&quiet(1));
    world.set_over_voltage(Volts(8.0));
    assert!(world.output());
    world.set_volts(Volts(8.5));
    wait(&mut world, 100);
    assert!(!world.output() && world.over_voltage_tripped());
    world.set_volts(Volts(7.6));
    world.set_output(true);
    wait(&mut world, 100);
    assert!(world.output() && !world.over_voltage_tripped());
}

#[test]
fn an_overshoot_peaks_at_its_share_of_the_step_and_comes_back() {
    let mut setup = quiet(1);
    setup.supply.overshoot = 0.05;
    let mut world = armed(&setup);
    world.set_volts(Volts(5.0));
    wait(&mut world, 500);
    world.set_volts(Volts(5.6));
    let mut highest: f64 = 0.0;
    for _ in 0..1000 {
        world.advance_to(world.now() + Duration::from_micros(100));
        highest = highest.max(sense(&mut world));
    }
    assert!((highest - 5.63).abs() < 1e-3, "{highest} V");
    assert!((sense(&mut world) - 5.6).abs() < 1e-5);
}

#[test]
fn a_set_point_is_kept_in_whole_steps_and_inside_the_supply_s_range() {
    let mut world = World::new(&quiet(1));
    for (set, kept) in [(6.000_4, 6.0), (6.000_6, 6.001), (-1.0, 0.0), (99.0, 32.0)] {
        world.set_volts(Volts(set));
        assert!((world.volts().0 - kept).abs() < 1e-12, "{set} V kept as {}", world.volts());
    }
}

#[test]
fn a_restart_leaves_the_output_off_and_the_settings_forgotten() {
    let mut world = armed(&quiet(1));
    world.restart_supply();
    assert!(!world.output());
    assert_eq!(world.volts(), Volts(0.0));
    assert_eq!(world.current_limit(), Amps(3.0));
}

#[test]
fn readings_stay_inside_what_the_makers_claim() {
    for seed in 0..200 {
        let setup = Setup::new(&super::river_node(), ebbmark::sim::Condition::Good, seed);
        let mut world = armed(&setup);
        let (sense, current, _) = read(&mut world);
        let claims = setup.claims();
        let truth = super::silenced(setup.clone());
        let mut exact = armed(&truth);
        // The exact bench shares the real one's set-point error, or the terminals would differ.
        let offset = setup.supply.gain_error * 7.6 + setup.supply.offset_error.0;
        exact.set_volts(Volts(7.6 + offset));
        wait(&mut exact, 1000);
        let (true_sense, true_current, _) = read(&mut exact);
        let noise = 5.0 * 3e-6 + 1e-3 / 2.0 * f64::from(u8::from(offset != 0.0));
        let volts = claims.sense.expect("there is a voltmeter");
        assert!(
            (sense - true_sense).abs() < volts.limit(sense) + noise,
            "seed {seed}: {sense} V, {true_sense} V"
        );
        let amps = claims.current.last().expect("there is an ammeter").accuracy;
        assert!((current - true_current).abs() < amps.limit(current) + 1e-4, "seed {seed}: {current} A");
        let set = claims.set.expect("there is a supply");
        assert!(offset.abs() <= set.limit(7.6), "seed {seed}: {offset} V");
    }
}

#[test]
fn the_drop_in_the_leads_is_their_resistance_times_the_current() {
    let mut setup = quiet(1);
    setup.wiring.lead_resistance = Ohms(0.9);
    let mut world = armed(&setup);
    let mark = world.mark();
    wait(&mut world, 20);
    let (volts, _) = world.read_supply(&mark);
    let current = world.read_current(&mark).amps().expect("in range");
    let drop = volts - world.read_sense(&mark) - setup.supply.read_back_voltage_error;
    assert!((drop.0 - current.0 * (0.9 + 0.1)).abs() < 1.1e-3, "{drop}");
}
