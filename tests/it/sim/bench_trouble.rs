//! What the conditions of a bench do to the relay node's board on it, held against the sums beside them.

use super::{read, silenced, wait};
use crate::relay;
use ebbmark::sim::{Condition, Setup, World};
use ebbmark::trace::Current;
use ebbmark::units::{Amps, Volts};
use std::time::Duration;

fn under(condition: Condition, seed: u64) -> Setup {
    silenced(relay::in_order(seed).under(&[condition], &relay::profile(&[])))
}

fn up(setup: &Setup, volts: f64) -> World {
    let mut world = World::new(setup);
    world.set_current_limit(Amps(1.0));
    world.set_volts(Volts(volts));
    world.set_output(true);
    wait(&mut world, 500);
    world
}

fn to(world: &mut World, volts: f64) {
    world.set_volts(Volts(volts));
    wait(world, 300);
}

/// The highest voltage at which the board is off on the way down and the lowest at which it is on on the way up, in
/// steps of 2 mV.
fn thresholds(setup: &Setup) -> (f64, f64) {
    let mut world = up(setup, 3.8);
    let find = |world: &mut World, from: i32, step: i32, on: bool| {
        let mut millivolts = from;
        while world.board_on() != on {
            millivolts += step;
            to(world, f64::from(millivolts) / 1e3);
        }
        f64::from(millivolts) / 1e3
    };
    let trip = find(&mut world, 3200, -2, false);
    to(&mut world, 2.8);
    (trip, find(&mut world, 2900, 2, true))
}

/// 20 mV x the square root of two is 28.3 mV, at each edge; the drop of 0.12 Ω x 0.3 A lies between set-point and trip.
#[test]
fn hum_moves_both_thresholds_inwards() {
    let (trip, re_enable) = thresholds(&under(Condition::MainsRipple, 1));
    assert!((trip - 0.0363 - 3.0282).abs() < 3e-3, "{trip} V");
    assert!((re_enable - 3.1217).abs() < 3e-3, "{re_enable} V");
    let mut world = up(&under(Condition::MainsRipple, 1), 3.8);
    let over = |world: &mut World, micros| {
        let mark = world.mark();
        world.advance_to(world.now() + Duration::from_micros(micros));
        world.read_sense(&mark).0
    };
    let spread = |readings: &[f64]| {
        readings.iter().fold(f64::MIN, |a, b| a.max(*b)) - readings.iter().fold(f64::MAX, |a, b| a.min(*b))
    };
    let whole: Vec<f64> = (0..20).map(|_| over(&mut world, 20_000)).collect();
    let short: Vec<f64> = (0..100).map(|_| over(&mut world, 1_300)).collect();
    assert!(spread(&whole) < 1e-5, "whole periods show nothing of it: {whole:?}");
    assert!(spread(&short) > 50e-3, "short readings show it: {}", spread(&short));
}

/// 5 mV a minute, which the supply's own reading does not show.
#[test]
fn a_drifting_supply_does_not_see_its_drift() {
    let mut world = up(&under(Condition::DriftingSupply, 1), 2.5);
    let both = |world: &mut World| {
        let mark = world.mark();
        wait(world, 20);
        (world.read_sense(&mark).0, world.read_supply(&mark).0.0)
    };
    let before = both(&mut world);
    for _ in 0..600 {
        wait(&mut world, 100);
    }
    let after = both(&mut world);
    assert!((after.0 - before.0 - 5e-3).abs() < 0.1e-3, "{before:?} {after:?}");
    assert!((after.1 - before.1).abs() < 1.1e-3, "{before:?} {after:?}");
    assert!(before.0 - before.1 > 40e-3, "it has drifted for ten minutes and more: {before:?}");
}

