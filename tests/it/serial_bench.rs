//! The serial bench with instruments on pseudo-terminals that behave well or badly.

#![expect(clippy::expect_used, reason = "helpers of tests fail as tests do")]

mod burst;

use crate::scripted::{Act, DEADLINE, Device, Scripted, say};
use ebbmark::bench::Bench;
use ebbmark::bench::serial::{ConnectError, SerialBench, check, connect};
use ebbmark::clock::Clock;
use ebbmark::instrument::bench_file::{BenchFile, BenchInstrument, Fixture, Identity};
use ebbmark::instrument::definition::{Definition, Role, builtin};
use ebbmark::instrument::error::InstrumentError;
use ebbmark::procedure::{Action, Event};
use ebbmark::trace::{BenchFault, Current, FaultKind, Sample};
use ebbmark::units::{Amps, Volts};
use std::sync::Arc;
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::Duration;

const MAXIMUM: Volts = Volts(8.4);

/// The definition called `name`, with deadlines fit for a test.
fn definition(name: &str) -> Definition {
    let text = builtin(name).expect("it comes with the program");
    let mut definition = Definition::read(name, text).unwrap_or_else(|problems| panic!("{problems}"));
    definition.timing.reply_deadline = DEADLINE;
    definition.timing.reset_deadline = DEADLINE;
    definition.timing.range_deadline = DEADLINE;
    definition.serial.settle = Duration::ZERO;
    definition
}

fn seat(scripted: &Scripted, name: &str, roles: &[Role]) -> BenchInstrument {
    BenchInstrument {
        name: scripted.place.instrument.clone(),
        definition: definition(name),
        port: scripted.place.port.clone(),
        roles: roles.iter().copied().collect(),
        identity: Identity::default(),
        calibration_due: None,
        calibrated: None,
    }
}

/// One instrument in the three roles of a source-measure unit.
fn unit(scripted: &Scripted) -> BenchInstrument {
    seat(scripted, "source-measure-unit", &[Role::Source, Role::Ammeter, Role::Voltmeter])
}

fn bench_of(instruments: Vec<BenchInstrument>) -> BenchFile {
    BenchFile::new("test", "Bench of a test", Fixture::default(), instruments)
        .expect("a source and an ammeter")
}

fn block_on<T>(work: impl Future<Output = T>) -> T {
    tokio::runtime::Builder::new_current_thread().enable_time().build().expect("a runtime").block_on(work)
}

async fn connected(scripted: &Scripted) -> SerialBench {
    connect(&bench_of(vec![unit(scripted)]), MAXIMUM, Clock::real())
        .await
        .unwrap_or_else(|error| panic!("{error}"))
}

/// The events of these actions, in order.
fn events(scripted: &Scripted, actions: &[Action]) -> Vec<Event> {
    block_on(async {
        let mut bench = connected(scripted).await;
        let mut events = Vec::new();
        for action in actions {
            events.push(bench.perform(action).await);
        }
        events
    })
}

fn last_fault(scripted: &Scripted, actions: &[Action]) -> (FaultKind, String) {
    match events(scripted, actions).pop() {
        Some(Event::Failed(fault)) => (fault.kind, fault.text),
        other => panic!("wanted a fault, got {other:?}"),
    }
}

fn last_sample(scripted: &Scripted, actions: &[Action]) -> Sample {
    match events(scripted, actions).pop() {
        Some(Event::Reading(sample)) => sample,
        other => panic!("wanted a reading, got {other:?}"),
    }
}

/// A unit that answers `question` with `reply`.
fn answering(question: &'static str, reply: &'static str) -> Scripted {
    Scripted::start(
        Device::default(),
        move |device, line| {
            if line == question { say(reply) } else { device.obey(line) }
        },
    )
}

