//! A whole run over real pseudo-terminals: procedure, serial bench, simulated instruments and board, one clock.

#![expect(clippy::expect_used, reason = "a test fails by panicking")]

use crate::simulated_bench::setup;
use ebbmark::analysis::{FindingCode, analyse};
use ebbmark::bench::drive;
use ebbmark::bench::serial::{SerialBench, check, connect};
use ebbmark::clock::Clock;
use ebbmark::instrument::bench_file::BenchFile;
use ebbmark::procedure::{Plan, Procedure};
use ebbmark::profile::{InBand, Profile, QuantityName, WantedInBand};
use ebbmark::sim::bench::{Arrangement, Options, SimulatedBench};
use ebbmark::sim::{Condition, Setup};
use ebbmark::trace::{OutputState, Stop, Trace};
use ebbmark::units::{Amps, Volts};
use ebbmark::verdict::{Outcome, judge};
use std::path::Path;
use std::time::Duration;

/// Simulated seconds in a second of the wall.
const SPEED: f64 = 50.0;

fn profile() -> Profile {
    let text = include_str!("../../profiles/river-node.toml");
    Profile::read("river-node.toml", text).expect("a sound profile")
}

fn block_on<T>(work: impl Future<Output = T>) -> T {
    tokio::runtime::Builder::new_current_thread().enable_time().build().expect("a runtime").block_on(work)
}

fn bench_file(simulated: &SimulatedBench) -> BenchFile {
    let find = |name: &str| ebbmark::instrument::library::find(name, Path::new(""));
    BenchFile::read("sim.toml", &simulated.bench_file(), &find)
        .unwrap_or_else(|problems| panic!("{problems}"))
}

async fn connected(file: &BenchFile, clock: Clock) -> SerialBench {
    connect(file, profile().supply.maximum, clock).await.unwrap_or_else(|error| panic!("{error}"))
}

/// One run on simulated instruments, stopped by the operator when `abort` becomes ready.
fn run(arrangement: Arrangement, abort: impl Future<Output = ()>) -> Trace {
    run_profile(&profile(), arrangement, abort)
}

fn run_profile(profile: &Profile, arrangement: Arrangement, abort: impl Future<Output = ()>) -> Trace {
    run_board(profile, &setup(), arrangement, abort)
}

fn run_board(
    profile: &Profile,
    setup: &Setup,
    arrangement: Arrangement,
    abort: impl Future<Output = ()>,
) -> Trace {
    let clock = Clock::faster(SPEED);
    let options = Options { clock, arrangement, ..Options::default() };
    let simulated = SimulatedBench::start(setup, options).expect("pseudo-terminals");
    let file = bench_file(&simulated);
    assert_eq!(file.misfits(profile), []);
    let trace = block_on(async {
        let mut bench = connected(&file, clock).await;
        bench.begin_run().await.expect("fit for a run");
        let procedure = Procedure::new(Plan::new(profile, &file.ability(profile.supply.maximum)));
        drive(procedure, &mut bench, file.claims(&profile.supply), &mut (), abort).await
    });
    assert!(!simulated.output(), "the simulated supply's output is on after {:?}", trace.ending);
    trace
}

#[test]
fn a_good_board_is_measured_to_the_end() {
    for arrangement in [Arrangement::Separate, Arrangement::SourceMeasureUnit] {
        let trace = run(arrangement, std::future::pending());
        assert_eq!((&trace.ending.stop, trace.ending.output), (&Stop::Completed, OutputState::Off));
        let amps = |sample: &ebbmark::trace::Sample| sample.current.amps().unwrap_or(Amps::ZERO);
        let most = trace.samples.iter().map(amps).fold(Amps::ZERO, Amps::max);
        assert!(most > Amps(0.1), "the board was on: {most}");
        assert!(trace.samples.is_sorted_by_key(|sample| sample.at));
        let smallest = trace.samples.iter().filter_map(|sample| sample.range).fold(Amps(1.0), Amps::min);
        assert!(smallest < Amps(1e-3), "the off current was read on a small range: {smallest}");
    }
}

