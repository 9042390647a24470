//! A session with an instrument that misbehaves, over a real pseudo-terminal.

#![expect(clippy::expect_used, reason = "helpers of tests fail as tests do")]

use crate::scripted::{Act, DEADLINE, Device, SILENCE, Scripted, definition, off, say, spoiling};
use ebbmark::instrument::bench_file::Identity;
use ebbmark::instrument::error::{InstrumentError, Place};
use ebbmark::instrument::scpi::Number;
use ebbmark::instrument::serial_port;
use ebbmark::instrument::session::{Session, Setting};
use std::sync::Arc;

fn volts(volts: f64) -> Setting {
    Setting {
        command: format!("VOLT {volts}"),
        question: "VOLT?".to_owned(),
        wanted: volts,
        tolerance: 0.006,
        deadline: DEADLINE,
    }
}

fn number(session: &mut Session, question: &str) -> Option<f64> {
    session.query_number(question).expect("a number").value()
}

#[test]
fn settings_are_confirmed_and_numbers_read() {
    let supply = Scripted::well_behaved();
    let mut session = supply.greeted();
    session.set(&volts(5.97)).expect("it takes");
    assert_eq!(number(&mut session, "VOLT?"), Some(5.97));
    session.refuse_errors("VOLT 5.97").expect("nothing to report");
    drop(session);
    // The front panel is given back.
    supply.heard_up_to("SYST:LOC");
}

#[test]
fn no_reply_names_the_question_and_the_next_one_is_answered_rightly() {
    let supply = spoiling("CURR?", 1, Vec::new());
    let mut session = supply.greeted();
    let error = session.query_number("CURR?").expect_err("no reply");
    assert_eq!(
        error.to_string(),
        format!(
            "{} did not answer \"CURR?\" within {} ms; check that it is on, its cable and its baud rate",
            supply.place,
            SILENCE.as_millis()
        )
    );
    assert_eq!(number(&mut session, "VOLT?"), Some(0.0));
}

#[test]
fn a_late_reply_never_answers_the_next_question() {
    let late = vec![Act::Wait(SILENCE + SILENCE / 2), Act::Say("7.77\n".to_owned())];
    let supply = spoiling("CURR?", 1, late);
    let mut session = supply.greeted();
    assert!(matches!(session.query_number("CURR?"), Err(InstrumentError::NoReply { .. })));
    assert_eq!(number(&mut session, "VOLT?"), Some(0.0));
    assert_eq!(number(&mut session, "CURR?"), Some(0.1));
}

#[test]
fn a_reply_later_than_the_quiet_span_is_caught_by_the_token() {
    let late = vec![Act::Wait(SILENCE * 7 / 2), Act::Say("7.77\n".to_owned())];
    let supply = spoiling("CURR?", 1, late);
    let mut session = supply.greeted();
    assert!(matches!(session.query_number("CURR?"), Err(InstrumentError::NoReply { .. })));
    assert_eq!(number(&mut session, "VOLT?"), Some(0.0));
    assert!(
        supply.count("*ESE?") > 2,
        "one token at the greeting, a lost one and a good one: {:?}",
        supply.heard()
    );
}

#[test]
fn a_cut_reply_is_never_a_number() {
    let supply = spoiling("CURR?", 1, vec![Act::Say("+3.8500".to_owned())]);
    let mut session = supply.greeted();
    match session.query_number("CURR?") {
        Err(InstrumentError::CutReply { read, .. }) => assert_eq!(read, "+3.8500"),
        other => panic!("a cut reply became {other:?}"),
    }
    assert_eq!(number(&mut session, "CURR?"), Some(0.1));
}

/// The second half comes after the deadline: taken for a reply of its own, `0E-06` would be a perfect zero.
#[test]
fn the_tail_of_a_cut_reply_is_not_a_reply() {
    let halves =
        vec![Act::Say("+3.8500".to_owned()), Act::Wait(SILENCE * 3 / 2), Act::Say("0E-06\n".to_owned())];
    let supply = spoiling("CURR?", 1, halves);
    let mut session = supply.greeted();
    assert!(matches!(session.query_number("CURR?"), Err(InstrumentError::CutReply { .. })));
    assert_eq!(number(&mut session, "CURR?"), Some(0.1));
}

