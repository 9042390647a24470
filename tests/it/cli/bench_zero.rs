//! The zeros of an empty fixture: taken, refused when they cannot be true, and taken off in a test.

use super::workplace::{Running, Workplace, always, at, once, quick_profile};
use super::{Said, ebbmark};
use crate::simulated_bench::setup;
use ebbmark::profile::QuantityName;
use ebbmark::record::{BenchEntry, BenchFound};
use ebbmark::sim::bench::InFixture;
use ebbmark::sim::device::Kind;
use ebbmark::sim::link_faults::Effect;
use std::path::Path;
use std::time::Duration;

/// Where the off current of the profile is measured, in V.
const OFF_AT: f64 = 5.8;

fn zero(place: &Workplace, more: &[&str]) -> Said {
    let arguments = ["bench", "zero", "bench.toml", "--profile", "profile.toml"];
    ebbmark(place.folder(), &[&arguments[..], more].concat())
}

/// The entries about the bench, the output off in truth behind them.
#[track_caller]
fn entries(place: &Workplace, said: &Said) -> Vec<BenchEntry> {
    assert!(!place.bench.output(), "the output is on\n{said}");
    place.log().bench_entries().expect("readable")
}

/// Refused with exit code 3 and this problem, which is kept.
#[track_caller]
fn refused(place: &Workplace, phrase: &str) {
    let said = zero(place, &["--fixture-empty"]);
    said.ended(3);
    assert!(said.out.contains("The zeros are not used."), "{said}");
    let entries = entries(place, &said);
    let problems = &entries.last().expect("kept").problems;
    assert!(problems.iter().any(|told| told.contains(phrase)), "no {phrase:?} in {problems:?}");
}

#[test]
fn nothing_is_switched_on_until_the_fixture_is_said_to_be_empty() {
    let place =
        Workplace::holding(InFixture::Nothing, vec![always(Kind::Supply, at("OUTP ON"), Effect::HangUp)]);
    zero(&place, &[]).refuses(2, &["take the board out", "--fixture-empty"]);
    zero(&place, &["--fixture-empty", "--at", "9 V"]).refuses(2, &["9.000 V is asked for", "8.400 V"]);
    assert!(place.log_files().is_empty());
}

/// The same instruments with an empty fixture and with a board: both benches are drawn from one seed. The board's off
/// current in truth is what its circuit draws at the voltage, as the simulation defines it.
#[test]
fn a_test_waits_for_the_zero_takes_it_off_and_comes_nearer_to_the_truth() {
    let empty = Workplace::holding(InFixture::Nothing, Vec::new());
    let board = Workplace::new();
    for place in [&empty, &board] {
        place.put("profile.toml", &format!("{}\n[bench]\nzero_every = \"8 h\"\n", quick_profile()));
    }
    let logs = empty.folder().join("logs").display().to_string();
    let refused = board.test(&["--logs", &logs]);
    refused.refuses(2, &["no board of RN-204 is tested", "zero: never done", "ebbmark bench zero"]);
    assert!(!board.bench.output() && empty.runs().is_empty(), "{refused}");

    let said = zero(&empty, &["--fixture-empty", "--format", "json"]);
    said.ended(0);
    assert_eq!(said.json()["ready"], true);
    let entries = entries(&empty, &said);
    let BenchFound::Zero { zeros } = &entries[0].found else { panic!("{entries:?}") };
    assert_eq!(zeros.len(), 4, "two ranges at two voltages: {zeros:?}");
    let offset = setup().ammeter.ranges[0].meter.offset_error;
    let at_rest =
        zeros.iter().find(|zero| zero.full_scale_a < 2e-4 && zero.at_v < 1.0).expect("100 µA at 0 V");
    assert!(
        (at_rest.current_a - offset).abs() < 4.0 * at_rest.standard_uncertainty_a + 1e-10,
        "{at_rest:?}, true {offset}"
    );

    let tested = board.test(&["--logs", &logs]);
    tested.ended(0);
    let runs = empty.runs();
    let off = runs[0].quantities.iter().find(|judged| judged.quantity.name == QuantityName::OffCurrent);
    let off = &off.expect("measured").quantity;
    let part = |name: &str| off.contributions.iter().find(|part| part.source.starts_with(name));
    assert!(part("zero of the bench").is_some() && part("drift since the zero").is_some(), "{off:?}");
    assert!(part("voltmeter's input current").is_none(), "it is in the zero: {off:?}");

    let model = setup().board;
    let leak = model.leakage_conductance.0 * OFF_AT + model.leakage.0;
    let truth = OFF_AT * (1.0 / model.pull_up.0 + model.divider.0) + model.detector_current.0 + leak;
    assert!((off.value - truth).abs() < 2.0 * off.standard_uncertainty, "{} of {truth}: {off:?}", off.value);
    assert!(off.standard_uncertainty < 5e-9, "the claim alone is 14 nA: {off:?}");
}

