//! A program killed in the middle of a run: the supply is left on, and the next start finds that out first.

use super::workplace::{BOARD, Running, SPEED, Workplace, always, at, once};
use super::{Said, ebbmark};
use ebbmark::sim::device::{Kind, ScpiError};
use ebbmark::sim::link_faults::Effect;
use ebbmark::verdict::Outcome;
use std::fs;

const OFF: &str = "note: the output was commanded off and reads back as off";

/// A place where a run was killed while the board was on.
fn killed() -> Workplace {
    let place = Workplace::new();
    let running = place.test_under_way(&[]);
    running.kill();
    assert!(place.bench.output(), "killed, it cannot have switched off");
    place
}

/// The run that was killed is reported and recorded, and the output is truly off.
#[track_caller]
fn made_safe(place: &Workplace, said: &Said) {
    said.warns(&["never ended; it is recorded as INCOMPLETE", BOARD, OFF]);
    assert!(!place.bench.output(), "the output is on\n{said}");
    let runs = place.runs();
    assert_eq!((runs[0].outcome, &runs[0].trace), (Outcome::Incomplete, &None));
    assert!(!place.log().path().join("started.json").exists(), "the mark is still there");
}

#[test]
fn the_next_start_switches_off_first_and_then_tests_the_board() {
    let place = killed();
    let said = place.test(&["--format", "json"]);
    said.ended(0);
    made_safe(&place, &said);
    assert_eq!(said.json()["attempt"], 2, "{said}");
    assert_eq!(place.runs().len(), 2);
}

#[test]
fn a_start_that_is_refused_for_its_board_or_profile_has_switched_off_all_the_same() {
    let place = killed();
    let said = place.test_board("XY000123", &[]);
    said.refuses(2, &["serial number \"XY000123\""]);
    made_safe(&place, &said);
    assert_eq!(place.runs().len(), 1);

    let place = killed();
    place.edit("profile.toml", "\"7.60 V\"", "\"7.60 A\"");
    let said = place.test(&[]);
    said.refuses(2, &["profile.toml:15:9"]);
    made_safe(&place, &said);
}

#[test]
fn a_meter_that_is_missing_does_not_keep_the_output_on() {
    let mut place = killed();
    place.bench.hang_up(Kind::Voltmeter);
    let said = place.test(&[]);
    said.refuses(3, &["voltmeter on ", "there is no such port"]);
    made_safe(&place, &said);
}

/// The mark stays until the output is confirmed off, however often the program is started.
#[test]
fn a_supply_that_does_not_switch_off_is_not_forgotten() {
    let mut place = killed();
    place.bench.inject(always(Kind::Supply, at("OUTP OFF"), Effect::Refuse(ScpiError::SETTINGS_CONFLICT)));
    let said = place.test(&[]);
    said.refuses(5, &["INCOMPLETE", "THE OUTPUT MAY STILL BE ON", "supply on ", "did not take \"OUTP OFF\""]);
    assert!(place.bench.output() && place.log().path().join("started.json").exists(), "{said}");

    place.bench.hang_up(Kind::Supply);
    let said = place.test(&[]);
    said.refuses(5, &["its output was not confirmed off", "THE OUTPUT MAY STILL BE ON", "supply on "]);
    assert!(place.log().path().join("started.json").exists(), "{said}");
    assert_eq!(place.runs().len(), 1, "recorded once");
}

/// The supply of this place was not asked, and stays as it is until it is.
#[track_caller]
fn still_left_on(place: &Workplace, said: &Said, phrases: &[&str]) {
    said.refuses(5, &["THE OUTPUT MAY STILL BE ON", "Start once with that bench", "started.json"]);
    said.warns(phrases);
    assert!(place.bench.output(), "somebody switched it off\n{said}");
    assert!(place.log().path().join("started.json").exists(), "the mark is gone\n{said}");
}

#[test]
fn another_bench_in_the_same_log_does_not_stand_for_the_one_left_on() {
    let (place, other) = (killed(), Workplace::new());
    place.put("other.toml", &fs::read_to_string(other.folder().join("bench.toml")).expect("a file"));
    let port = |place: &Workplace| place.bench.port(Kind::Supply).expect("a port").display().to_string();
    let on_other = ["test", "profile.toml", "--bench", "other.toml", "--serial-number", BOARD];
    let said = ebbmark(place.folder(), &on_other);
    still_left_on(&place, &said, &[&port(&place), &port(&other)]);
    assert!(other.bench.take_exchanges(Kind::Supply).is_empty(), "the other supply is left alone");

    place.edit("bench.toml", "name = \"sim\"", "name = \"annex\"");
    let said = place.test(&["--station", "sim"]);
    still_left_on(&place, &said, &["bench \"sim\"", "bench \"annex\""]);

    // Switched off by hand, and the mark taken away: then the other bench may work.
    place.bench.world().with(|world| world.set_output(false));
    fs::remove_file(place.log().path().join("started.json")).expect("the mark");
    ebbmark(place.folder(), &on_other).ended(0);
}

/// The bench file names no instrument, so that only the record of the run tells one supply from another.
#[test]
fn another_supply_on_the_same_port_does_not_stand_for_the_one_left_on() {
    let place = killed();
    let text = fs::read_to_string(place.folder().join("bench.toml")).expect("a file");
    let nameless: Vec<&str> = text.lines().filter(|line| !line.starts_with("identity")).collect();
    place.put("bench.toml", &nameless.join("\n"));
    let other = Effect::Identity("EXAMPLE,PS-30,SN0042,1.0".to_owned());
    place.bench.inject(once(Kind::Supply, at("*IDN?"), other));
    let said = place.test(&[]);
    said.refuses(5, &["THE OUTPUT MAY STILL BE ON", "on this port answers EXAMPLE,PS-30,SN0042"]);
    assert!(place.log().path().join("started.json").exists(), "the mark is gone\n{said}");
}

/// Simulated instruments go with their program, so nothing is left on, and their ports are others each time.
#[test]
fn a_simulated_run_that_was_killed_is_cleared_by_the_next() {
    let place = Workplace::new();
    let arguments = ["test", "profile.toml", "--bench", "sim", "--serial-number", BOARD, "--speed", SPEED];
    let mark = place.folder().join("logs/simulated/started.json");
    let mut running = Running::start(place.folder(), &arguments);
    running.until("the run is marked", || mark.exists());
    running.kill();
    let said = ebbmark(place.folder(), &arguments);
    said.ended(0);
    said.warns(&["never ended; it is recorded as INCOMPLETE", OFF]);
    assert!(!mark.exists(), "the mark is still there");
}