#[test]
fn a_run_is_carried_out_confirmed_and_ends_with_the_output_off() {
    let unit = Scripted::well_behaved();
    let all = [
        Action::Protect { over_voltage: Volts(9.2), current_limit: Amps(0.35) },
        Action::SetVolts(Volts(5.97)),
        Action::OutputOn,
        Action::Range(Amps(0.2)),
        Action::Read,
        Action::Range(Amps(5e-6)),
        Action::Read,
        Action::LimitCurrent(Amps(0.01)),
        Action::OutputOff,
    ];
    let mut happened = events(&unit, &all);
    let readings: Vec<Event> = vec![happened.remove(6), happened.remove(4)];
    assert_eq!(happened, vec![Event::Done; 7]);
    let Event::Reading(low) = readings[0] else { panic!("{readings:?}") };
    let Event::Reading(high) = readings[1] else { panic!("{readings:?}") };
    assert_eq!((high.set, high.sense, high.load), (Volts(5.97), Some(Volts(5.96)), None));
    assert_eq!((high.current, high.limited), (Current::Value(Amps(0.125)), Some(false)));
    assert_eq!((high.range, low.range), (Some(Amps(1.0)), Some(Amps(1e-5))));
    assert!(low.at > high.at);

    let heard = unit.heard();
    let first = |line: &str| {
        heard.iter().position(|heard| heard == line).unwrap_or_else(|| panic!("{line} not sent"))
    };
    assert!(first("OUTP OFF") < first("*RST"), "off before anything else is sent: {heard:?}");
    assert!(first("VOLT:PROT 9.2") < first("VOLT 5.97") && first("VOLT 5.97") < first("OUTP ON"));
    assert_eq!(unit.count("SENS:CURR:RANG 1"), 1, "a range that stands is not sent again");
    assert_eq!(heard[heard.len() - 3..], ["VOLT 0", "OUTP OFF", "OUTP?"]);
}

#[test]
fn an_overloaded_ammeter_is_a_reading_and_an_overloaded_voltmeter_a_fault() {
    assert_eq!(last_sample(&answering("MEAS:CURR?", "9.9E37"), &[Action::Read]).current, Current::OVERLOAD);
    let (kind, text) = last_fault(&answering("MEAS:VOLT?", "OL"), &[Action::Read]);
    assert_eq!(kind, FaultKind::Overload, "{text}");
    let (kind, text) = last_fault(&answering("MEAS:CURR?", "9.91E37"), &[Action::Read]);
    assert_eq!(kind, FaultKind::BadReply, "{text}");
}

#[test]
fn the_current_limit_is_read_from_the_register() {
    assert_eq!(last_sample(&answering("STAT:QUES:COND?", "3"), &[Action::Read]).limited, Some(true));
    assert_eq!(last_sample(&answering("STAT:QUES:COND?", "2"), &[Action::Read]).limited, Some(false));
    let since = last_sample(&answering("STAT:QUES?", "1"), &[Action::Read]);
    assert_eq!((since.limited, since.was_limited), (Some(false), Some(true)), "it came and went");
}

#[test]
fn a_refused_setting_stops_the_run_and_the_output_still_goes_off() {
    let supply = Scripted::start(Device::default(), |device, line| match line {
        "VOLT 5.96" => device.fail("-222,\"Data out of range\""),
        line => device.obey(line),
    });
    let steps =
        [Action::SetVolts(Volts(5.97)), Action::OutputOn, Action::SetVolts(Volts(5.96)), Action::OutputOff];
    let happened = events(&supply, &steps);
    assert_eq!([&happened[0], &happened[1], &happened[3]], [&Event::Done; 3]);
    let Event::Failed(fault) = &happened[2] else { panic!("{happened:?}") };
    assert_eq!(fault.kind, FaultKind::NotTaken);
    assert!(fault.text.contains("reads back \"5.97\" (before: 5.97)"), "{fault}");
}

#[test]
fn what_the_instrument_cannot_do_is_never_sent() {
    let unit = Scripted::well_behaved();
    for action in [
        Action::SetVolts(Volts(20.5)),
        Action::SetVolts(Volts(f64::NAN)),
        Action::LimitCurrent(Amps(2.0)),
        Action::Range(Amps(2.0)),
        Action::Protect { over_voltage: Volts(40.0), current_limit: Amps(0.1) },
    ] {
        let (kind, text) = last_fault(&unit, std::slice::from_ref(&action));
        assert_eq!(kind, FaultKind::Internal, "{action:?}: {text}");
    }
    let sent = unit.heard();
    let refused = ["20.5", "9.91E37", "CURR 2", "RANG 2", "PROT 40"];
    assert!(!sent.iter().any(|line| refused.iter().any(|value| line.ends_with(value))), "{sent:?}");
}

