//! Our commands read by an SCPI parser that others wrote, and its replies and errors read by us.
//!
//! The crate `scpi` 1.0 parses headers, long and short, and parameters by SCPI-1999 and IEEE 488.2, and writes replies
//! and errors its own way. A small supply and meter is built on it here; what it must know is taken from the
//! definitions that come with the program.

#![expect(clippy::expect_used, reason = "helpers of tests fail as tests do")]

mod device;

use crate::scripted::DEADLINE;
use device::{Supply, TREE, served};
use ebbmark::bench::Bench;
use ebbmark::bench::serial::connect;
use ebbmark::clock::Clock;
use ebbmark::instrument::bench_file::{BenchFile, BenchInstrument, Fixture, Identity};
use ebbmark::instrument::definition::{Definition, Meter, Role, Source, builtin, builtin_names};
use ebbmark::instrument::scpi::{DeviceError, ErrorClass, Number};
use ebbmark::procedure::{Action, Event};
use ebbmark::trace::Current;
use ebbmark::units::{Amps, Volts};
use scpi::Context;
use std::collections::BTreeSet;
use std::time::Duration;

/// The mnemonics of the tree; capitals are the short form.
const MNEMONICS: [&str; 16] = [
    "SYSTem",
    "ERRor",
    "OUTPut",
    "STATus",
    "QUEStionable",
    "CONDition",
    "MEASure",
    "CURRent",
    "VOLTage",
    "CONFigure",
    "READ",
    "SENSe",
    "RANGe",
    "NPLCycles",
    "SOURce",
    "PROTection",
];

/// The command with each mnemonic of its header written out.
fn long_form(command: &str) -> String {
    let (header, rest) = command.find([' ', '?']).map_or((command, ""), |end| command.split_at(end));
    let long = |short: &str| {
        let is_short_of =
            |full: &&&str| full.trim_end_matches(|letter: char| letter.is_ascii_lowercase()) == short;
        MNEMONICS.iter().find(is_short_of).map_or_else(|| short.to_owned(), |full| full.to_uppercase())
    };
    header.split(':').map(long).collect::<Vec<_>>().join(":") + rest
}

fn source_commands(source: &Source) -> Vec<String> {
    let commands = &source.commands;
    let mut all = source.setup.clone();
    all.extend([
        commands.set_voltage.with(5.97),
        commands.ask_voltage.clone(),
        commands.set_current.with(0.35),
        commands.ask_current.clone(),
        commands.set_over_voltage.with(9.2),
        commands.ask_over_voltage.clone(),
        commands.output_on.clone(),
        commands.output_off.clone(),
        commands.ask_output.clone(),
    ]);
    all.extend(commands.ask_limited.iter().map(|limited| limited.query.clone()));
    all.extend(commands.ask_limited.iter().filter_map(|limited| limited.since.clone()));
    all
}

fn meter_commands<Q: ebbmark::units::Quantity>(meter: &Meter<Q>) -> Vec<String> {
    let mut all = meter.setup.clone();
    all.push(meter.read.clone());
    all.extend(meter.short.iter().flat_map(|short| [short.begin.clone(), short.end.clone()]));
    for range in meter.range.iter() {
        all.extend(meter.ranges.iter().map(|one| range.set.with(one.full_scale.si())));
        all.push(range.ask.clone());
    }
    all
}

/// Every command this program sends to an instrument of this definition.
fn commands(definition: &Definition) -> Vec<String> {
    let mut all: Vec<String> =
        ["*IDN?", "*ESE 17", "*ESE?", "*ESR?", "*CLS", "*STB?", "SYST:ERR?"].map(str::to_owned).into();
    all.extend(definition.setup.clone());
    all.extend(definition.local.clone());
    all.extend(definition.source.iter().flat_map(source_commands));
    all.extend(definition.ammeter.iter().flat_map(meter_commands));
    all.extend(definition.voltmeter.iter().flat_map(meter_commands));
    all
}

fn read_builtin(name: &str) -> Definition {
    let text = builtin(name).expect("it comes with the program");
    Definition::read(name, text).unwrap_or_else(|problems| panic!("{problems}"))
}