/// 5 V less a diode, through 100 Ω into the 100 Ω and 5 mA of a supply that is off: (4.3 V - V) / 100 Ω = V / 100 Ω +
/// 5 mA.
#[test]
fn another_source_lifts_the_board_while_the_output_is_off_and_flows_out_through_the_supply() {
    let mut world = World::new(&under(Condition::BackFeed, 1));
    wait(&mut world, 1000);
    let (sense, current, _) = read(&mut world);
    assert!((sense - 1.9).abs() < 5e-3 && (current + 24e-3).abs() < 0.2e-3, "{sense} V, {current} A");
    let mut world = up(&under(Condition::BackFeed, 1), 3.8);
    let (sense, current, _) = read(&mut world);
    // The load less what comes in.
    assert!((current - (sense / 10.06 - (4.3 - sense) / 100.0)).abs() < 1e-4, "{sense} V, {current} A");
}

#[test]
fn a_supply_that_cannot_sink_is_lifted_by_another_source() {
    let profile = relay::profile(&[]);
    // With its switch open, or the board would come back and pull it down again.
    let conditions = [Condition::BackFeed, Condition::NoSink, Condition::NeverOn];
    let mut world = up(&silenced(relay::in_order(1).under(&conditions, &profile)), 2.0);
    let (sense, ..) = read(&mut world);
    assert!(sense > 4.2, "{sense} V of 4.3 V");
}

#[test]
fn a_supply_gives_way_below_the_load_s_current_whatever_limit_is_set() {
    let mut setup = under(Condition::LowCurrentLimit, 1);
    assert!((setup.supply.gives_way.0 - 0.2).abs() < 1e-9);
    // A board that holds on shows the limit at rest.
    setup.board.switch = ebbmark::sim::Switch::StuckClosed;
    let mut world = up(&setup, 3.8);
    let (_, current, _) = read(&mut world);
    assert!(world.limited() && (current - 0.2).abs() < 1e-6, "{current} A");
    assert_eq!(world.current_limit(), Amps(1.0), "it says otherwise");
}

#[test]
fn what_a_limit_did_between_two_looks_is_not_forgotten() {
    let mut world = up(&under(Condition::LowCurrentLimit, 1), 3.8);
    world.take_was_limited();
    let mut seen = (0, 0);
    for _ in 0..20 {
        wait(&mut world, 110);
        seen.0 += u32::from(world.limited());
        seen.1 += u32::from(world.take_was_limited());
    }
    assert_eq!(seen.1, 20, "it hiccups ten times a second, caught at rest {} times", seen.0);
    assert!(seen.0 < 5, "{seen:?}");
}

#[test]
fn a_load_with_a_lockout_stops_first_and_leaves_its_voltage_standing() {
    let mut world = up(&under(Condition::LoadLockout, 1), 3.8);
    let (_, running, _) = read(&mut world);
    assert!(running > 0.3, "{running} A");
    to(&mut world, 3.05);
    let (sense, current, load) = read(&mut world);
    assert!(world.board_on() && current < 10e-6 && sense - load < 1e-3, "{sense} V, {load} V, {current} A");
    to(&mut world, 2.95);
    assert!(!world.board_on() && read(&mut world).2 < 1e-3);
    to(&mut world, 3.16);
    let (_, current, load) = read(&mut world);
    assert!(world.board_on() && current < 10e-6 && load > 3.1, "{load} V, {current} A");
}

/// 1.5 Ω more at 0.33 A.
#[test]
fn a_bad_contact_lowers_the_terminals_for_milliseconds_at_a_time() {
    for seed in 0..10 {
        let mut world = up(&under(Condition::IntermittentContact, seed), 3.8);
        let drops: Vec<f64> = (0..4000)
            .map(|_| {
                wait(&mut world, 1);
                let mark = world.mark();
                3.8 - world.read_sense(&mark).0
            })
            .collect();
        let bad = drops.iter().filter(|drop| **drop > 0.4).count();
        let good = drops.iter().filter(|drop| **drop < 0.05).count();
        assert!((50..1000).contains(&bad), "seed {seed}: bad for {bad} ms of 4 s");
        assert!(bad + good >= 3990, "seed {seed}: {bad} bad, {good} good");
        assert!(drops.iter().all(|drop| *drop < 0.56), "seed {seed}");
    }
}