#[test]
fn a_meter_that_restarts_is_noticed_within_a_second_of_bench_time() {
    let restarted = Arc::new(AtomicBool::new(false));
    let now = Arc::clone(&restarted);
    let unit = Scripted::start(Device::default(), move |device, line| {
        if now.swap(false, Ordering::Relaxed) {
            *device = Device::default();
        }
        device.obey(line)
    });
    let kinds = block_on(async {
        let clock = Clock::faster(1000.0);
        let mut bench =
            connect(&bench_of(vec![self::unit(&unit)]), MAXIMUM, clock).await.expect("a good bench");
        bench.begin_run().await.expect("a good start");
        std::thread::sleep(clock.wall(Duration::from_secs(2)));
        let before = bench.perform(&Action::Read).await;
        restarted.store(true, Ordering::Relaxed);
        std::thread::sleep(clock.wall(Duration::from_secs(2)));
        [before, bench.perform(&Action::Read).await]
    });
    assert!(matches!(&kinds[0], Event::Reading(_)), "{kinds:?}");
    assert!(matches!(&kinds[1], Event::Failed(fault) if fault.kind == FaultKind::Restarted), "{kinds:?}");
}

/// What the end of a run finds after `strike` befell the unit at a reading in its middle.
fn end_of_run(strike: impl Fn(&mut Device) + Send + 'static) -> Result<(), BenchFault> {
    let unit = Scripted::start(Device::default(), move |device, line| {
        if line == "MEAS:CURR?" {
            strike(device);
        }
        device.obey(line)
    });
    block_on(async {
        let mut bench = connected(&unit).await;
        bench.begin_run().await.expect("a good start");
        assert!(matches!(bench.perform(&Action::Read).await, Event::Reading(_)), "nothing is noticed yet");
        assert_eq!(bench.perform(&Action::OutputOff).await, Event::Done);
        bench.end_run().await
    })
}

#[test]
fn an_error_or_a_restart_in_the_middle_of_a_run_is_found_at_its_end() {
    assert_eq!(end_of_run(|_| ()), Ok(()));
    let fault =
        end_of_run(|device| device.errors.push("-310,\"System error\"".to_owned())).expect_err("an error");
    assert_eq!(fault.kind, FaultKind::InstrumentError);
    assert!(
        fault.text.contains("reported -310 \"System error\" (device error) after \"this run\""),
        "{fault}"
    );
    let fault = end_of_run(|device| device.event_status |= 128).expect_err("a restart");
    assert_eq!(fault.kind, FaultKind::Restarted, "{fault}");
}

#[test]
fn a_wait_ends_when_its_time_has_come() {
    let unit = Scripted::well_behaved();
    block_on(async {
        let mut bench = connected(&unit).await;
        bench.begin_run().await.expect("a good start");
        for span in [Duration::ZERO, Duration::from_micros(500), Duration::from_millis(5)] {
            let until = bench.now() + span;
            assert_eq!(bench.perform(&Action::WaitUntil(until)).await, Event::Done);
            assert!(bench.now() >= until);
            // Generous: the machine may be busy. On an idle one the wait is late by some 60 µs.
            assert!(bench.now() < until + Duration::from_millis(500), "late by {:?}", bench.now() - until);
        }
    });
}

/// Each instrument answers only once both have been asked: in sequence, the first would never answer.
#[test]
fn instruments_on_different_ports_are_asked_together() {
    let asked = [Arc::new(AtomicBool::new(false)), Arc::new(AtomicBool::new(false))];
    let meeting = |own: usize| {
        let (own, other) = (Arc::clone(&asked[own]), Arc::clone(&asked[1 - own]));
        Scripted::start(Device::default(), move |device, line| {
            if line.starts_with("MEAS") || line == "READ?" {
                own.store(true, Ordering::Relaxed);
                let patience = Clock::real();
                while !other.load(Ordering::Relaxed) && patience.now() < DEADLINE * 2 {
                    std::thread::sleep(Duration::from_micros(200));
                }
            }
            device.obey(line)
        })
    };
    let (supply, meter) = (meeting(0), meeting(1));
    let seats = vec![
        seat(&supply, "source-measure-unit", &[Role::Source, Role::Ammeter]),
        seat(&meter, "source-measure-unit", &[Role::Voltmeter]),
    ];
    let event = block_on(async {
        let mut bench = connect(&bench_of(seats), MAXIMUM, Clock::real()).await.expect("a good bench");
        bench.perform(&Action::Read).await
    });
    assert!(matches!(event, Event::Reading(_)), "{event:?}");
}

