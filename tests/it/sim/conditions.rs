//! Every named condition does what its name says, whatever the seed.

use super::staircase::{Seen, off_current, walk};
use super::{PROFILES, armed, profile, read, river_node, wait};
use ebbmark::profile::{Limit, QuantityName};
use ebbmark::sim::{Condition, Setup, World};
use ebbmark::units::{Amps, Volts};

const SEEDS: std::ops::Range<u64> = 0..40;

/// What the ammeter's largest range may be wrong by near zero, noise included, A.
const LARGE_RANGE: f64 = 0.7e-3;

fn setups(condition: Condition) -> impl Iterator<Item = (u64, Setup)> {
    SEEDS.map(move |seed| (seed, Setup::new(&river_node(), condition, seed)))
}

fn limit(name: QuantityName) -> (f64, f64) {
    let Limit { min, max, .. } = river_node().limits[&name];
    (min.expect("the profile sets it"), max.expect("the profile sets it"))
}

fn inside(name: QuantityName, value: f64) -> bool {
    let (min, max) = limit(name);
    (min..=max).contains(&value)
}

/// Trip and re-enable as the terminals showed them, lead drop and a step of tolerance apart.
fn thresholds(seen: &Seen) -> Option<(f64, f64)> {
    Some((seen.trip?.0, seen.re_enable?.0))
}

#[test]
fn a_good_board_is_inside_every_limit() {
    for (seed, setup) in setups(Condition::Good) {
        let truth = World::new(&setup).truth();
        assert!(inside(QuantityName::Trip, truth.trip.0), "seed {seed}: {truth:?}");
        assert!(inside(QuantityName::ReEnable, truth.re_enable.0), "seed {seed}: {truth:?}");
        assert!(inside(QuantityName::Hysteresis, truth.hysteresis.0), "seed {seed}: {truth:?}");
        assert!(inside(QuantityName::OffCurrent, truth.off_current(Volts(5.8)).0), "seed {seed}: {truth:?}");
        let seen = walk(&setup);
        let (trip, re_enable) = thresholds(&seen).expect("it trips and comes back");
        assert_eq!(seen.edges, 2, "seed {seed}: {seen:?}");
        assert!((trip - truth.trip.0).abs() < 0.011, "seed {seed}: {seen:?}");
        assert!((re_enable - truth.re_enable.0).abs() < 0.011, "seed {seed}: {seen:?}");
        let error = (seen.off_current - truth.off_current(Volts(5.8)).0).abs();
        assert!(error < 30e-9, "seed {seed}: {seen:?}");
    }
}

#[test]
fn a_good_board_of_every_shipped_profile_is_inside_its_limits() {
    for named in PROFILES {
        let profile = profile(named);
        for seed in 0..500 {
            let setup = Setup::new(&profile, Condition::Good, seed);
            let truth = World::new(&setup).truth();
            for (name, limit) in &profile.limits {
                let value = match name {
                    QuantityName::Trip => truth.trip.0,
                    QuantityName::ReEnable => truth.re_enable.0,
                    QuantityName::Hysteresis => truth.hysteresis.0,
                    QuantityName::OffCurrent => truth.off_current(limit.at.expect("a voltage")).0,
                    QuantityName::OnCurrent => truth.on_current(truth.trip).0,
                    // Derived, and held against the truth where it is measured.
                    QuantityName::StorageTime => continue,
                    other => panic!("{} sets a limit on {}", named.0, other.key()),
                };
                let inside =
                    limit.min.is_none_or(|min| value >= min) && limit.max.is_none_or(|max| value <= max);
                assert!(inside, "{}, seed {seed}: {} is {value}", named.0, name.key());
            }
            assert!(truth.detect_delay <= profile.timing.detect_delay, "{}, seed {seed}", named.0);
            assert!(truth.release_delay <= profile.timing.release_delay, "{}, seed {seed}", named.0);
        }
    }
}

#[test]
fn a_shorted_switch_never_trips() {
    for (seed, setup) in setups(Condition::NeverTrips) {
        assert!(walk(&setup).trip.is_none(), "seed {seed}");
        let mut world = armed(&setup);
        world.set_volts(Volts(0.3));
        wait(&mut world, 200);
        let (sense, current, _) = read(&mut world);
        assert!((current - sense / setup.board.load.0).abs() < LARGE_RANGE, "seed {seed}: {current} A");
    }
}

#[test]
fn an_open_switch_never_turns_on_and_the_pull_up_still_follows_the_detector() {
    for (seed, setup) in setups(Condition::NeverOn) {
        let mut world = armed(&setup);
        let (sense, _, load) = read(&mut world);
        let divider = setup.board.divider.0;
        let idle = off_current(&mut world, &setup) - sense * divider;
        assert!(load.abs() < 0.01 && idle < 2e-6, "seed {seed}: {load} V, {idle} A");
        world.set_volts(Volts(5.8));
        wait(&mut world, 200);
        let pulled = off_current(&mut world, &setup);
        assert!(
            inside(QuantityName::OffCurrent, pulled) && pulled - 5.8 * divider > idle + 0.5e-6,
            "seed {seed}: {pulled} A"
        );
    }
}

#[test]
fn a_high_trip_is_above_its_limit_with_its_hysteresis_intact() {
    for (seed, setup) in setups(Condition::HighTrip) {
        let (trip, re_enable) = thresholds(&walk(&setup)).expect("it trips and comes back");
        assert!(trip > limit(QuantityName::Trip).1, "seed {seed}: {trip} V");
        assert!(inside(QuantityName::Hysteresis, re_enable - trip), "seed {seed}: {trip} V, {re_enable} V");
    }
}

