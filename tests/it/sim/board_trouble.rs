//! What the conditions of a board do to the relay node's board, held against the sums beside them.

use super::{read, silenced, wait};
use crate::relay;
use ebbmark::sim::{Condition, Setup, World};
use ebbmark::units::{Celsius, Ohms, Volts};
use std::time::Duration;

fn under(conditions: &[Condition]) -> Setup {
    silenced(relay::in_order(1).under(conditions, &relay::profile(&[])))
}

fn truth(conditions: &[Condition]) -> ebbmark::sim::Truth {
    World::new(&under(conditions)).truth()
}

/// On at the start voltage and settled.
fn up(setup: &Setup) -> World {
    let mut world = World::new(setup);
    world.set_current_limit(ebbmark::units::Amps(1.0));
    to(&mut world, 3.8);
    world.set_output(true);
    wait(&mut world, 500);
    world
}

fn to(world: &mut World, volts: f64) {
    world.set_volts(Volts(volts));
    wait(world, 300);
}

/// Changes of the board's state in a second, looked at every 50 µs, and the mean current of that second.
fn edges_and_mean(world: &mut World) -> (usize, f64) {
    let mark = world.mark();
    let mut edges = 0;
    let mut on = world.board_on();
    for _ in 0..20_000 {
        world.advance_to(world.now() + Duration::from_micros(50));
        edges += usize::from(world.board_on() != on);
        on = world.board_on();
    }
    (edges, world.read_current(&mark).amps().expect("in range").0)
}

/// 2.8 V / 1 MΩ + 1.0 µA + 0.05 µA, and with other pull-ups.
#[test]
fn the_off_current_is_the_sum_of_its_paths() {
    let at = |conditions: &[Condition]| truth(conditions).off_current(Volts(2.8)).0;
    for (conditions, sum) in [
        (&[Condition::Good], 3.85e-6),
        (&[Condition::LowPullUp], 29.05e-6),
        (&[Condition::HighPullUp], 1.33e-6),
        // 2 MΩ more across the switch: 1.4 µA.
        (&[Condition::FluxFilm], 5.25e-6),
        // The leakage of 50 nA doubles three and a half times over 35 K.
        (&[Condition::HotBoard], 3.8e-6 + 0.05e-6 * 11.31),
    ] {
        assert!((at(conditions) - sum).abs() < 5e-9, "{conditions:?}: {} A", at(conditions));
    }
}

#[test]
fn a_hot_board_trips_lower_and_says_how_hot_it_is() {
    let hot = truth(&[Condition::HotBoard]);
    // 35 K x -100 ppm/K x 3.00 V.
    assert!((hot.trip.0 - (3.0 - 10.5e-3)).abs() < 1e-9, "{hot:?}");
    assert_eq!(hot.temperature, Celsius(60.0));
    assert_eq!(World::new(&under(&[Condition::Good])).temperature(), Celsius(25.0));
}

#[test]
fn a_large_pull_up_charges_the_gate_slowly() {
    // 10 MΩ x 1 nF x ln(3.15 / (3.15 - 0.8)).
    let slow = truth(&[Condition::HighPullUp]).release_delay.as_secs_f64();
    assert!((slow - 0.1 - 2.930e-3).abs() < 1e-5, "{slow} s");
}

#[test]
fn a_detector_stuck_on_lets_the_load_go_only_when_its_gate_dies() {
    let mut world = up(&under(&[Condition::DetectorStuckOn]));
    let (mut on, mut off) = (Vec::new(), Vec::new());
    for volts in [2.0, 1.2, 1.0] {
        to(&mut world, volts);
        on.push(read(&mut world).1 / (volts / 10.18));
    }
    for volts in [0.75, 0.5, 0.3] {
        to(&mut world, volts);
        off.push(read(&mut world).1);
    }
    assert!(on.iter().all(|share| (share - 1.0).abs() < 0.01), "{on:?}");
    assert!(off.iter().all(|amps| amps.abs() < 5e-6), "{off:?}");
    assert!(World::new(&under(&[Condition::NeverTrips])).truth().on_current(Volts(0.3)).0 > 29e-3);
}

#[test]
fn deep_conduction_peaks_between_its_ends() {
    let mut world = up(&under(&[Condition::DeepConduction]));
    to(&mut world, 2.0);
    for (volts, expected) in [(1.0, 0.0), (0.85, 0.0), (0.702, 20e-3), (0.5, 0.0)] {
        to(&mut world, volts);
        let (sense, current, _) = read(&mut world);
        assert!((current - expected).abs() < 0.5e-3, "{volts} V: {current} A at {sense} V");
    }
}

#[test]
fn the_next_lower_detector_has_both_thresholds_a_tenth_lower() {
    let truth = truth(&[Condition::WrongDetector]);
    assert!((truth.trip.0 - 2.70).abs() < 1e-9 && (truth.re_enable.0 - 2.835).abs() < 1e-9, "{truth:?}");
}