#[test]
fn an_action_dropped_half_way_leaves_the_bench_usable() {
    let unit = Scripted::start(Device::default(), |device, line| match line {
        "MEAS:CURR?" => vec![Act::Wait(DEADLINE / 4), Act::Say("0.125\n".to_owned())],
        line => device.obey(line),
    });
    block_on(async {
        let mut bench = connected(&unit).await;
        assert_eq!(bench.perform(&Action::OutputOn).await, Event::Done);
        let half = tokio::time::timeout(DEADLINE / 10, bench.perform(&Action::Read)).await;
        assert!(half.is_err(), "the reading is slow");
        assert_eq!(bench.perform(&Action::OutputOff).await, Event::Done);
        assert!(matches!(bench.perform(&Action::Read).await, Event::Reading(_)));
    });
    assert_eq!(unit.count("*ESE?"), 1, "the link never was out of step");
}

#[test]
fn a_pulled_cable_is_told_and_the_output_is_not_reported_off() {
    let unit = Scripted::start(Device::default(), |device, line| match line {
        "MEAS:CURR?" => vec![Act::HangUp],
        line => device.obey(line),
    });
    let happened = events(&unit, &[Action::OutputOn, Action::Read, Action::OutputOff, Action::OutputOff]);
    assert_eq!(happened[0], Event::Done);
    for event in &happened[1..] {
        assert!(matches!(event, Event::Failed(fault) if fault.kind == FaultKind::LinkLost), "{event:?}");
    }
}

#[test]
fn the_output_goes_off_when_the_program_panics_with_it_on() {
    let unit = Scripted::well_behaved();
    let panicked = std::panic::catch_unwind(std::panic::AssertUnwindSafe(|| {
        block_on(async {
            let mut bench = connected(&unit).await;
            let on = bench.perform(&Action::OutputOn).await;
            panic!("a mistake elsewhere, on purpose, after {on:?}");
        });
    }));
    assert!(panicked.is_err());
    let heard = unit.heard_up_to("OUTP?");
    assert_eq!(heard[heard.len() - 4..], ["OUTP?", "VOLT 0", "OUTP OFF", "OUTP?"]);
}

#[test]
fn all_that_is_wrong_with_a_bench_is_told_at_once() {
    let (supply, meter) = (Scripted::well_behaved(), Scripted::well_behaved());
    let seats = vec![
        BenchInstrument {
            identity: Identity { model: Some("PS-31".to_owned()), ..Identity::default() },
            ..seat(&supply, "programmable-supply", &[Role::Source])
        },
        BenchInstrument {
            port: "/dev/no-such-port".to_owned(),
            ..seat(&meter, "bench-meter-current", &[Role::Ammeter])
        },
    ];
    let error = block_on(connect(&bench_of(seats), MAXIMUM, Clock::real())).err().expect("two mistakes");
    let ConnectError::Instruments { errors } = error else { panic!("{error}") };
    assert!(
        matches!(errors[..], [InstrumentError::WrongInstrument { .. }, InstrumentError::UnknownPort { .. }]),
        "{errors:?}"
    );
}

#[test]
fn a_setup_command_the_instrument_does_not_know_is_named() {
    let unit = Scripted::start(Device::default(), |device, line| match line {
        "SENS:CURR:NPLC 1" => device.fail("-113,\"Undefined header\""),
        line => device.obey(line),
    });
    let error = block_on(connect(&bench_of(vec![self::unit(&unit)]), MAXIMUM, Clock::real()))
        .err()
        .expect("an unknown command");
    assert!(error.to_string().contains("command error) after \"SENS:CURR:NPLC 1\""), "{error}");
}

#[test]
fn a_check_reports_on_every_instrument() {
    let unit = Scripted::start(
        Device { errors: vec!["-350,\"Queue overflow\"".to_owned()], ..Device::default() },
        |device, line| device.obey(line),
    );
    let seats = vec![
        self::unit(&unit),
        BenchInstrument { port: "/dev/no-such-port".to_owned(), ..self::unit(&unit) },
    ];
    let reports = block_on(check(&bench_of(seats), MAXIMUM, Clock::real()));
    assert!(matches!(reports[1], Err(InstrumentError::UnknownPort { .. })), "{reports:?}");
    let report = reports[0].as_ref().expect("the first is there");
    assert_eq!(report.greeting.identity.model, "PS-30");
    assert_eq!(report.greeting.old_errors.len(), 1);
    assert!(!report.greeting.echoes);
    assert!(report.round_trip > Duration::ZERO && report.round_trip < DEADLINE);
    assert_eq!(report.port_settings.as_deref(), Some("115200 baud 8N1, no handshake"));
}