/// Everything a profile can ask for, on a board of 5.9 ms and 12 ms.
#[test]
fn everything_is_measured_over_the_ports() {
    let mut profile = profile();
    (profile.measure.detect_delay, profile.measure.release_delay) = (true, true);
    profile.measure.deep_floor = Some(Volts(0.3));
    profile.measure.in_band = Some(InBand { at: Volts(6.18), times: 2, wanted: Some(WantedInBand::Off) });
    let truth = setup().board;
    for arrangement in [Arrangement::Separate, Arrangement::SourceMeasureUnit] {
        let trace = run_profile(&profile, arrangement, std::future::pending());
        assert_eq!((&trace.ending.stop, trace.ending.output), (&Stop::Completed, OutputState::Off));
        assert!(trace.samples.iter().all(|sample| sample.set <= profile.supply.maximum));
        let analysis = analyse(&trace, &profile);
        let quantity = |name| {
            let found = analysis.quantities.iter().find(|quantity| quantity.name == name);
            found.unwrap_or_else(|| panic!("no {name:?}: {analysis:#?}"))
        };
        for (name, truth) in [
            (QuantityName::DetectDelay, truth.detect_delay),
            (QuantityName::ReleaseDelay, truth.release_delay),
        ] {
            let delay = quantity(name);
            let half_width = delay.standard_uncertainty * 3.0_f64.sqrt();
            assert!(
                (delay.value - truth.as_secs_f64()).abs() <= half_width,
                "{arrangement:?}: {truth:?}, {delay:?}"
            );
        }
        quantity(QuantityName::DeepCurrent);
        let codes: Vec<_> = analysis.findings.iter().map(|finding| finding.code).collect();
        assert_eq!(codes, [FindingCode::InBand], "{:?}", analysis.findings);
    }
}

/// Off-state line and budget, on-resistance, rebound with a hold, and storage, with a limit on each.
#[test]
fn off_state_and_battery_are_measured_and_judged_over_the_ports() {
    let text = include_str!("../../profiles/garden-probe.toml").replace(
        "[limits]",
        "[limits]
         on_resistance = { max = \"100 mohm\" }
         off_conductance = { min = \"0.9 uS\", max = \"1.1 uS\" }
         off_constant_current = { min = \"0.5 uA\", max = \"1.1 uA\" }
         rebound_margin = { min = \"10 mV\" }
         storage_time = { min = \"1 year\" }",
    );
    let text = text.replace("[pack]", "[pack]\nremaining_capacity = \"200 mAh\"");
    let profile = Profile::read("garden-probe.toml", &text).unwrap_or_else(|problems| panic!("{problems}"));
    for arrangement in [Arrangement::Separate, Arrangement::SourceMeasureUnit] {
        let setup = Setup::new(&profile, Condition::Good, 11);
        let trace = run_board(&profile, &setup, arrangement, std::future::pending());
        assert_eq!((&trace.ending.stop, trace.ending.output), (&Stop::Completed, OutputState::Off));
        let verdict = judge(&analyse(&trace, &profile), &profile, &trace.ending);
        assert_eq!(verdict.outcome, Outcome::Pass, "{arrangement:?}: {verdict:#?}");
        let judged = verdict.judged.iter().filter(|judged| judged.decision.is_some()).count();
        assert_eq!(judged, profile.limits.len(), "{arrangement:?}: {verdict:#?}");
    }
}

#[test]
fn a_run_stopped_by_the_operator_ends_with_the_output_off() {
    let trace = run(Arrangement::default(), async { tokio::time::sleep(Duration::from_millis(60)).await });
    assert_eq!((&trace.ending.stop, trace.ending.output), (&Stop::Aborted, OutputState::Off));
}

#[test]
fn a_simulated_bench_is_found_sound_by_a_check() {
    let clock = Clock::faster(SPEED);
    let simulated =
        SimulatedBench::start(&setup(), Options { clock, ..Options::default() }).expect("pseudo-terminals");
    let file = bench_file(&simulated);
    let reports = block_on(check(&file, profile().supply.maximum, clock));
    assert_eq!(reports.len(), file.instruments().len());
    for report in reports {
        let report = report.expect("sound");
        assert!(!report.greeting.echoes && report.greeting.old_errors.is_empty(), "{report:?}");
    }
}
