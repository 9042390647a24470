//! Laws that hold for every simulated board: Ohm's, hysteresis, delays, and the same from the same seed.

use super::{armed, quiet, read, wait};
use ebbmark::sim::{DeepConduction, Setup, World};
use ebbmark::trace::Current;
use ebbmark::units::{Amps, Farads, Volts};
use std::time::Duration;

const SEEDS: std::ops::Range<u64> = 0..60;

/// A quiet board behind a supply that arrives at once.
fn prompt(seed: u64) -> Setup {
    let mut setup = quiet(seed);
    setup.supply.time_constant = Duration::from_micros(1);
    setup.supply.slew = 1e9;
    setup
}

/// Set-points that put this voltage at the terminals of a board that is on.
fn set_for(setup: &Setup, terminals: Volts) -> Volts {
    let series = setup.wiring.lead_resistance.0 + setup.ammeter.ranges[5].burden.0;
    Volts(terminals.0 * (1.0 + series / setup.board.load.0))
}

#[test]
fn current_times_resistance_is_voltage_all_around_the_loop() {
    for seed in SEEDS {
        let setup = quiet(seed);
        let mut world = armed(&setup);
        for volts in [7.6, 7.0, 6.5] {
            world.set_volts(Volts(volts));
            wait(&mut world, 200);
            let (sense, current, load) = read(&mut world);
            let series = setup.wiring.lead_resistance.0 + setup.ammeter.ranges[5].burden.0;
            assert!(
                (volts - sense - current * series).abs() < 1e-6,
                "seed {seed}, {volts} V: leads and ammeter"
            );
            let through = load / setup.board.load.0;
            assert!(
                (sense - load - through * setup.board.on_resistance.0).abs() < 1e-6,
                "seed {seed}: switch"
            );
            let voltmeters = sense * setup.voltmeter.input_conductance().0
                + load * setup.load_voltmeter.input_conductance().0;
            assert!(
                (current - through - voltmeters - sense * setup.board.divider.0).abs() < 2e-6,
                "seed {seed}: {current} A in, {through} A through the load"
            );
        }
        world.set_volts(Volts(5.5));
        wait(&mut world, 200);
        world.set_range(Amps(100e-6));
        wait(&mut world, 200);
        let (sense, current, _) = read(&mut world);
        let board = &setup.board;
        let sum = sense / board.pull_up.0
            + sense * board.divider.0
            + board.detector_current.0
            + board.leakage.0
            + sense * board.leakage_conductance.0
            + sense * setup.voltmeter.input_conductance().0;
        assert!((current - sum).abs() < 2e-9, "seed {seed}: {current} A read, {sum} A by parts");
    }
}

#[test]
fn inside_the_hysteresis_a_board_keeps_the_state_it_came_with() {
    for seed in SEEDS {
        let setup = quiet(seed);
        let middle = setup.board.trip + setup.board.hysteresis * 0.5;
        let mut world = armed(&setup);
        world.set_volts(middle);
        wait(&mut world, 5000);
        assert!(world.board_on(), "seed {seed}: came from above");
        world.set_volts(setup.board.trip - Volts(0.3));
        wait(&mut world, 500);
        assert!(!world.board_on(), "seed {seed}: was below the trip");
        world.set_volts(middle);
        wait(&mut world, 5000);
        assert!(!world.board_on(), "seed {seed}: came from below");
    }
}

#[test]
fn a_threshold_that_is_never_crossed_never_changes_the_state() {
    for seed in SEEDS {
        let setup = quiet(seed);
        let mut world = armed(&setup);
        let lowest = set_for(&setup, setup.board.trip) + Volts(0.001);
        let span = 7.6 - lowest.0;
        for step in 0..300_u32 {
            // Multiples of the golden ratio fill the span evenly and never repeat.
            let share = (f64::from(step) * 0.618_033_988_75).fract();
            world.set_volts(lowest + Volts(span * share));
            wait(&mut world, 1 + u64::from(step % 37));
            assert!(world.board_on(), "seed {seed}: tripped at step {step}, {}", world.volts());
        }
    }
}

#[test]
fn a_dip_trips_the_board_only_if_it_outlasts_the_detect_delay() {
    for seed in SEEDS {
        for (share, trips) in [(0.9, false), (1.1, true)] {
            let setup = prompt(seed);
            let mut world = armed(&setup);
            world.set_volts(setup.board.trip - Volts(0.05));
            world.advance_to(world.now() + setup.board.detect_delay.mul_f64(share));
            assert_eq!(world.board_on(), !trips, "seed {seed}, at {share} of the delay");
            world.set_volts(Volts(7.6));
            wait(&mut world, 1);
            assert_eq!(world.board_on(), !trips, "seed {seed}, after {share} of the delay");
        }
    }
}

#[test]
fn a_board_comes_back_only_after_the_release_delay() {
    for seed in SEEDS {
        let setup = prompt(seed);
        let mut world = World::new(&setup);
        world.set_volts(Volts(7.6));
        world.set_output(true);
        let almost = setup.board.release_delay.mul_f64(0.99);
        world.advance_to(almost);
        assert!(!world.board_on(), "seed {seed}");
        world.advance_to(setup.board.release_delay.mul_f64(1.01));
        assert!(world.board_on(), "seed {seed}");
    }
}