#[test]
fn thresholds_too_close_together_are_each_inside_their_limits() {
    let truth = truth(&[Condition::OverlappingThresholds]);
    assert!((2.94..3.06).contains(&truth.trip.0) && (3.06..3.27).contains(&truth.re_enable.0), "{truth:?}");
    assert!(truth.hysteresis.0 < 0.09, "{truth:?}");
}

#[test]
fn a_latched_board_comes_back_only_after_its_supply_has_gone() {
    let setup = under(&[Condition::Latched]);
    let mut world = up(&setup);
    assert!(world.board_on(), "a board just connected is on");
    to(&mut world, 2.0);
    to(&mut world, 4.2);
    assert!(!world.board_on(), "once tripped it stays off");
    to(&mut world, 0.5);
    to(&mut world, 3.8);
    assert!(world.board_on(), "its supply had gone");
    assert!(world.truth().latches);
}

#[test]
fn release_delays_are_as_short_and_as_long_as_their_conditions_say() {
    let delay = |condition| truth(&[condition]).release_delay;
    assert_eq!(delay(Condition::NoDelayCapacitor), Duration::from_micros(300));
    assert!(delay(Condition::SlowRelease) >= Duration::from_millis(360));
}

/// 0.6 Ω x 0.3 A is more than 150 mV: on for the detect delay, off for the release delay, so 2 x 0.3 ms a period and
/// half of 0.297 A; with the delay capacitor 100.3 ms and three thousandths of it.
#[test]
fn behind_0_6_ohm_a_board_chatters_as_fast_as_its_delays_allow() {
    for (conditions, edges, mean) in
        [(&[Condition::NoDelayCapacitor], 3333, 148e-3), (&[Condition::Good], 20, 0.9e-3)]
    {
        let mut setup = under(conditions);
        setup.wiring.lead_resistance = Ohms(0.5);
        setup.board.load_capacitance = ebbmark::units::Farads(1e-9);
        let mut world = up(&setup);
        to(&mut world, 2.5);
        to(&mut world, 3.165);
        let (seen, current) = edges_and_mean(&mut world);
        assert!(seen.abs_diff(edges) <= 2 + edges / 50, "{conditions:?}: {seen} edges");
        assert!((current - mean).abs() < 0.06 * mean, "{conditions:?}: {current} A");
        // It rests below its re-enable and above re-enable less hysteresis plus swing: 3.150 V and 3.179 V.
        for (rests, volts) in [(true, 3.148), (false, 3.152), (false, 3.176), (true, 3.190)] {
            to(&mut world, 3.8);
            to(&mut world, 2.5);
            to(&mut world, volts);
            assert_eq!(edges_and_mean(&mut world).0 == 0, rests, "{conditions:?} at {volts} V");
        }
    }
}

/// 1 A charges 220 µF to 3.15 V in 0.69 ms, longer than the detect delay of 0.3 ms.
#[test]
fn a_large_load_capacitor_hiccups_for_ever_behind_a_long_release_delay() {
    let mut setup = under(&[Condition::LargeLoadCapacitor]);
    assert!((setup.board.load_capacitance.0 - 219e-6).abs() < 1e-6, "{:?}", setup.board.load_capacitance);
    let mut world = up(&setup);
    to(&mut world, 3.2);
    let (edges, _) = edges_and_mean(&mut world);
    assert!((18..=22).contains(&edges), "{edges} edges a second, wanted those of 10 Hz");
    // Without the delay the capacitor keeps most of its charge from try to try, and after a few the board is on.
    setup = under(&[Condition::LargeLoadCapacitor, Condition::NoDelayCapacitor]);
    let mut world = World::new(&setup);
    world.set_current_limit(ebbmark::units::Amps(1.0));
    world.set_volts(Volts(3.2));
    world.set_output(true);
    let (edges, _) = edges_and_mean(&mut world);
    assert!((3..=9).contains(&edges) && world.board_on(), "{edges} edges");
}

#[test]
fn conditions_together_change_what_each_changes_alone() {
    let both = |conditions: &[Condition]| relay::in_order(7).under(conditions, &relay::profile(&[]));
    let pair = both(&[Condition::HighTrip, Condition::LeakingSwitch]);
    assert_eq!(pair, both(&[Condition::LeakingSwitch, Condition::HighTrip]));
    assert_eq!(pair.board.trip, both(&[Condition::HighTrip]).board.trip);
    assert_eq!(pair.board.leakage, both(&[Condition::LeakingSwitch]).board.leakage);
}

#[test]
fn every_condition_but_a_good_one_changes_something() {
    for condition in Condition::ALL {
        let same = relay::in_order(7).under(&[condition], &relay::profile(&[])) == relay::in_order(7);
        assert_eq!(same, condition == Condition::Good, "{condition}");
    }
}
