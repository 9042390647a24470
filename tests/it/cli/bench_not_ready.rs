//! Benches that are not fit for a run: nothing is switched on, no run begins, and the message says where to look.

use super::workplace::{Workplace, always, at, once};
use super::{Said, ebbmark};
use ebbmark::sim::device::{Kind, ScpiError};
use ebbmark::sim::link_faults::{Effect, LinkFault, When};
use std::time::Duration;

/// Refused as a failure of the bench, before a run began.
#[track_caller]
fn not_ready(place: &Workplace, said: &Said, phrases: &[&str]) {
    said.refuses(3, phrases);
    assert_eq!(said.out, "", "{said}");
    assert!(!place.bench.output(), "the output is on\n{said}");
    assert_eq!((place.runs(), place.log_files()), (vec![], vec![]), "{said}");
}

#[track_caller]
fn not_ready_with(fault: LinkFault, phrases: &[&str]) {
    let place = Workplace::with(vec![fault]);
    for meter in ["bench-meter-current", "bench-meter-voltage"] {
        place.give_up(meter, Duration::from_millis(500));
    }
    not_ready(&place, &place.test(&["--format", "json"]), phrases);
}

#[test]
fn an_unknown_port_is_named_with_the_instrument_and_the_ports_there_are() {
    let place = Workplace::new();
    let port = place.bench.port(Kind::Ammeter).expect("a port").display().to_string();
    place.edit("bench.toml", &port, "/dev/no-such-port");
    not_ready(
        &place,
        &place.test(&[]),
        &["ammeter on /dev/no-such-port", "there is no such port", "present"],
    );
}

#[test]
fn all_instruments_that_are_not_ready_are_named_at_once() {
    let place = Workplace::new();
    for kind in [Kind::Voltmeter, Kind::Ammeter] {
        let port = place.bench.port(kind).expect("a port").display().to_string();
        place.edit("bench.toml", &format!("\"{port}\""), &format!("\"/dev/no-{kind:?}\""));
    }
    not_ready(&place, &place.test(&[]), &["ammeter on /dev/no-Ammeter", "voltmeter on /dev/no-Voltmeter"]);
}

#[test]
fn a_port_that_another_program_has_is_named() {
    let place = Workplace::new();
    let port = place.bench.port(Kind::Supply).expect("a port").display().to_string();
    let _other = serialport::new(&port, 9600).open().expect("a free port");
    not_ready(&place, &place.test(&[]), &["supply on ", "the port is taken by another program", "close"]);
}

#[test]
fn another_instrument_than_the_bench_file_names_is_told_nothing() {
    let place = Workplace::new();
    let supply = place.bench.port(Kind::Supply).expect("a port").display().to_string();
    let meter = place.bench.port(Kind::Voltmeter).expect("a port").display().to_string();
    place.edit("bench.toml", &supply, "SWAP");
    place.edit("bench.toml", &format!("\"{meter}\""), &format!("\"{supply}\""));
    place.edit("bench.toml", "SWAP", &meter);
    let said = place.test(&[]);
    let phrases = [
        "is not the instrument named in the bench file",
        "\"SIM-METER\", wanted \"SIM-SUPPLY\"",
        "which cable",
    ];
    not_ready(&place, &said, &phrases);
}

#[test]
fn an_instrument_that_does_not_answer_is_named_with_what_was_asked() {
    not_ready_with(
        always(Kind::Ammeter, When::Message(1), Effect::Swallow),
        &["ammeter on ", "did not answer \"*IDN?\" within", "check that it is on"],
    );
}

#[test]
fn garbage_in_place_of_an_identity_is_quoted() {
    not_ready_with(
        always(Kind::Voltmeter, at("*IDN?"), Effect::Garbage(b"\x00\xff~~\n".to_vec())),
        &["voltmeter on ", "\"*IDN?\" with ", "check the baud rate"],
    );
}

/// Fresh from the mains, an instrument has its power-on bit set; to come in step late is no restart.
#[test]
fn a_reply_lost_among_the_first_words_is_made_up_for() {
    let place = Workplace::with(vec![once(Kind::Ammeter, at("*ESE?"), Effect::NoReply)]);
    place.give_up("bench-meter-current", Duration::from_millis(500));
    let said = ebbmark(place.folder(), &["bench", "check", "bench.toml"]);
    said.refuses(0, &["ammeter on ", "is in step again"]);
    assert!(said.out.contains("The bench is ready."), "{said}");
}

#[test]
fn a_set_up_that_the_instrument_reports_as_an_error_is_quoted() {
    not_ready_with(
        once(Kind::Ammeter, at("NPLC"), Effect::Refuse(ScpiError::UNDEFINED_HEADER)),
        &["ammeter on ", "-113", "Undefined header", "NPLC"],
    );
}

/// The second token of the round trip that proves the link is the one with which a run begins.
#[test]
fn an_instrument_that_restarts_just_before_the_run_is_found_out() {
    not_ready_with(
        once(Kind::Ammeter, at("*ESE 66"), Effect::Restart(Duration::ZERO)),
        &["ammeter on ", "has restarted", "test the board again"],
    );
}

#[test]
fn an_output_that_does_not_go_off_is_found_before_the_run() {
    let place = Workplace::with(vec![always(
        Kind::Supply,
        at("OUTP OFF"),
        Effect::Refuse(ScpiError::SETTINGS_CONFLICT),
    )]);
    place.bench.world().with(|world| world.set_output(true));
    let said = place.test(&[]);
    said.refuses(5, &["THE OUTPUT MAY STILL BE ON", "supply on ", "did not take \"OUTP OFF\""]);
    assert!(place.bench.output() && place.runs().is_empty(), "{said}");

    let checked = ebbmark(place.folder(), &["bench", "check", "bench.toml"]);
    checked.refuses(5, &["THE OUTPUT MAY STILL BE ON"]);
    assert!(checked.out.contains("The bench is not ready."), "{checked}");
}

#[test]
fn a_calibration_that_is_over_is_noted_with_instrument_and_date() {
    let place = Workplace::new();
    let roles = "roles = [\"ammeter\"]\n";
    place.edit("bench.toml", roles, &format!("{roles}calibration_due = 2001-02-03\n"));
    let port = place.bench.port(Kind::Voltmeter).expect("a port").display().to_string();
    // Somebody else's port ends the run at once; the note comes all the same.
    let _other = serialport::new(&port, 9600).open().expect("a free port");
    let said = place.test(&[]);
    not_ready(&place, &said, &["note: the calibration of ammeter was due 2001-02-03", "voltmeter on "]);
    assert_eq!(said.err.matches("calibration").count(), 1, "{said}");
}
