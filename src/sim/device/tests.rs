//! A device as a whole, against the rules of IEEE 488.2 and SCPI-1999.

use super::*;
use crate::profile::Profile;
use crate::sim::{Condition, JumpingClock, World};
use proptest::prelude::*;
use std::sync::Arc;
use std::time::Duration;

pub(in crate::sim) fn setup(seed: u64) -> Setup {
    setup_of(Condition::Good, seed)
}

fn setup_of(condition: Condition, seed: u64) -> Setup {
    let text = include_str!("../../../profiles/river-node.toml");
    let profile = Profile::read("river-node.toml", text).expect("a sound profile");
    Setup::new(&profile, condition, seed)
}

fn device(kind: Kind) -> (Device, SharedWorld) {
    let setup = setup(7);
    let clock = Arc::new(JumpingClock::default());
    (Device::new(kind, &setup), SharedWorld::new(World::new(&setup), clock))
}

/// What a device answers to each line; no answer is an empty string.
fn talk(kind: Kind, lines: &[&str]) -> Vec<String> {
    let (mut device, world) = device(kind);
    lines.iter().map(|line| device.execute(line, &world).unwrap_or_default()).collect()
}

fn last(kind: Kind, lines: &[&str]) -> String {
    talk(kind, lines).pop().unwrap_or_default()
}

#[test]
fn what_is_set_is_read_back_in_every_spelling() {
    for (set, ask) in [
        ("VOLT 6.5", "VOLT?"),
        ("volt 6.5", "SOURCE:VOLTAGE:LEVEL:IMMEDIATE:AMPLITUDE?"),
        (":SOUR:VOLT:LEV 6500E-3", ":VOLT:AMPL?"),
        ("OUTP OFF;VOLT 6.5", "*OPC;VOLT?"),
        ("VOLT1 6.5", "SOUR1:VOLT?"),
        ("\tVOLT \t6.5 ", " VOLT? "),
    ] {
        assert_eq!(last(Kind::Supply, &[set, ask]), "+6.5000000E+00", "{set} {ask}");
    }
}

/// SCPI-1999 vol. 1, 6.2.1 (forms) and vol. 2, 21.8.9 (codes).
#[test]
fn a_message_not_understood_sets_nothing_and_leaves_its_code() {
    for (message, code) in [
        ("VOLTA 5", "-113,\"Undefined header\""),
        ("VOLTAG 5", "-113,\"Undefined header\""),
        ("OUTP:VOLT 5", "-113,\"Undefined header\""),
        ("MEAS:VOLT", "-113,\"Undefined header\""),
        ("SYST:REM?", "-113,\"Undefined header\""),
        ("*FOO", "-113,\"Undefined header\""),
        ("VOLT", "-109,\"Missing parameter\""),
        ("VOLT 5,6", "-108,\"Parameter not allowed\""),
        ("*CLS 1", "-108,\"Parameter not allowed\""),
        ("SYST:REM 1", "-108,\"Parameter not allowed\""),
        ("VOLT 5 V", "-131,\"Invalid suffix\""),
        ("VOLT2 5", "-114,\"Header suffix out of range\""),
        ("VOLT 1000", "-222,\"Data out of range\""),
        ("VOLT -1", "-222,\"Data out of range\""),
        ("VOLT 'five'", "-158,\"String data not allowed\""),
    ] {
        assert_eq!(
            talk(Kind::Supply, &["VOLT 3", message, "VOLT?", "SYST:ERR?", "SYST:ERR?"])[2..],
            ["+3.0000000E+00", code, "0,\"No error\""],
            "{message}"
        );
    }
}

#[test]
fn a_command_error_ends_its_message_and_an_execution_error_does_not() {
    assert_eq!(last(Kind::Supply, &["VOLT 5;FOO 1;VOLT 6", "VOLT?"]), "+5.0000000E+00");
    assert_eq!(
        last(Kind::Supply, &["VOLT 5;VOLT 1000;CURR 0.5", "CURR?;:VOLT?"]),
        "+5.0000000E-01;+5.0000000E+00"
    );
}

