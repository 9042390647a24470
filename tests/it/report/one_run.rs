//! The result of one run, for the technician and for programs.

use crate::run_sample::{finding, finished, judged, moment, passing, subject, trace};
use ebbmark::analysis::{About, FindingCode};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::record::{Log, Run};
use ebbmark::report::{OUTPUT_MAY_BE_ON, Paint, Sheet, full, json, next_action, run_json, text};
use ebbmark::trace::OutputState;
use ebbmark::verdict::{Decision, Outcome, Verdict};
use serde_json::Value;
use std::path::Path;

/// The run a log would keep of `verdict`, with the output as given.
fn run(verdict: Verdict, output: OutputState) -> Run {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = Log::open(root.path(), "bench-1", &moment("2026-10-19T06:00:00Z")).expect("a new log").log;
    log.start(subject("RN000123"), moment("2026-10-19T14:22:33.250Z")).expect("ready");
    let mut trace = trace();
    trace.ending.output = output;
    let mut run = log.finish(&finished(verdict), &trace).expect("space left");
    run.identity.software.build = "0123456789ab".to_owned();
    run
}

fn shown(run: &Run) -> String {
    text(&Sheet::of(run).kept_in(Path::new("logs/bench-1")), Paint::Plain)
}

/// A verdict with one quantity out of line.
fn with(outcome: Outcome, name: QuantityName, value: f64, decision: Decision) -> Verdict {
    let mut verdict = passing();
    verdict.outcome = outcome;
    for judged_one in &mut verdict.judged {
        if judged_one.quantity.name == name {
            let expanded = judged_one.coverage_factor * judged_one.quantity.standard_uncertainty;
            *judged_one = judged(name, value, expanded, Some(decision));
        }
    }
    verdict
}

fn bench_fault() -> Verdict {
    let text = "The ammeter on /dev/ttyUSB1 gave no reply to \"READ?\" within 2.000 s at 6.200 V. Look at its plug \
                and its power first.";
    Verdict {
        outcome: Outcome::Invalid,
        judged: Vec::new(),
        findings: vec![finding(FindingCode::BenchFault, About::Bench, text)],
    }
}