#[test]
fn an_ammeter_in_trouble_reads_what_its_condition_says() {
    let current = |condition| {
        let mut world = up(&under(condition, 1), 3.8);
        world.set_range(Amps(1.0));
        wait(&mut world, 200);
        let mark = world.mark();
        wait(&mut world, 20);
        (world.read_current(&mark), world.range(), world.read_sense(&mark).0, world.board_on())
    };
    let (good, ..) = current(Condition::Good);
    let (reversed, ..) = current(Condition::MeterReversed);
    let amps = |current: Current| current.amps().expect("in range").0;
    assert!((amps(good) + amps(reversed)).abs() < 1e-6 && amps(good) > 0.3);
    let (blown, _, sense, _) = current(Condition::BlownFuse);
    assert_eq!(blown, Current::Value(Amps::ZERO));
    assert!(sense.abs() < 1e-3, "{sense} V");
    let smallest = |condition| {
        let mut world = World::new(&under(condition, 1));
        world.set_range(Amps(10e-6))
    };
    assert_eq!((smallest(Condition::Good), smallest(Condition::CoarseAmmeter)), (Amps(100e-6), Amps(10e-3)));
}

/// Behind the 100 Ω of its smallest range no board stays on, and what comes through is too much for the range.
#[test]
fn an_ammeter_whose_relay_hangs_says_that_it_does_not() {
    let mut world = up(&under(Condition::StuckRange, 1), 3.8);
    assert_eq!(world.set_range(Amps(1.0)), Amps(1.0));
    let readings: Vec<Current> = (0..20)
        .map(|_| {
            let mark = world.mark();
            wait(&mut world, 20);
            world.read_current(&mark)
        })
        .collect();
    assert!(readings.contains(&Current::OVERLOAD), "{readings:?}");
    assert!(readings.iter().any(|current| current.amps().is_some_and(|amps| amps.0 < 10e-6)), "{readings:?}");
}

#[test]
fn a_bench_left_on_has_its_board_in_either_state() {
    let mut on = 0;
    for seed in 0..40 {
        let mut world = World::new(&under(Condition::LeftOnInBand, seed));
        let board_on = world.board_on();
        wait(&mut world, 1000);
        assert!(world.output() && world.board_on() == board_on, "seed {seed}: it stays as it was");
        let (sense, ..) = read(&mut world);
        assert!((3.0..3.15).contains(&sense), "seed {seed}: {sense} V");
        on += u32::from(board_on);
    }
    assert!((10..30).contains(&on), "on in {on} of 40");
}

#[test]
fn an_open_sense_lead_moves_the_output_but_not_what_the_supply_keeps() {
    for seed in 0..10 {
        let share = |condition| {
            let setup = relay::in_order(seed).under(&[condition], &relay::profile(&[]));
            let mut world = up(&setup, 2.5);
            assert_eq!(world.volts(), Volts(2.5));
            read(&mut world).0 / 2.5 - 1.0
        };
        let (high, low) = (share(Condition::OpenSenseHigh), share(Condition::OpenSenseLow));
        assert!((high - 0.05).abs() < 3e-3, "seed {seed}: {high}");
        assert!((-0.16..-0.04).contains(&low), "seed {seed}: {low}");
    }
}

/// 10 MΩ at 2.8 V.
#[test]
fn a_voltmeter_that_nobody_states_adds_its_current() {
    let off = |condition| {
        let setup = under(condition, 1);
        let mut world = up(&setup, 2.8);
        let current = super::staircase::off_current(&mut world, &setup);
        (current, world.truth().off_current(Volts(2.8)).0)
    };
    let (good, stated) = (off(Condition::Good), off(Condition::UnstatedVoltmeter));
    assert!((stated.0 - good.0 - 0.28e-6).abs() < 1e-9, "{good:?} {stated:?}");
    assert!((stated.1 - good.1).abs() < 1e-15, "the board itself draws no more");
}
