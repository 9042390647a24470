//! Many runs at once: the table of `log show`, JSON and CSV.

use crate::run_sample::{finding, finished, moment, passing, subject, trace};
use ebbmark::analysis::{About, FindingCode};
use ebbmark::profile::QuantityName;
use ebbmark::record::{Log, Run};
use ebbmark::report::{Filter, list, run_json, runs_csv, runs_json};
use ebbmark::verdict::Outcome;

/// A pass, a fail of another board, and a retest of the first that never ended.
fn runs() -> Vec<Run> {
    let root = tempfile::tempdir().expect("a temporary folder");
    let open = |at| Log::open(root.path(), "bench-1", &moment(at)).expect("nobody else has it");
    let mut log = open("2026-10-19T14:00:00Z").log;
    log.start(subject("RN000123"), moment("2026-10-19T14:22:33.250Z")).expect("ready");
    log.finish(&finished(passing()), &trace()).expect("space left");
    let mut real = subject("RN000124");
    real.bench.simulated = None;
    real.operator = Some("Ada, \"the first\"".to_owned());
    log.start(real, moment("2026-10-19T14:23:00Z")).expect("ready");
    let mut failing = passing();
    failing.outcome = Outcome::Fail;
    failing.judged.retain(|judged| judged.quantity.name == QuantityName::OnCurrent);
    failing.findings = vec![finding(FindingCode::NeverTrips, About::Board, "...")];
    log.finish(&finished(failing), &trace()).expect("space left");
    log.start(subject("RN000123"), moment("2026-10-19T14:23:20Z")).expect("ready");
    drop(log);
    open("2026-10-19T15:00:00Z")
        .log
        .folder()
        .runs()
        .expect("readable")
        .map(|run| run.expect("whole"))
        .collect()
}

#[test]
fn the_table() {
    insta::assert_snapshot!(list(&runs()), @r#"
    run   time                 serial number  outcome     trip     re-enable  hysteresis  off current  findings
    0001  2026-10-19 16:22:33  RN000123       PASS        6.000 V  6.401 V    400.8 mV    2.400 µA     (simulated)
    0002  2026-10-19 16:23:00  RN000124       FAIL        -        -          -           -            never trips
    0003  2026-10-19 16:23:20  RN000123       INCOMPLETE  -        -          -           -            incomplete, (simulated)
    "#);
    assert_eq!(list(&[]), "no runs\n");
}

#[test]
fn a_filter_keeps_the_latest_of_one_serial_number() {
    let times = |serial_number: Option<&str>, last| -> Vec<String> {
        let filter = Filter { serial_number: serial_number.map(str::to_owned), last };
        filter.apply(runs()).iter().map(|run| run.identity.started.on_the_wall()[14..].to_owned()).collect()
    };
    assert_eq!(times(None, None), ["22:33", "23:00", "23:20"]);
    assert_eq!(times(Some("RN000123"), None), ["22:33", "23:20"]);
    assert_eq!(times(Some("RN000123"), Some(1)), ["23:20"]);
    assert_eq!(times(None, Some(2)), ["23:00", "23:20"]);
    assert_eq!(times(Some("RN00012"), Some(9)), [""; 0]);
    assert_eq!(times(None, Some(0)), [""; 0]);
}

#[test]
fn the_json_of_many_is_that_of_one_a_line() {
    let runs = runs();
    let of = |line: &str| serde_json::from_str::<serde_json::Value>(line).expect("JSON");
    let lines: Vec<serde_json::Value> = runs_json(&runs).lines().map(of).collect();
    let each: Vec<serde_json::Value> = runs.iter().map(|run| of(&run_json(run))).collect();
    assert_eq!(lines, each);
    assert_eq!(runs_json(&[]), "");
}

#[test]
fn the_csv_names_units_and_leaves_what_is_missing_empty() {
    let runs = runs();
    let mut bytes = Vec::new();
    runs_csv(&runs, &mut bytes).expect("memory takes everything");
    let mut reader = csv::Reader::from_reader(&bytes[..]);
    let heading = reader.headers().expect("a heading").clone();
    let lines: Vec<csv::StringRecord> = reader.records().map(|line| line.expect("of equal length")).collect();
    let field = |line: usize, name: &str| {
        let column = heading.iter().position(|column| column == name);
        lines[line].get(column.unwrap_or_else(|| panic!("no column {name}"))).expect("of equal length")
    };
    assert_eq!(lines.len(), 3);
    assert_eq!(field(0, "trip_v"), "6.0004");
    assert_eq!(field(0, "trip_expanded_uncertainty_v"), "0.0016");
    assert_eq!(field(0, "trip_decision"), "pass");
    assert_eq!(field(0, "off_current_a"), "0.0000024");
    assert_eq!(field(0, "on_current_decision"), "");
    assert_eq!((field(0, "simulated"), field(1, "simulated")), ("1", "0"));
    assert_eq!((field(1, "trip_v"), field(1, "findings")), ("", "never_trips"));
    assert_eq!(field(1, "operator"), "Ada, \"the first\"");
    assert_eq!((field(2, "outcome"), field(2, "duration_s"), field(2, "attempt")), ("INCOMPLETE", "", "2"));
    assert!(heading.iter().any(|name| name == "off_conductance_siemens"));
    assert!(heading.iter().any(|name| name == "detect_delay_s"));
}
