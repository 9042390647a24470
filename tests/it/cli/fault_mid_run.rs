//! Faults that strike while the board is on: the output goes off, the run is kept as INVALID with all it measured.

use super::Said;
use super::workplace::{Workplace, always, at, once};
use ebbmark::analysis::FindingCode;
use ebbmark::sim::device::{Kind, ScpiError};
use ebbmark::sim::link_faults::{Effect, Lasting, LinkFault, When};
use ebbmark::trace::{FaultKind, OutputState, Stop};
use ebbmark::units::Amps;
use ebbmark::verdict::Outcome;
use rustix::fs::{Mode, OFlags};
use std::fs::File;
use std::io::Write;
use std::time::Duration;

/// How long an instrument is waited for that does not answer. A thread of a busy computer may stand still for half of
/// it.
const WAIT: Duration = Duration::from_secs(1);

/// Longer than that.
const TOO_LATE: Duration = Duration::from_millis(1600);

/// A test of the board during which something happens while it is on and being read.
fn struck(place: &mut Workplace, strike: impl FnOnce(&mut Workplace)) -> Said {
    let running = place.test_under_way(&["--format", "json"]);
    strike(place);
    running.end()
}

/// The run is invalid for this reason and no other; the output is truly off, and what was measured is kept.
#[track_caller]
fn invalid(place: &Workplace, said: &Said, kind: FaultKind, phrases: &[&str]) {
    said.ended(3);
    assert!(!place.bench.output(), "the output is on\n{said}");
    let (run, trace) = place.kept();
    assert_eq!((run.outcome, trace.ending.output), (Outcome::Invalid, OutputState::Off), "{said}");
    let Stop::Fault(fault) = &trace.ending.stop else { panic!("{:?}\n{said}", trace.ending) };
    assert_eq!(fault.kind, kind, "{fault}");
    assert!(trace.samples.iter().filter(|sample| sample.current.amps() > Some(Amps(0.1))).count() > 3);
    let found =
        run.findings.iter().find(|finding| finding.code == FindingCode::BenchFault).expect("a finding");
    for phrase in phrases {
        assert!(found.text.contains(phrase), "no {phrase:?} in {:?}", found.text);
    }
    let json = said.json();
    assert_eq!((&json["outcome"], &json["output"]), (&"INVALID".into(), &"off".into()), "{said}");
    let told = json["findings"].as_array().expect("findings").iter();
    assert_eq!(told.filter(|finding| finding["text"] == found.text.as_str()).count(), 1, "{said}");
}

/// The same with a fault that has the program wait for an instrument in vain.
#[track_caller]
fn invalid_after_waiting(fault: LinkFault, wait: Duration, kind: FaultKind, phrases: &[&str]) {
    let mut place = Workplace::new();
    let definition = match fault.instrument {
        Kind::Ammeter => "bench-meter-current",
        Kind::Voltmeter | Kind::LoadVoltmeter => "bench-meter-voltage",
        Kind::Supply | Kind::SourceMeasureUnit => "programmable-supply",
    };
    place.give_up(definition, wait);
    let said = struck(&mut place, |place| place.bench.inject(fault));
    invalid(&place, &said, kind, phrases);
}

#[track_caller]
fn invalid_after(fault: LinkFault, kind: FaultKind, phrases: &[&str]) {
    let mut place = Workplace::new();
    let said = struck(&mut place, |place| place.bench.inject(fault));
    invalid(&place, &said, kind, phrases);
}

#[test]
fn a_reply_that_is_lost() {
    let fault = once(Kind::Voltmeter, at("READ?"), Effect::NoReply);
    invalid_after_waiting(
        fault,
        WAIT,
        FaultKind::NoReply,
        &["voltmeter on ", "did not answer \"READ?\" within 1000 ms"],
    );
}

#[test]
fn an_instrument_that_falls_silent() {
    let fault = LinkFault {
        instrument: Kind::Ammeter,
        when: When::After(Duration::ZERO),
        lasting: Lasting::Always,
        effect: Effect::Swallow,
    };
    invalid_after_waiting(
        fault,
        // The program tries for a dozen times this long to bring the link in step.
        WAIT / 2,
        FaultKind::NoReply,
        &["ammeter on ", "did not answer", "check that it is on"],
    );
}