#[test]
fn garbage_is_shown_and_refused() {
    let supply = spoiling("CURR?", 1, vec![Act::Say("\u{7f}x+1.2E-\n".to_owned())]);
    let mut session = supply.greeted();
    let error = session.query_number("CURR?").expect_err("garbage");
    assert!(
        error.to_string().contains("answered \"CURR?\" with \"\\u{7f}x+1.2E-\", wanted a number"),
        "{error}"
    );
    assert_eq!(number(&mut session, "CURR?"), Some(0.1));
}

#[test]
fn a_second_line_that_nobody_asked_for_is_dropped() {
    let supply = spoiling("CURR?", 1, vec![Act::Say("0.25\n9.99\n".to_owned())]);
    let mut session = supply.greeted();
    assert_eq!(number(&mut session, "CURR?"), Some(0.25));
    assert_eq!(number(&mut session, "VOLT?"), Some(0.0));
}

#[test]
fn an_overload_is_not_a_number() {
    let supply = spoiling("CURR?", 1, say("+9.90000E+37"));
    let mut session = supply.greeted();
    assert_eq!(session.query_number("CURR?"), Ok(Number::Overload));
}

#[test]
fn a_full_error_queue_is_emptied_and_reported() {
    let supply = Scripted::start(Device::default(), |device, line| match line {
        "FOO 1" => {
            device.fail("-113,\"Undefined header\"");
            device.fail("-350,\"Queue overflow\"")
        }
        line => device.obey(line),
    });
    let mut session = supply.greeted();
    session.command("FOO 1").expect("it is sent");
    let error = session.refuse_errors("FOO 1").expect_err("two errors");
    assert_eq!(
        error.to_string(),
        format!(
            "{} reported -113 \"Undefined header\" (command error), -350 \"Queue overflow\" (device error) \
             after \"FOO 1\"; check the command in the definition and the value",
            supply.place
        )
    );
    session.refuse_errors("nothing").expect("the queue is empty");
}

#[test]
fn an_endless_error_queue_is_given_up_after_thirty() {
    let supply = Scripted::start(Device::default(), |device, line| match line {
        "SYST:ERR?" => say("-300,\"Device-specific error\""),
        line => device.obey(line),
    });
    assert_eq!(supply.greeted().errors().map(|errors| errors.len()), Ok(30));
}

#[test]
fn a_rejected_setting_is_told_with_old_and_new_value() {
    let supply = Scripted::start(Device::default(), |device, line| match line {
        "VOLT 99" => device.fail("-222,\"Data out of range\""),
        line => device.obey(line),
    });
    let mut session = supply.greeted();
    session.set(&volts(5.97)).expect("it takes");
    let error = session.set(&volts(99.0)).expect_err("it does not take");
    assert_eq!(
        error.to_string(),
        format!(
            "{} did not take \"VOLT 99\": it reads back \"5.97\" (before: 5.97); it reports -222 \"Data out of \
             range\" (execution error); nothing else must be set at the instrument during a run",
            supply.place
        )
    );
}

#[test]
fn a_restart_is_told_from_a_rejected_setting() {
    let supply = Scripted::start(Device::default(), |device, line| match line {
        "VOLT 5" => {
            *device = Device::default();
            Vec::new()
        }
        line => device.obey(line),
    });
    let mut session = supply.greeted();
    session.set(&volts(5.97)).expect("it takes");
    let error = session.set(&volts(5.0)).expect_err("it restarted");
    assert!(error.to_string().contains("has restarted (\"VOLT?\" reads 0, was 5.97)"), "{error}");
}

#[test]
fn a_restart_while_out_of_step_is_not_hidden_by_bringing_it_in_step() {
    let mut asked = false;
    let supply = Scripted::start(Device::default(), move |device, line| match line {
        "CURR?" if !asked => {
            asked = true;
            *device = Device::default();
            Vec::new()
        }
        line => device.obey(line),
    })
    .impatiently();
    let mut session = supply.greeted();
    assert!(matches!(session.query("CURR?"), Err(InstrumentError::NoReply { .. })));
    assert!(matches!(session.query("VOLT?"), Err(InstrumentError::Restarted { .. })));
    assert_eq!(number(&mut session, "VOLT?"), Some(0.0));
}