#[test]
fn a_board_left_in_the_fixture_is_found() {
    let place = Workplace::new();
    refused(&place, "is a board still in the fixture?");
    // What went wrong last counts, and is told before any board is tested.
    place.put("profile.toml", &format!("{}\n[bench]\nzero_every = \"8 h\"\n", quick_profile()));
    place.test(&[]).refuses(2, &["zero: 0 min ago it found zero of", "still in the fixture"]);
}

#[test]
fn exact_zeros_are_a_blown_fuse() {
    let nothing = Effect::Garbage(b"+0.0000000E+00\n".to_vec());
    refused(
        &Workplace::holding(InFixture::Nothing, vec![always(Kind::Ammeter, at("READ?"), nothing)]),
        "fuse blown",
    );
}

#[test]
fn a_garbled_reading_ends_it_with_the_output_off() {
    let place = Workplace::holding(InFixture::Nothing, Vec::new());
    place.give_up("bench-meter-current", Duration::from_millis(500));
    let garbage = Effect::Garbage(b"\x00\xff~~\n".to_vec());
    place.bench.inject(always(Kind::Ammeter, at("READ?"), garbage));
    refused(&place, "READ?");
}

#[test]
fn a_link_lost_with_the_output_on_is_said_aloud() {
    let place =
        Workplace::holding(InFixture::Nothing, vec![once(Kind::Supply, at("VOLT 5.8"), Effect::HangUp)]);
    let said = zero(&place, &["--fixture-empty"]);
    said.refuses(5, &["THE OUTPUT MAY STILL BE ON"]);
    assert!(place.bench.output(), "nobody could switch it off\n{said}");
}

#[test]
fn a_program_that_is_killed_with_the_output_on_is_found_out_at_the_next_start() {
    let place = Workplace::holding(InFixture::Nothing, Vec::new());
    let arguments = ["bench", "zero", "bench.toml", "--fixture-empty", "--at", "5.8 V"];
    let mut running = Running::start(place.folder(), &arguments);
    running.until("the output is on", || place.bench.output());
    running.kill();
    assert!(place.bench.output(), "nobody has switched it off");
    let said = ebbmark(place.folder(), &["bench", "check", "bench.toml"]);
    said.refuses(0, &["note: the run of bench zero begun", "never ended", "reads back as off"]);
    assert!(!place.bench.output(), "{said}");
}

#[test]
fn the_simulated_bench_of_the_program_has_an_empty_fixture_for_it() {
    let folder = tempfile::tempdir().expect("a folder");
    for bench in ["sim", "sim-smu"] {
        let said = ebbmark(
            folder.path(),
            &["bench", "zero", bench, "--fixture-empty", "--at", "5.8 V", "--speed", "5"],
        );
        said.ended(0);
        assert!(said.out.contains("The zeros are kept"), "{said}");
    }
    assert!(Path::new(folder.path()).join("logs/simulated/bench.jsonl").exists());
}