#[test]
fn a_reply_that_comes_late() {
    let fault = once(Kind::Ammeter, at("READ?"), Effect::LateReply(TOO_LATE));
    invalid_after_waiting(
        fault,
        WAIT,
        FaultKind::NoReply,
        &["ammeter on ", "did not answer \"READ?\" within 1000 ms"],
    );
}

/// The answer comes while the output is being switched off over the same port, and is not taken for its read-back.
#[test]
fn a_late_reply_of_the_supply_does_not_stand_for_output_off() {
    let fault = once(Kind::Supply, at("VOLT?"), Effect::LateReply(TOO_LATE));
    invalid_after_waiting(
        fault,
        WAIT,
        FaultKind::NoReply,
        &["supply on ", "did not answer \"VOLT?\" within 1000 ms"],
    );
}

#[test]
fn a_reply_that_is_cut_is_no_number() {
    let fault = once(Kind::Voltmeter, at("READ?"), Effect::CutReply(TOO_LATE));
    invalid_after_waiting(
        fault,
        WAIT,
        FaultKind::BadReply,
        &["voltmeter on ", "no line end", "the reply is not used"],
    );
}

#[test]
fn garbage_is_quoted() {
    let fault = once(Kind::Voltmeter, at("READ?"), Effect::Garbage(b"7.\x00~4x\n".to_vec()));
    invalid_after_waiting(
        fault,
        WAIT,
        FaultKind::BadReply,
        &["voltmeter on ", "\"READ?\" with ", "wanted a number"],
    );
}

/// SCPI-1999 vol. 1, 7.2.1.4: 9.9E37 stands for infinity, which is how a meter says that its range is exceeded.
#[test]
fn an_overload_of_the_voltmeter() {
    let fault = once(Kind::Voltmeter, at("READ?"), Effect::Garbage(b"9.9E37\n".to_vec()));
    invalid_after(
        fault,
        FaultKind::Overload,
        &["voltmeter on ", "overload", "check its range and the wiring"],
    );
}

/// The instrument says itself what it did not like; a technician reads it in the result.
#[test]
fn a_protection_that_is_refused_with_an_error_in_the_queue() {
    let fault = once(Kind::Supply, at("VOLT:PROT "), Effect::Refuse(ScpiError::SETTINGS_CONFLICT));
    let place = Workplace::with(vec![fault]);
    let said = place.test(&[]);
    said.ended(3);
    assert!(!place.bench.output(), "the output is on\n{said}");
    assert_eq!(place.kept().0.outcome, Outcome::Invalid);
    let said_by_supply = "-221 \"Settings conflict\"";
    for phrase in
        ["INVALID", "did not take \"VOLT:PROT 8.82\"", said_by_supply, "Look at what is named above"]
    {
        assert!(said.out.contains(phrase), "no {phrase:?} in\n{said}");
    }
}

/// A second hand on the line of the ammeter, there before the program takes the port for itself. What it sends the
/// meter does not know, so that an error waits in its queue; the readings are answered all the same.
fn second_hand(place: &Workplace) -> File {
    let port = place.bench.port(Kind::Ammeter).expect("a port");
    rustix::fs::open(port, OFlags::WRONLY | OFlags::NOCTTY, Mode::empty()).expect("a free port").into()
}

#[test]
fn an_error_that_waits_in_a_queue_and_changes_no_reply() {
    let mut place = Workplace::new();
    let mut hand = second_hand(&place);
    let said = struck(&mut place, |_| hand.write_all(b"NO:SUCH:HEADER\n").expect("room"));
    let phrases = ["ammeter on ", "-113 \"Undefined header\"", "after \"this run\""];
    invalid(&place, &said, FaultKind::InstrumentError, &phrases);
}

/// What is found at the end of a run does not hide that the output may be on.
#[test]
fn an_error_in_a_queue_and_an_output_that_does_not_go_off() {
    let mut place = Workplace::new();
    let mut hand = second_hand(&place);
    let running = place.test_under_way(&[]);
    hand.write_all(b"NO:SUCH:HEADER\n").expect("room");
    place.bench.inject(always(Kind::Supply, at("OUTP OFF"), Effect::Refuse(ScpiError::SETTINGS_CONFLICT)));
    let said = running.end();
    said.refuses(5, &["THE OUTPUT MAY STILL BE ON"]);
    assert!(place.bench.output(), "or this test shows nothing");
    let (run, trace) = place.kept();
    assert_eq!((run.outcome, trace.ending.output), (Outcome::Invalid, OutputState::MayBeOn));
    assert!(matches!(trace.ending.stop, Stop::Fault(_)), "{:?}", trace.ending);
    place.bench.hang_up(Kind::Supply);
}