#[test]
fn every_command_of_every_definition_is_understood_in_long_and_short_form() {
    assert_eq!(long_form("SENS:CURR:RANG 0.1"), "SENSE:CURRENT:RANGE 0.1");
    let mut seen = BTreeSet::new();
    for name in builtin_names() {
        for command in commands(&read_builtin(name)) {
            for form in [command.clone(), long_form(&command), long_form(&command).to_lowercase()] {
                let mut supply = Supply::default();
                let mut reply = Vec::new();
                let outcome = TREE.run(form.as_bytes(), &mut supply, &mut Context::default(), &mut reply);
                assert_eq!(outcome, Ok(()), "{name}: {form:?}");
                assert_eq!(!reply.is_empty(), form.contains('?'), "{name}: {form:?} answers {reply:?}");
                seen.insert(form);
            }
        }
    }
    assert!(seen.contains("VOLTAGE:PROTECTION 9.2") && seen.contains("SENS:CURR:RANG 1E-5"), "{seen:?}");
}

/// Otherwise the parser would prove nothing: SCPI-1999, volume 1, 6.2.1 allows the long and the exact short form only.
#[test]
fn the_outside_parser_refuses_what_is_no_form_of_a_mnemonic() {
    for wrong in ["VOLTA 1", "VOL 1", "SENS:CUR:RANG?", "OUTPU ON", "MEAS:CURR", "VOLT 1.2E", "VOLT 1,2"] {
        let outcome =
            TREE.run(wrong.as_bytes(), &mut Supply::default(), &mut Context::default(), &mut Vec::new());
        assert!(outcome.is_err(), "{wrong:?}");
    }
}

#[test]
fn its_replies_and_errors_are_read() {
    let served = served();
    let mut session = served.session();
    let greeting = session.greet(&Identity::default()).expect("it is greeted");
    assert_eq!(greeting.identity.to_string(), "EXAMPLE,PS-30,0,1.0");
    for (question, number) in [
        ("MEAS:CURR?", Number::Value(2.4e-6)),
        ("MEASURE:VOLTAGE:DC?", Number::Value(5.96)),
        ("READ?", Number::Overload),
        ("OUTP?", Number::Value(0.0)),
        ("STAT:QUES:COND?", Number::Value(1.0)),
        ("STAT:QUES?", Number::Value(1.0)),
    ] {
        assert_eq!(session.query_number(question), Ok(number), "{question}");
    }
    for (wrong, code, class) in [
        ("VOLT 99", -222, ErrorClass::Execution),
        ("VOLTA 1", -113, ErrorClass::Command),
        ("OUTP MAYBE", -224, ErrorClass::Execution),
        ("VOLT", -109, ErrorClass::Command),
        ("VOLT 1,2", -108, ErrorClass::Command),
        ("VOLT \"one\"", -104, ErrorClass::Command),
    ] {
        session.command(wrong).expect("it is sent");
        let errors = session.errors().expect("the queue is read");
        let seen: Vec<(i32, ErrorClass)> = errors.iter().map(|error| (error.code, error.class())).collect();
        assert_eq!(seen, [(code, class)], "{wrong}: {errors:?}");
        assert!(errors.iter().all(|error: &DeviceError| !error.text.is_empty()));
    }
}

#[test]
fn a_run_is_carried_out_on_it() {
    let served = served();
    let mut definition = read_builtin("source-measure-unit");
    definition.timing.reply_deadline = DEADLINE;
    definition.serial.settle = Duration::ZERO;
    let unit = BenchInstrument {
        name: "unit".to_owned(),
        definition,
        port: served.place.port.clone(),
        roles: [Role::Source, Role::Ammeter, Role::Voltmeter].into(),
        identity: Identity { maker: Some("Example".to_owned()), ..Identity::default() },
        calibration_due: None,
        calibrated: None,
    };
    let bench = BenchFile::new("test", "Bench of a test", Fixture::default(), vec![unit]).expect("all roles");
    let work = async {
        let mut bench =
            connect(&bench, Volts(8.4), Clock::real()).await.unwrap_or_else(|error| panic!("{error}"));
        bench.begin_run().await.expect("fit for a run");
        let mut events = Vec::new();
        for action in [
            Action::Protect { over_voltage: Volts(9.2), current_limit: Amps(0.35) },
            Action::SetVolts(Volts(5.97)),
            Action::OutputOn,
            Action::Range(Amps(5e-6)),
            Action::LimitCurrent(Amps(0.001)),
            Action::OutputOff,
        ] {
            events.push(bench.perform(&action).await);
        }
        (events, bench.perform(&Action::Read).await)
    };
    let runtime = tokio::runtime::Builder::new_current_thread().enable_time().build().expect("a runtime");
    let (events, reading) = runtime.block_on(work);
    assert_eq!(events, vec![Event::Done; 6]);
    let Event::Reading(sample) = reading else { panic!("{reading:?}") };
    assert_eq!((sample.current, sample.sense), (Current::Value(Amps(2.4e-6)), Some(Volts(5.96))));
    assert_eq!((sample.limited, sample.range), (Some(true), Some(Amps(1e-5))));
}