#[test]
fn a_narrow_hysteresis_is_below_its_limit_with_the_trip_intact() {
    for (seed, setup) in setups(Condition::NarrowHysteresis) {
        let (trip, re_enable) = thresholds(&walk(&setup)).expect("it trips and comes back");
        assert!(inside(QuantityName::Trip, trip), "seed {seed}: {trip} V");
        assert!(re_enable - trip < limit(QuantityName::Hysteresis).0, "seed {seed}: {trip} V, {re_enable} V");
    }
}

#[test]
fn a_leaking_switch_and_a_low_pull_up_differ_in_how_the_current_follows_the_voltage() {
    let off_at = |setup: &Setup, volts: f64| World::new(setup).truth().off_current(Volts(volts)).0;
    for (seed, setup) in setups(Condition::LeakingSwitch) {
        assert!(walk(&setup).off_current > limit(QuantityName::OffCurrent).1, "seed {seed}");
        let good = Setup::new(&river_node(), Condition::Good, seed);
        let slope = |setup| off_at(setup, 5.8) - off_at(setup, 4.8);
        assert!((slope(&setup) - slope(&good)).abs() < 1e-9, "seed {seed}: a constant leak has no slope");
    }
    for (seed, setup) in setups(Condition::LowPullUp) {
        assert!(walk(&setup).off_current > limit(QuantityName::OffCurrent).1, "seed {seed}");
        let good = Setup::new(&river_node(), Condition::Good, seed);
        let decade = good.board.pull_up / setup.board.pull_up;
        assert!((decade - 10.0).abs() < 1e-9, "seed {seed}: {decade}");
    }
}

#[test]
fn a_slow_detector_is_slower_than_its_design_and_trips_where_it_should() {
    for (seed, setup) in setups(Condition::SlowDetector) {
        assert!(setup.board.detect_delay > river_node().timing.detect_delay, "seed {seed}");
        let (trip, _) = thresholds(&walk(&setup)).expect("it trips and comes back");
        assert!((trip - setup.board.trip.0).abs() < 0.011, "seed {seed}: {trip} V");
    }
}

#[test]
fn a_missing_load_draws_nothing_while_its_terminals_show_the_voltage() {
    for (seed, setup) in setups(Condition::NoLoad) {
        let mut world = armed(&setup);
        let (sense, current, load) = read(&mut world);
        assert!(current.abs() < 1e-3, "seed {seed}: {current} A");
        assert!((load - sense).abs() < 0.01, "seed {seed}: {load} V at the load, {sense} V at the terminals");
    }
}

#[test]
fn a_reversed_board_conducts_like_a_diode_in_series_with_its_load() {
    for (seed, setup) in setups(Condition::Reversed) {
        let mut world = World::new(&setup);
        world.set_current_limit(Amps(5e-3));
        world.set_volts(Volts(0.3));
        world.set_output(true);
        wait(&mut world, 100);
        assert!(read(&mut world).1.abs() < 1e-3, "seed {seed}: below the diode's knee");
        world.set_volts(Volts(1.0));
        wait(&mut world, 100);
        let expected = (1.0 - 0.8) / setup.board.load.0;
        let (_, current, load) = read(&mut world);
        assert!((current - expected).abs() < LARGE_RANGE, "seed {seed}: {current} A, {expected} A expected");
        assert!(load < -0.1, "seed {seed}: the load sees the other polarity, {load} V");
        world.set_volts(Volts(7.6));
        wait(&mut world, 100);
        let (sense, current, _) = read(&mut world);
        assert!(world.limited() && (current - 5e-3).abs() < LARGE_RANGE, "seed {seed}: {current} A");
        assert!(sense < 1.2, "seed {seed}: the limit holds the terminals down, {sense} V");
    }
}

#[test]
fn resistive_leads_make_the_board_chatter_between_its_thresholds() {
    for (seed, setup) in setups(Condition::Chatter) {
        let mut world = armed(&setup);
        let (sense, ..) = read(&mut world);
        assert!(world.board_on(), "seed {seed}: on at the start voltage, {sense} V at the terminals");
        // A little above the re-enable: on, the drop is more than the hysteresis.
        world.set_volts(setup.board.re_enable() + Volts(0.03));
        let mut edges = 0;
        let mut on = world.board_on();
        for _ in 0..2000 {
            wait(&mut world, 1);
            edges += usize::from(world.board_on() != on);
            on = world.board_on();
        }
        assert!(edges > 20, "seed {seed}: {edges} edges in two seconds");
    }
}

#[test]
fn a_supply_that_cannot_sink_takes_seconds_where_another_takes_milliseconds() {
    for (seed, setup) in setups(Condition::NoSink) {
        let fall = |setup: &Setup| {
            let mut world = armed(setup);
            world.set_volts(Volts(5.8));
            wait(&mut world, 200);
            world.set_volts(Volts(5.3));
            wait(&mut world, 200);
            read(&mut world).0
        };
        let sinking = Setup::new(&river_node(), Condition::Good, seed);
        assert!((fall(&sinking) - 5.3).abs() < 0.02, "seed {seed}");
        assert!(fall(&setup) > 5.6, "seed {seed}: {} V", fall(&setup));
        let (trip, _) = thresholds(&walk(&setup)).expect("it still trips and comes back");
        assert!(inside(QuantityName::Trip, trip), "seed {seed}: {trip} V");
    }
}