#[test]
fn one_long_jump_and_many_short_ones_end_in_the_same_place() {
    for seed in SEEDS {
        let setup = quiet(seed);
        let mean = |jump: Duration| {
            let mut world = armed(&setup);
            let mark = world.mark();
            let end = world.now() + Duration::from_millis(300);
            world.set_volts(Volts(5.6));
            while world.now() < end {
                world.advance_to(end.min(world.now() + jump));
            }
            (world.read_sense(&mark).0, world.read_current(&mark).amps().expect("in range").0)
        };
        let (volts, amps) = mean(Duration::from_secs(1));
        let (pieced_volts, pieced_amps) = mean(Duration::from_micros(137));
        assert!((volts - pieced_volts).abs() < 1e-8, "seed {seed}: {volts} V and {pieced_volts} V");
        assert!((amps - pieced_amps).abs() < 1e-8, "seed {seed}: {amps} A and {pieced_amps} A");
    }
}

#[test]
fn on_the_microamp_range_the_burden_starves_a_board_that_is_on() {
    for seed in SEEDS {
        let mut world = armed(&quiet(seed));
        let mark = world.mark();
        world.set_range(Amps(100e-6));
        wait(&mut world, 1);
        assert_eq!(world.read_current(&mark), Current::OVERLOAD, "seed {seed}");
        let mark = world.mark();
        assert!(world.read_sense(&mark) < Volts(4.0), "seed {seed}: the terminals collapse");
        let trips = (0..10).any(|_| {
            wait(&mut world, 1);
            !world.board_on()
        });
        assert!(trips, "seed {seed}: and the board trips");
    }
}

#[test]
fn a_load_capacitor_too_large_for_the_current_limit_keeps_the_board_from_coming_back() {
    let starts = |microfarads: f64| {
        let mut setup = prompt(1);
        setup.board.detect_delay = Duration::from_micros(300);
        setup.board.release_delay = Duration::from_millis(100);
        setup.board.load_capacitance = Farads(microfarads * 1e-6);
        let mut world = World::new(&setup);
        world.set_current_limit(Amps(1.0));
        world.set_volts(Volts(7.0));
        world.set_output(true);
        wait(&mut world, 2000);
        // C V / I: the limited supply needs 7 µs for every microfarad.
        (0..300).all(|_| {
            wait(&mut world, 1);
            world.board_on()
        })
    };
    assert!(starts(30.0), "charged in 0.2 ms, within the detect delay");
    assert!(!starts(100.0), "needs 0.7 ms: the dip outlasts the detect delay and the board hiccups for ever");
}

#[test]
fn behind_the_open_switch_the_load_s_capacitor_empties_through_the_load() {
    for seed in SEEDS {
        let mut setup = prompt(seed);
        setup.board.detect_delay = Duration::from_millis(5);
        setup.board.load_capacitance = Farads(1e-3);
        let mut world = armed(&setup);
        world.set_volts(Volts(5.0));
        world.advance_to(world.now() + Duration::from_micros(5100));
        assert!(!world.board_on(), "seed {seed}");
        let at_once = world.mark();
        let start = world.read_load(&at_once).0;
        wait(&mut world, 20);
        let mean = world.read_load(&at_once).0;
        let end = world.mark();
        let end = world.read_load(&end).0;
        let time_constant = setup.board.load.0 * 1e-3;
        assert!(
            (end - start * (-0.020 / time_constant).exp()).abs() < 1e-3,
            "seed {seed}: {start} V to {end} V"
        );
        let expected = (start - end) * time_constant / 0.020;
        assert!((mean - expected).abs() < 1e-3, "seed {seed}: {mean} V on average, {expected} V expected");
    }
}

#[test]
fn a_board_with_deep_conduction_draws_its_peak_below_the_operating_voltage() {
    let mut setup = quiet(3);
    setup.board.deep_conduction = Some(DeepConduction { from: Volts(0.4), to: Volts(0.7), peak: Amps(0.02) });
    let mut world = armed(&setup);
    for (volts, expected) in [(1.2, 0.0), (0.55, 0.02), (0.2, 0.0)] {
        world.set_volts(Volts(volts));
        wait(&mut world, 500);
        let (_, current, _) = read(&mut world);
        assert!((current - expected).abs() < 0.7e-3, "at {volts} V: {current} A");
    }
}

/// At 5.8 V through the 100 ohm of a small range 50 mA could flow at the window, more than its 20 mA: the voltage does not
/// stay there, and the board draws what it draws without a window.
#[test]
fn deep_conduction_does_not_hold_a_high_voltage_down_behind_a_burden() {
    let mut setup = quiet(3);
    let without = setup.clone();
    setup.board.deep_conduction =
        Some(DeepConduction { from: Volts(0.55), to: Volts(0.85), peak: Amps(0.02) });
    let [with, without] = [setup, without].map(|setup| {
        let mut world = armed(&setup);
        world.set_volts(Volts(5.8));
        wait(&mut world, 500);
        world.set_range(Amps(1e-4));
        wait(&mut world, 500);
        read(&mut world)
    });
    assert!((with.0 - without.0).abs() < 1e-3 && (with.1 - without.1).abs() < 1e-8, "{with:?} {without:?}");
    assert!(with.0 > 5.7, "{with:?}");
}

#[test]
fn the_same_seed_gives_the_same_readings_and_another_seed_others() {
    let readings = |seed: u64| {
        let mut world = armed(&Setup::new(&super::river_node(), ebbmark::sim::Condition::Good, seed));
        (0..50).map(|_| read(&mut world)).map(|(v, i, l)| [v, i, l].map(f64::to_bits)).collect::<Vec<_>>()
    };
    for seed in SEEDS {
        assert_eq!(readings(seed), readings(seed), "seed {seed}");
        assert_ne!(readings(seed), readings(seed + 1), "seed {seed}");
    }
}