#[test]
fn the_error_queue_is_bounded_and_says_that_errors_were_lost() {
    let mut lines = vec!["FOO"; 20];
    lines.extend(["SYST:ERR?"; 11]);
    let replies = talk(Kind::Ammeter, &lines);
    assert_eq!(replies[20], "-113,\"Undefined header\"");
    assert_eq!(replies[29], "-350,\"Queue overflow\"");
    assert_eq!(replies[30], "0,\"No error\"");
}

/// IEEE 488.2, 11.5.1.1: bits 7 PON, 5 CME, 4 EXE, 0 OPC; reading clears.
#[test]
fn the_event_register_tells_power_on_errors_and_completion() {
    assert_eq!(
        talk(Kind::Supply, &["*ESR?", "*ESR?", "FOO", "*ESR?", "VOLT 1000", "*ESR?", "*OPC", "*ESR?"]),
        ["128", "0", "", "32", "", "16", "", "1"]
    );
}

/// IEEE 488.2, 11.2 and SCPI-1999 vol. 1, 9: bits 2 errors, 4 MAV, 5 ESB, 6 MSS.
#[test]
fn the_status_byte_sums_up_what_is_enabled() {
    let lines = [
        "*CLS",
        "*ESE 32;*SRE 255",
        "*SRE?",
        "*STB?",
        "FOO",
        "*STB?",
        "*OPC?;*STB?",
        "*CLS",
        "*STB?",
        "*ESE?",
    ];
    assert_eq!(talk(Kind::Supply, &lines)[2..], ["191", "0", "", "100", "1;116", "", "0", "32"]);
    assert_eq!(last(Kind::Supply, &["*ESE 256", "SYST:ERR?"]), "-222,\"Data out of range\"");
}

/// IEEE 488.2, 6.5.7.5: the identity has no end but the message's, so no answer can follow it.
#[test]
fn a_question_after_the_identity_is_refused() {
    let replies = talk(Kind::Supply, &["*IDN?;VOLT?", "SYST:ERR?", "*OPC?;*IDN?"]);
    assert_eq!(replies[0].split(',').count(), 4);
    assert_eq!(replies[1], "-440,\"Query UNTERMINATED after indefinite response\"");
    assert!(replies[2].starts_with("1;EBBMARK,"), "{replies:?}");
}

#[test]
fn min_and_max_are_values_and_can_be_asked_for() {
    let replies = talk(Kind::Supply, &["VOLT? MAX", "VOLT MAX", "VOLT?", "VOLT MINimum", "VOLT?", "VOLT? 5"]);
    assert_eq!(replies[0], replies[2]);
    assert_eq!(replies[4], "+0.0000000E+00");
    assert_eq!(replies[5], "");
}

#[test]
fn a_reset_switches_off_and_forgets_settings_but_not_errors() {
    let lines = ["VOLT 5;:OUTP ON;:FOO", "OUTP?", "*RST", "OUTP?", "VOLT?", "SYST:ERR?"];
    assert_eq!(
        talk(Kind::Supply, &lines)[1..],
        ["1", "", "0", "+0.0000000E+00", "-113,\"Undefined header\""]
    );
}

#[test]
fn a_restart_switches_off_and_shows_in_the_power_on_bit() {
    let (mut device, world) = device(Kind::Supply);
    for line in ["*CLS", "VOLT 5", "OUTP ON"] {
        assert_eq!(device.execute(line, &world), None);
    }
    assert!(world.with(|world| world.output()));
    device.restart(&world);
    assert!(!world.with(|world| world.output()));
    assert_eq!(device.execute("*ESR?;:VOLT?", &world).as_deref(), Some("128;+0.0000000E+00"));
}

#[test]
fn a_reading_takes_its_integration_time() {
    let (mut device, world) = device(Kind::Ammeter);
    device.execute("CONF:CURR 1", &world);
    let before = world.now();
    device.execute("READ?", &world);
    assert_eq!(world.now() - before, Duration::from_millis(20));
    device.execute("CURR:NPLC 10;:READ?", &world);
    assert_eq!(world.now() - before, Duration::from_millis(220));
}