/// The old value is kept, and an error is queued.
#[test]
fn a_set_point_that_is_refused() {
    let fault = once(Kind::Supply, at("VOLT "), Effect::Refuse(ScpiError::OUT_OF_RANGE));
    invalid_after(fault, FaultKind::NotTaken, &["supply on ", "did not take \"VOLT ", "reads back", "-222"]);
}

/// The old value is kept, and nothing is said of it.
#[test]
fn a_set_point_that_is_lost() {
    let fault = once(Kind::Supply, at("VOLT "), Effect::Swallow);
    invalid_after(fault, FaultKind::NotTaken, &["did not take \"VOLT ", "it reports no error"]);
}

#[test]
fn a_supply_that_restarts() {
    let mut place = Workplace::new();
    let said = struck(&mut place, |place| place.bench.restart(Kind::Supply));
    invalid(&place, &said, FaultKind::Restarted, &["supply on ", "has restarted", "check its mains lead"]);
}

#[test]
fn a_meter_that_restarts() {
    let mut place = Workplace::new();
    let said = struck(&mut place, |place| place.bench.restart(Kind::Ammeter));
    invalid(&place, &said, FaultKind::Restarted, &["ammeter on ", "has restarted"]);
}

#[test]
fn a_meter_that_is_unplugged() {
    let mut place = Workplace::new();
    let said = struck(&mut place, |place| place.bench.hang_up(Kind::Voltmeter));
    invalid(&place, &said, FaultKind::LinkLost, &["voltmeter on ", "the link is lost", "check the cable"]);
}

/// Nothing can switch the output off any more, and that is what the program says first and last.
#[test]
fn a_supply_that_is_unplugged_may_still_be_on() {
    let mut place = Workplace::new();
    let said = struck(&mut place, |place| place.bench.hang_up(Kind::Supply));
    said.refuses(5, &["THE OUTPUT MAY STILL BE ON", "at the mains"]);
    assert!(place.bench.output(), "or this test shows nothing");
    let (run, trace) = place.kept();
    assert_eq!((run.outcome, trace.ending.output), (Outcome::Invalid, OutputState::MayBeOn));
    assert!(trace.samples.len() > 3);
    let json = said.json();
    assert_eq!((&json["outcome"], &json["output"]), (&"INVALID".into(), &"may_be_on".into()));
    assert_eq!(json["findings"][0]["code"], "output_may_be_on", "{said}");
}

#[test]
fn a_supply_that_refuses_to_switch_off_may_still_be_on() {
    let mut place = Workplace::new();
    let running = place.test_under_way(&[]);
    place.bench.inject(always(Kind::Supply, at("OUTP OFF"), Effect::Refuse(ScpiError::SETTINGS_CONFLICT)));
    running.signal("TERM");
    let said = running.end();
    said.refuses(5, &["THE OUTPUT MAY STILL BE ON"]);
    let lines: Vec<&str> = said.out.lines().collect();
    assert!(lines[0].starts_with("THE OUTPUT MAY STILL BE ON"), "{said}");
    assert!(said.out.trim_end().ends_with("before you touch it."), "{said}");
    assert_eq!(place.kept().0.outcome, Outcome::Aborted);
    assert!(place.bench.output(), "or this test shows nothing");
    place.bench.hang_up(Kind::Supply);
}

/// A switch that leaks so much that the range for the off current cannot show it is a board's fault, not the bench's.
#[test]
fn an_overload_of_the_ammeter_on_the_off_range() {
    let place = Workplace::on_board(|board| board.leakage = Amps(300e-6));
    let said = place.test(&["--format", "json"]);
    assert!(!place.bench.output(), "the output is on\n{said}");
    let (run, trace) = place.kept();
    let overloads = trace.samples.iter().filter(|sample| sample.current.amps().is_none()).count();
    assert!(overloads > 0, "or this test shows nothing\n{said}");
    assert_eq!(run.outcome, Outcome::Fail, "{said}");
    said.ended(1);
}
