//! Switching off: whatever happens, the output goes off and is read back, or it is said that it may be on.

use crate::scripted::{Act, DEADLINE, Device, Scripted, off, spoiling};
use ebbmark::instrument::error::InstrumentError;
use ebbmark::instrument::port::Instrument;
use ebbmark::instrument::scpi::Number;

#[test]
fn the_output_goes_off_when_the_session_ends_with_it_on() {
    let supply = Scripted::well_behaved();
    let instrument = Instrument::start(supply.greeted()).expect("a thread");
    let runtime = tokio::runtime::Builder::new_current_thread().build().expect("a runtime");
    runtime
        .block_on(instrument.ask(|session| session.switch_on("OUTP ON", &off())).wait())
        .expect("the output is on");
    drop(instrument);
    let heard = supply.heard_up_to("SYST:LOC");
    assert_eq!(heard[heard.len() - 4..], ["VOLT 0", "OUTP OFF", "OUTP?", "SYST:LOC"]);
}

#[test]
fn the_output_goes_off_when_the_thread_of_the_port_panics() {
    let supply = Scripted::well_behaved();
    let instrument = Instrument::start(supply.greeted()).expect("a thread");
    let runtime = tokio::runtime::Builder::new_current_thread().build().expect("a runtime");
    let outcome = runtime.block_on(
        instrument
            .ask(|session| {
                session.switch_on("OUTP ON", &off())?;
                if session.place().port.is_empty() {
                    Ok(())
                } else {
                    panic!("a mistake in this program, on purpose")
                }
            })
            .wait(),
    );
    assert!(matches!(outcome, Err(InstrumentError::LinkLost { .. })), "{outcome:?}");
    drop(instrument);
    let heard = supply.heard_up_to("SYST:LOC");
    assert_eq!(heard[heard.len() - 4..], ["VOLT 0", "OUTP OFF", "OUTP?", "SYST:LOC"]);
}

#[test]
fn switching_off_out_of_step_sends_the_order_before_anything_else_and_confirms_it() {
    let supply = spoiling("CURR?", 1, Vec::new());
    let mut session = supply.greeted();
    session.switch_on("OUTP ON", &off()).expect("on");
    assert!(session.query("CURR?").is_err());
    session.switch_off(&off()).expect("off and confirmed");
    let heard = supply.heard();
    let after = &heard[heard.iter().position(|line| line == "CURR?").expect("asked") + 1..];
    assert_eq!(after[..2], ["VOLT 0", "OUTP OFF"], "{after:?}");
    assert_eq!(after.last().map(String::as_str), Some("OUTP?"));
}

#[test]
fn an_output_that_stays_on_is_never_reported_off() {
    let supply = Scripted::start(Device::default(), |device, line| match line {
        "OUTP OFF" => device.fail("-221,\"Settings conflict\""),
        line => device.obey(line),
    });
    let mut session = supply.greeted();
    session.switch_on("OUTP ON", &off()).expect("on");
    let error = session.switch_off(&off()).expect_err("it stays on");
    assert!(
        error.to_string().contains("did not take \"OUTP OFF\": it reads back \"1\" (before: on)"),
        "{error}"
    );
}

#[test]
fn a_job_nobody_waits_for_is_skipped_or_finished_and_the_link_stays_in_step() {
    let supply = Scripted::start(Device::default(), |device, line| match line {
        "CURR?" => vec![Act::Wait(DEADLINE / 4), Act::Say("0.25\n".to_owned())],
        line => device.obey(line),
    });
    let instrument = Instrument::start(supply.greeted()).expect("a thread");
    let runtime = tokio::runtime::Builder::new_current_thread().enable_time().build().expect("a runtime");
    let volts = runtime.block_on(async {
        let slow = instrument.ask(|session| session.query("CURR?")).wait();
        assert!(tokio::time::timeout(DEADLINE / 10, slow).await.is_err(), "given up half way");
        drop(instrument.ask(|session| session.command("VOLT 9")));
        instrument.ask(|session| session.query_number("VOLT?")).wait().await
    });
    assert_eq!(volts, Ok(Number::Value(0.0)));
    assert_eq!(supply.count("VOLT 9"), 0, "a job that had not begun is skipped");
    assert_eq!(supply.count("*ESE?"), 1, "the link never was out of step");
}
