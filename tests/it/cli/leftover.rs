//! A program killed in the middle of a run: the supply is left on, and the next start finds that out first.

use super::Said;
use super::workplace::{BOARD, Workplace, always, at};
use ebbmark::sim::device::{Kind, ScpiError};
use ebbmark::sim::link_faults::Effect;
use ebbmark::verdict::Outcome;

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