/// The burden of a small range would make a working board chatter; one that never trips stays on.
#[test]
fn a_current_above_the_fixed_range_is_an_overload_and_auto_range_finds_its_range() {
    let setup = setup_of(Condition::NeverTrips, 7);
    let world = SharedWorld::new(World::new(&setup), Arc::new(JumpingClock::default()));
    Device::new(Kind::Supply, &setup).execute("VOLT 7.6;:OUTP ON", &world);
    let mut ammeter = Device::new(Kind::Ammeter, &setup);
    let mut ask = |line: &str| {
        world.pass(Duration::from_secs(1));
        ammeter.execute(line, &world).unwrap_or_default()
    };
    ask("CONF:CURR 1E-3");
    assert_eq!(ask("CURR:RANG?"), "+1.0000000E-03");
    assert_eq!(ask("READ?"), "+9.9000000E+37");
    assert_eq!(ask("FETC?"), "+9.9000000E+37");
    let expected = 7.6 / 55.0;
    for range in ["CURR:RANG 1", "CURR:RANG 1E-3;RANG:AUTO ON", "CURR:RANG 3;RANG:AUTO ON"] {
        ask(range);
        let amps: f64 = ask("READ?").parse().expect("a number");
        assert!((amps - expected).abs() < 0.02 * expected, "{range}: {amps}");
        assert_eq!(ask("CURR:RANG?"), "+1.0000000E+00", "{range}");
    }
}

#[test]
fn a_source_measure_unit_supplies_and_measures_through_one_port() {
    let (mut unit, world) = device(Kind::SourceMeasureUnit);
    for line in ["VOLT 7.6", "CURR 0.35", "SENS:CURR:RANG 1", "OUTP ON", "SENS:CURR:NPLC 1"] {
        assert_eq!(unit.execute(line, &world), None);
    }
    world.pass(Duration::from_secs(1));
    let mut ask = |line: &str| unit.execute(line, &world).unwrap_or_default();
    let volts: f64 = ask("MEAS:VOLT?").parse().expect("a number");
    let amps: f64 = ask("MEAS:CURR?").parse().expect("a number");
    assert!((volts - 7.6).abs() < 0.05 && (amps - 7.6 / 55.0).abs() < 0.005, "{volts} {amps}");
    assert_eq!(ask("SENS:CURR:RANG?"), "+1.0000000E+00");
    assert_eq!(ask("SYST:ERR?"), "0,\"No error\"");
}

#[test]
fn the_voltmeter_at_the_load_has_ranges_of_its_own() {
    let setup = setup(7).with_source_measure_unit();
    let world = SharedWorld::new(World::new(&setup), Arc::new(JumpingClock::default()));
    let mut meter = Device::new(Kind::LoadVoltmeter, &setup);
    assert_eq!(meter.execute("VOLT:RANG 100;RANG?", &world).as_deref(), Some("+1.0000000E+02"));
}

#[test]
fn the_last_reading_is_stale_until_there_is_one() {
    let replies = talk(Kind::Voltmeter, &["FETC?", "SYST:ERR?", "INIT", "FETC?"]);
    assert_eq!(replies[1], "-230,\"Data corrupt or stale\"");
    assert!(replies[3].parse::<f64>().is_ok(), "{replies:?}");
}

proptest! {
    #[test]
    fn no_line_makes_a_device_panic(line in ".{0,60}") {
        talk(Kind::SourceMeasureUnit, &[&line, "SYST:ERR?"]);
    }

    #[test]
    fn no_line_of_scpi_pieces_makes_a_device_panic_or_sets_more_than_the_supply_can(
        pieces in prop::collection::vec(prop::sample::select(vec![
            "VOLT", "SOUR", ":", ";", "?", " ", "1e400", "-5", "99", "MAX", "INF", ",", "\"", "'", "#", "*", "*IDN?",
            "OUTP ON", "PROT", "SENS:CURR:RANG", "NPLC", "READ?", "e", ".", "V", "2", "é", "(",
        ]), 0..20)
    ) {
        let (mut device, world) = device(Kind::SourceMeasureUnit);
        let line = pieces.concat();
        device.execute(&line, &world);
        let volts = world.with(|world| world.volts());
        prop_assert!((0.0..=setup(7).supply.max_voltage.0).contains(&volts.0), "{line}: {volts}");
    }
}