#[test]
fn a_cable_pulled_in_the_middle_of_a_question_is_noticed_at_once() {
    let supply = spoiling("CURR?", 1, vec![Act::HangUp]);
    let mut session = supply.greeted();
    for _ in 0..2 {
        let error = session.query("CURR?").expect_err("nobody there");
        assert!(matches!(error, InstrumentError::LinkLost { .. }), "{error}");
    }
    assert!(session.switch_off(&off()).is_err(), "nothing confirms that the output is off");
}

#[test]
fn a_link_that_cannot_be_brought_in_step_is_lost() {
    let mut deaf = false;
    let supply = Scripted::start(Device::default(), move |device, line| {
        deaf |= line == "CURR?";
        if deaf { Vec::new() } else { device.obey(line) }
    })
    .impatiently();
    let mut session = supply.greeted();
    assert!(matches!(session.query("CURR?"), Err(InstrumentError::NoReply { .. })));
    let error = session.query("VOLT?").expect_err("no token returns");
    assert!(error.to_string().contains("questions and answers cannot be brought in step"), "{error}");
}

#[test]
fn an_instrument_that_echoes_is_understood() {
    let supply = Scripted::start(Device::default(), |device, line| {
        let mut acts = vec![Act::Say(format!("{line}\r\n"))];
        acts.extend(device.obey(line));
        acts
    });
    let mut session = supply.session();
    let greeting = session.greet(&Identity::default()).expect("echo or not");
    assert!(greeting.echoes);
    session.set(&volts(5.97)).expect("it takes");
    assert_eq!(number(&mut session, "VOLT?"), Some(5.97));
    session.check_step().expect("in step");
    session.switch_on("OUTP ON", &off()).expect("on");
    session.switch_off(&off()).expect("off");
}

#[test]
fn another_instrument_than_expected_is_refused_and_left_alone() {
    let supply = Scripted::well_behaved();
    let expected = |maker: &str, model: &str, serial: &str| Identity {
        maker: Some(maker.to_owned()),
        model: Some(model.to_owned()),
        serial: Some(serial.to_owned()),
    };
    for (wrong, field) in [
        (expected("OTHER", "PS-30", "SN0042"), "maker is \"EXAMPLE\", wanted \"OTHER\""),
        (expected("EXAMPLE", "PS-31", "SN0042"), "model is \"PS-30\", wanted \"PS-31\""),
        (expected("EXAMPLE", "PS-30", "SN0043"), "serial number is \"SN0042\", wanted \"SN0043\""),
    ] {
        let error = supply.session().greet(&wrong).expect_err("another one");
        assert!(error.to_string().contains(field), "{error}");
    }
    assert!(supply.heard().iter().all(|line| line == "*IDN?"), "only asked who it is: {:?}", supply.heard());
    supply.session().greet(&expected("example", "ps-30", "SN0042")).expect("the right one");
}

#[test]
fn a_first_answer_spoilt_by_opening_the_port_is_asked_for_again() {
    let supply = spoiling("*IDN?", 1, vec![Act::Say("\u{1}\u{2}boot 1.0\n".to_owned())]);
    let identity = supply.session().greet(&Identity::default()).expect("the second answer is good").identity;
    assert_eq!(identity.model, "PS-30");
}

#[test]
fn an_unknown_port_and_a_taken_one_are_told_apart() {
    let place = Arc::new(Place { instrument: "supply".to_owned(), port: "/dev/no-such-port".to_owned() });
    let error = serial_port::open(&place, &definition().serial).err().expect("no such port");
    assert!(matches!(error, InstrumentError::UnknownPort { .. }), "{error}");
    assert!(error.to_string().contains("supply on /dev/no-such-port: there is no such port; "), "{error}");

    let supply = Scripted::well_behaved();
    let _first = supply.session();
    let error = supply.try_session().err().expect("taken");
    assert!(matches!(error, InstrumentError::PortTaken { .. }), "{error}");

    let plain = tempfile::NamedTempFile::new().expect("a file");
    let place = Arc::new(Place { instrument: "supply".to_owned(), port: plain.path().display().to_string() });
    let error = serial_port::open(&place, &definition().serial).err().expect("not a port");
    assert!(matches!(error, InstrumentError::NotOpened { .. }), "{error}");
}
