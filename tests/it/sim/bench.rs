//! The bench in virtual time.

use super::{PROFILES, profile, river_node};
use ebbmark::bench::{Bench, VirtualBench, drive, run_ready};
use ebbmark::procedure::{Action, Event, Plan, Procedure};
use ebbmark::profile::Profile;
use ebbmark::sim::{Condition, Faults, Setup};
use ebbmark::trace::{BenchFault, FaultKind, OutputState, Sample, Stop, Trace};
use ebbmark::units::{Amps, Volts};
use std::time::Duration;

fn bench(seed: u64) -> VirtualBench {
    let setup = Setup::new(&river_node(), Condition::Good, seed);
    VirtualBench::new(&setup, setup.ability())
}

fn perform(bench: &mut VirtualBench, action: &Action) -> Event {
    run_ready(bench.perform(action))
}

fn reading(bench: &mut VirtualBench) -> Sample {
    match perform(bench, &Action::Read) {
        Event::Reading(sample) => sample,
        other => panic!("wanted a reading, got {other:?}"),
    }
}

/// Output on at the start voltage, board up.
fn switch_on(bench: &mut VirtualBench) {
    let protect = Action::Protect { over_voltage: Volts(8.6), current_limit: Amps(0.35) };
    for action in [protect, Action::SetVolts(Volts(7.6)), Action::OutputOn] {
        assert_eq!(perform(bench, &action), Event::Done, "{action:?}");
    }
    let up = bench.now() + Duration::from_millis(200);
    assert_eq!(perform(bench, &Action::WaitUntil(up)), Event::Done);
    assert_eq!(bench.now(), up, "a pause ends when it was to end");
}

#[test]
fn a_reading_names_the_middle_of_its_measurement_and_every_role() {
    let mut bench = bench(4);
    switch_on(&mut bench);
    let before = bench.now();
    let sample = reading(&mut bench);
    assert_eq!(sample.at, before + Duration::from_millis(10));
    assert_eq!(bench.now(), before + Duration::from_millis(20));
    assert_eq!(sample.set, Volts(7.6));
    assert_eq!(sample.range, Some(Amps(3.0)));
    assert_eq!(sample.limited, Some(false));
    let (sense, load) = (sample.sense.expect("a voltmeter"), sample.load.expect("a voltmeter at the load"));
    let current = sample.current.amps().expect("in range");
    assert!((sense - Volts(7.6)).abs() < Volts(0.05) && load < sense && load > sense - Volts(0.02));
    assert!((current - Amps(7.6 / 55.0)).abs() < Amps(0.005), "{current}");
}

#[test]
fn a_role_the_bench_lacks_is_absent_from_its_readings() {
    let setup = Setup::new(&river_node(), Condition::Good, 4);
    let mut ability = setup.ability();
    ability.voltmeter = false;
    ability.load_voltmeter = false;
    let mut bench = VirtualBench::new(&setup, ability);
    switch_on(&mut bench);
    let sample = reading(&mut bench);
    assert_eq!((sample.sense, sample.load), (None, None));
}

#[test]
fn a_setting_the_supply_cannot_keep_is_not_taken() {
    let mut bench = bench(4);
    match perform(&mut bench, &Action::SetVolts(Volts(40.0))) {
        Event::Failed(BenchFault { kind: FaultKind::NotTaken, text }) => {
            assert!(text.contains("40.00 V") && text.contains("32.00 V"), "{text}");
        }
        other => panic!("a supply of 32 V took 40 V: {other:?}"),
    }
}

#[test]
fn switching_off_leaves_the_output_off_at_zero_volts() {
    let mut bench = bench(4);
    switch_on(&mut bench);
    assert!(bench.output_is_on());
    assert_eq!(perform(&mut bench, &Action::OutputOff), Event::Done);
    assert!(!bench.output_is_on());
    assert_eq!(bench.world().volts(), Volts(0.0));
}

#[test]
fn a_lost_link_leaves_the_output_as_it_was() {
    let mut healthy = bench(4);
    switch_on(&mut healthy);
    let mut cut = healthy.with_faults(Faults::lasting(FaultKind::LinkLost));
    for _ in 0..5 {
        let event = perform(&mut cut, &Action::OutputOff);
        assert!(matches!(event, Event::Failed(BenchFault { kind: FaultKind::LinkLost, .. })), "{event:?}");
    }
    assert!(cut.output_is_on());
}

#[test]
fn the_operator_s_stop_ends_a_pause_at_once() {
    let mut bench = bench(4).with_faults(Faults::abort_at(Duration::from_secs(3)));
    assert_eq!(perform(&mut bench, &Action::WaitUntil(Duration::from_secs(10))), Event::Abort);
    assert_eq!(bench.now(), Duration::from_secs(3));
    assert_eq!(perform(&mut bench, &Action::OutputOff), Event::Done);
}

#[test]
fn with_random_faults_the_same_seed_gives_the_same_events() {
    let events = |seed: u64| {
        let mut bench = bench(seed).with_faults(Faults::random(seed, Duration::from_secs(5)));
        let mut events = Vec::new();
        for step in 0..60 {
            let volts = Volts(7.6 - f64::from(step) * 0.04);
            let settled = bench.now() + Duration::from_millis(40);
            for action in
                [Action::SetVolts(volts), Action::WaitUntil(settled), Action::Read, Action::OutputOn]
            {
                events.push(perform(&mut bench, &action));
            }
        }
        (format!("{events:?}"), bench.output_is_on())
    };
    let mut failed = 0;
    for seed in 0..100 {
        let (text, on) = events(seed);
        assert_eq!((text.clone(), on), events(seed), "seed {seed}");
        failed += usize::from(text.contains("Failed"));
    }
    assert!(failed > 30, "faults strike: {failed} of 100 runs");
}

/// A whole run of a good board; the trace, and whether the output is truly on at its end.
fn run(profile: &Profile, seed: u64, faults: Faults) -> (Trace, bool) {
    let setup = Setup::new(profile, Condition::Good, seed);
    let ability = setup.ability();
    let procedure = Procedure::new(Plan::new(profile, &ability));
    let mut bench = VirtualBench::new(&setup, ability).with_faults(faults);
    let never = std::future::pending();
    let trace = run_ready(drive(procedure, &mut bench, setup.claims(), &mut (), never));
    (trace, bench.output_is_on())
}

#[test]
fn a_run_of_every_shipped_profile_s_good_board_completes_with_the_output_off() {
    for named in PROFILES {
        let profile = profile(named);
        for seed in 0..30 {
            let (trace, on) = run(&profile, seed, Faults::none());
            assert_eq!(trace.ending.stop, Stop::Completed, "{}, seed {seed}", named.0);
            assert!(!on && trace.ending.output == OutputState::Off, "{}, seed {seed}", named.0);
        }
    }
}

#[test]
fn after_any_fault_the_output_is_off_or_said_to_be_perhaps_on() {
    let profile = river_node();
    let mut lost = 0;
    for seed in 0..1000 {
        let (trace, on) = run(&profile, seed, Faults::random(seed, Duration::from_secs(30)));
        assert!(!on || trace.ending.output == OutputState::MayBeOn, "seed {seed}: {:?}", trace.ending);
        lost += u32::from(on);
    }
    assert!(lost > 0, "some faults leave the output on, or this test shows nothing");
}