#[test]
fn pass() {
    insta::assert_snapshot!(shown(&run(passing(), OutputState::Off)), @r#"
    ████   ███   ████  ████
    █   █ █   █ █     █
    ████  █████  ███   ███
    █     █   █     █     █
    █     █   █ ████  ████

    PASS   RN-204 revision C   serial number RN000123
    SIMULATED: no real board was measured (condition good, seed 7)

    quantity                measured ± U       limits          decision
    trip voltage            6.0004 ± 0.0016 V  5.88 to 6.12 V  pass
    re-enable voltage       6.4012 ± 0.0021 V  6.24 to 6.56 V  pass
    hysteresis              400.8 ± 2.6 mV     300 to 500 mV   pass
    on current              109.12 ± 0.12 mA                   -
    off current at 5.800 V  2.400 ± 0.031 µA   1 to 4 µA       pass
    U is the expanded uncertainty, coverage factor k = 2.

    Recorded as bench-1-20261019T142233Z-0001 in logs/bench-1

    Take the board off and scan the next one.
    "#);
}

#[test]
fn conditional_pass() {
    let verdict = with(Outcome::ConditionalPass, QuantityName::Trip, 6.1192, Decision::ConditionalPass);
    insta::assert_snapshot!(shown(&run(verdict, OutputState::Off)), @r#"
     ████  ███  █   █ ████  ███ █████ ███  ███  █   █  ███  █        ████   ███   ████  ████
    █     █   █ ██  █ █   █  █    █    █  █   █ ██  █ █   █ █        █   █ █   █ █     █
    █     █   █ █ █ █ █   █  █    █    █  █   █ █ █ █ █████ █        ████  █████  ███   ███
    █     █   █ █  ██ █   █  █    █    █  █   █ █  ██ █   █ █        █     █   █     █     █
     ████  ███  █   █ ████  ███   █   ███  ███  █   █ █   █ █████    █     █   █ ████  ████

    CONDITIONAL PASS   RN-204 revision C   serial number RN000123
    SIMULATED: no real board was measured (condition good, seed 7)

    quantity                measured ± U       limits          decision
    trip voltage            6.1192 ± 0.0016 V  5.88 to 6.12 V  conditional pass
    re-enable voltage       6.4012 ± 0.0021 V  6.24 to 6.56 V  pass
    hysteresis              400.8 ± 2.6 mV     300 to 500 mV   pass
    on current              109.12 ± 0.12 mA                   -
    off current at 5.800 V  2.400 ± 0.031 µA   1 to 4 µA       pass
    U is the expanded uncertainty, coverage factor k = 2.

    Recorded as bench-1-20261019T142233Z-0001 in logs/bench-1

    Take the board off and scan the next one. It passes with a note: trip voltage 6.119 V is inside its
    limits by less than the guard band.
    "#);
}

#[test]
fn fail_with_findings_about_the_board_first() {
    let mut verdict = with(Outcome::Fail, QuantityName::OffCurrent, 29.1e-6, Decision::Fail);
    verdict.findings = vec![
        finding(
            FindingCode::NoVoltmeter,
            About::Bench,
            "No voltmeter at the board: the drop in the leads is estimated from their resistance, 0.100 Ω.",
        ),
        finding(
            FindingCode::OffCurrentHigh,
            About::Board,
            "With the switch open the board takes 29.10 µA at 5.800 V, and 5.000 µA more for every volt: a path of \
             about 200.0 kΩ. Look at the pull-up of the gate first, then at flux under the switch.",
        ),
    ];
    insta::assert_snapshot!(shown(&run(verdict, OutputState::Off)), @r#"
    █████  ███  ███ █
    █     █   █  █  █
    ████  █████  █  █
    █     █   █  █  █
    █     █   █ ███ █████

    FAIL   RN-204 revision C   serial number RN000123
    SIMULATED: no real board was measured (condition good, seed 7)

    quantity                measured ± U       limits          decision
    trip voltage            6.0004 ± 0.0016 V  5.88 to 6.12 V  pass
    re-enable voltage       6.4012 ± 0.0021 V  6.24 to 6.56 V  pass
    hysteresis              400.8 ± 2.6 mV     300 to 500 mV   pass
    on current              109.12 ± 0.12 mA                   -
    off current at 5.800 V  29.100 ± 0.031 µA  1 to 4 µA       FAIL: high
    U is the expanded uncertainty, coverage factor k = 2.

    board: off current high
        With the switch open the board takes 29.10 µA at 5.800 V, and 5.000 µA more for every volt: a
        path of about 200.0 kΩ. Look at the pull-up of the gate first, then at flux under the switch.
    bench: no voltmeter
        No voltmeter at the board: the drop in the leads is estimated from their resistance, 0.100 Ω.

    Recorded as bench-1-20261019T142233Z-0001 in logs/bench-1

    Put the board aside with a fail tag: off current 29.10 µA is above 4 µA.
    "#);
}

#[test]
fn invalid() {
    insta::assert_snapshot!(shown(&run(bench_fault(), OutputState::Off)), @r#"
    ███ █   █ █   █  ███  █     ███ ████
     █  ██  █ █   █ █   █ █      █  █   █
     █  █ █ █ █   █ █████ █      █  █   █
     █  █  ██  █ █  █   █ █      █  █   █
    ███ █   █   █   █   █ █████ ███ ████

    INVALID   RN-204 revision C   serial number RN000123
    SIMULATED: no real board was measured (condition good, seed 7)

    bench: bench fault
        The ammeter on /dev/ttyUSB1 gave no reply to "READ?" within 2.000 s at 6.200 V. Look at its plug
        and its power first.

    Recorded as bench-1-20261019T142233Z-0001 in logs/bench-1

    The bench could not judge the board (bench fault). Look at what is named above, then test the same
    board again.
    "#);
}

#[test]
fn an_output_that_may_be_on_comes_first_and_last() {
    let shown = shown(&run(bench_fault(), OutputState::MayBeOn));
    insta::assert_snapshot!(shown, @r#"
    THE OUTPUT MAY STILL BE ON: switch the supply off at its own switch or at the mains, then measure
    zero volts at the board before you touch it.

    ███ █   █ █   █  ███  █     ███ ████
     █  ██  █ █   █ █   █ █      █  █   █
     █  █ █ █ █   █ █████ █      █  █   █
     █  █  ██  █ █  █   █ █      █  █   █
    ███ █   █   █   █   █ █████ ███ ████

    INVALID   RN-204 revision C   serial number RN000123
    SIMULATED: no real board was measured (condition good, seed 7)

    bench: bench fault
        The ammeter on /dev/ttyUSB1 gave no reply to "READ?" within 2.000 s at 6.200 V. Look at its plug
        and its power first.

    Recorded as bench-1-20261019T142233Z-0001 in logs/bench-1

    THE OUTPUT MAY STILL BE ON: switch the supply off at its own switch or at the mains, then measure
    zero volts at the board before you touch it.
    "#);
}

#[test]
fn no_instruction_about_the_board_stands_beside_an_output_that_may_be_on() {
    for verdict in [passing(), bench_fault()] {
        let run = run(verdict, OutputState::MayBeOn);
        assert_eq!(next_action(&Sheet::of(&run)), OUTPUT_MAY_BE_ON);
        assert!(!shown(&run).contains("Take the board off") && !shown(&run).contains("could not judge"));
    }
}

#[test]
fn colour_adds_nothing_but_colour() {
    let run = run(with(Outcome::Fail, QuantityName::Trip, 6.2, Decision::Fail), OutputState::MayBeOn);
    let sheet = Sheet::of(&run);
    let coloured = text(&sheet, Paint::Coloured);
    assert!(coloured.contains("\u{1b}[31m"), "{coloured:?}");
    assert_eq!(anstream::adapter::strip_str(&coloured).to_string(), text(&sheet, Paint::Plain));
}

#[test]
fn every_line_fits_into_100_columns() {
    for (name, value) in [
        (QuantityName::OffCurrent, 3.1e-10),
        (QuantityName::Trip, 6.125),
        (QuantityName::OffCurrent, -2.5e-5),
    ] {
        let verdict = with(Outcome::ConditionalFail, name, value, Decision::ConditionalFail);
        let shown = shown(&run(verdict, OutputState::MayBeOn));
        assert!(shown.lines().all(|line| line.chars().count() <= 100), "{shown}");
    }
}

/// The keys other programs rely on, and those added to them.
#[test]
fn the_json_has_exactly_these_keys() {
    let mut verdict = passing();
    verdict.findings = vec![finding(FindingCode::NeverTrips, About::Board, "...")];
    let text = run_json(&run(verdict, OutputState::Off));
    let value: Value = serde_json::from_str(&text).expect("JSON");
    let keys =
        |value: &Value| -> Vec<String> { value.as_object().expect("an object").keys().cloned().collect() };
    let mut fixed = vec!["schema", "outcome", "board", "revision", "serial_number", "quantities", "findings"];
    fixed.extend(["output", "run", "station", "attempt", "started", "ended", "simulated"]);
    fixed.sort_unstable();
    assert_eq!(keys(&value), fixed);
    let mut quantity = vec!["name", "value", "unit", "standard_uncertainty", "coverage_factor"];
    quantity.extend(["expanded_uncertainty", "min", "max", "decision", "budget"]);
    quantity.sort_unstable();
    assert_eq!(keys(&value["quantities"][0]), quantity);
    assert_eq!(
        value["findings"],
        serde_json::json!([{ "code": "never_trips", "about": "board", "text": "..." }])
    );
    assert_eq!((&value["schema"], &value["outcome"]), (&Value::from(1), &Value::from("PASS")));
}

#[test]
fn what_is_not_known_is_absent_from_the_json() {
    let run = run(passing(), OutputState::Off);
    let value: Value = serde_json::from_str(&run_json(&run)).expect("JSON");
    let on_current = &value["quantities"][3];
    assert_eq!(on_current["name"], "on_current");
    assert!(["min", "max", "decision"].iter().all(|key| on_current.get(key).is_none()), "{on_current}");
}

/// A trace that was judged without a bench: there is no record, and perhaps no serial number.
#[test]
fn a_trace_without_a_record_has_the_same_json_but_for_what_is_not_known() {
    let text_of_profile = include_str!("../../../profiles/river-node.toml");
    let profile = Profile::read("profiles/river-node.toml", text_of_profile).expect("a checked profile");
    let verdict = passing();
    let sheet = Sheet::of_trace(&profile, None, &verdict, OutputState::Off);
    let recorded = run(passing(), OutputState::Off);
    let mut expected: Value = serde_json::from_str(&run_json(&recorded)).expect("JSON");
    let keys = expected.as_object_mut().expect("an object");
    for unknown in ["serial_number", "run", "station", "attempt", "started", "ended", "simulated"] {
        assert!(keys.remove(unknown).is_some(), "{unknown}");
    }
    assert_eq!(serde_json::from_str::<Value>(&json(&sheet)).expect("JSON"), expected);
    let shown = text(&sheet, Paint::Plain);
    assert!(!shown.contains("Recorded") && !shown.contains("serial number"), "{shown}");
}

#[test]
fn the_json_of_a_pass() {
    insta::assert_snapshot!(run_json(&run(passing(), OutputState::Off)), @r#"{"schema":1,"outcome":"PASS","board":"RN-204","revision":"C","serial_number":"RN000123","quantities":[{"name":"trip","value":6.0004,"unit":"V","standard_uncertainty":0.0008,"coverage_factor":2.0,"expanded_uncertainty":0.0016,"min":5.88,"max":6.12,"decision":"pass","budget":[{"source":"last digit","standard_uncertainty":0.0008,"unit":"V","distribution":"normal","sensitivity":1.0,"contribution":0.0008,"share":1.0}]},{"name":"re_enable","value":6.4012,"unit":"V","standard_uncertainty":0.00105,"coverage_factor":2.0,"expanded_uncertainty":0.0021,"min":6.24,"max":6.56,"decision":"pass","budget":[{"source":"last digit","standard_uncertainty":0.00105,"unit":"V","distribution":"normal","sensitivity":1.0,"contribution":0.00105,"share":1.0}]},{"name":"hysteresis","value":0.4008,"unit":"V","standard_uncertainty":0.0013,"coverage_factor":2.0,"expanded_uncertainty":0.0026,"min":0.3,"max":0.5,"decision":"pass","budget":[{"source":"last digit","standard_uncertainty":0.0013,"unit":"V","distribution":"normal","sensitivity":1.0,"contribution":0.0013,"share":1.0}]},{"name":"on_current","value":0.10912,"unit":"A","standard_uncertainty":0.00006,"coverage_factor":2.0,"expanded_uncertainty":0.00012,"budget":[{"source":"last digit","standard_uncertainty":0.00006,"unit":"A","distribution":"normal","sensitivity":1.0,"contribution":0.00006,"share":1.0}]},{"name":"off_current","value":2.4e-6,"unit":"A","standard_uncertainty":1.55e-8,"coverage_factor":2.0,"expanded_uncertainty":3.1e-8,"at":5.8,"min":1e-6,"max":4e-6,"decision":"pass","budget":[{"source":"last digit","standard_uncertainty":1.55e-8,"unit":"A","distribution":"normal","sensitivity":1.0,"contribution":1.55e-8,"share":1.0}]}],"findings":[],"output":"off","run":"bench-1-20261019T142233Z-0001","station":"bench-1","attempt":1,"started":{"utc":"2026-10-19T14:22:33.25Z","local":"2026-10-19T16:22:33.25+02:00"},"ended":{"utc":"2026-10-19T14:22:51.5Z","local":"2026-10-19T16:22:51.5+02:00"},"simulated":{"condition":"good","seed":7}}"#);
}

#[test]
fn one_run_in_full() {
    let run = run(passing(), OutputState::Off);
    let shown = full(&run, Path::new("logs/bench-1"), Paint::Plain);
    let (facts, _result) = shown.split_once("█").expect("the banner follows");
    let trace = run.trace.as_ref().expect("kept");
    let facts = facts.replace(&trace.sha256, "<sha256>").replace(&trace.length.to_string(), "<length>");
    insta::assert_snapshot!(facts, @r#"
    run             bench-1-20261019T142233Z-0001
    board           RN-204 revision C
    serial number   RN000123
    batch           42
    attempt         1
    started         2026-10-19T16:22:33.25+02:00 (2026-10-19T14:22:33.25Z)
    ended           2026-10-19T16:22:51.5+02:00 (2026-10-19T14:22:51.5Z)
    duration        18.250 s
    station         bench-1
    bench           sim
    operator        Ada
    profile         profiles/river-node.toml
    profile sha256  abababababababababababababababababababababababababababababababab
    software        ebbmark 0.1.0 (0123456789ab)
    trace           <length> bytes at byte 0 of 2026-10.traces.jsonl
    trace sha256    <sha256>

    instrument       serial number  firmware  port        calibration due  plays
    EBBMARK SIM-PSU  1              0.1       /dev/pts/3  2027-01-31       source, voltmeter

    Budget of the trip voltage, 6.00040 V
    influence   estimate  u(x)    distribution  nu   c  |c| u(x)  share
    last digit  -         800 µV  normal        inf  1  800 µV    100.0 %
    together                                    inf     800 µV    100.0 %
    U = 1.6 mV with k = 2.

    Budget of the re-enable voltage, 6.4012 V
    influence   estimate  u(x)    distribution  nu   c  |c| u(x)  share
    last digit  -         1.0 mV  normal        inf  1  1.0 mV    100.0 %
    together                                    inf     1.0 mV    100.0 %
    U = 2.1 mV with k = 2.

    Budget of the hysteresis, 400.8 mV
    influence   estimate  u(x)    distribution  nu   c  |c| u(x)  share
    last digit  -         1.3 mV  normal        inf  1  1.3 mV    100.0 %
    together                                    inf     1.3 mV    100.0 %
    U = 2.6 mV with k = 2.

    Budget of the on current, 109.120 mA
    influence   estimate  u(x)   distribution  nu   c  |c| u(x)  share
    last digit  -         60 µA  normal        inf  1  60 µA     100.0 %
    together                                   inf     60 µA     100.0 %
    U = 120 µA with k = 2.

    Budget of the off current, 2.400 µA
    influence   estimate  u(x)   distribution  nu   c  |c| u(x)  share
    last digit  -         15 nA  normal        inf  1  15 nA     100.0 %
    together                                   inf     15 nA     100.0 %
    U = 31 nA with k = 2.
    "#);
}
