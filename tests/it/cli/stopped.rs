//! A run that the operator or the system stops: the output goes off, and what was measured is kept as ABORTED.

use super::workplace::{Running, Workplace};
use ebbmark::trace::{OutputState, Stop};
use ebbmark::verdict::Outcome;

#[track_caller]
fn aborted_by(signal: &str) {
    let place = Workplace::new();
    let running = place.test_under_way(&["--format", "json"]);
    running.signal(signal);
    let said = running.end();
    said.ended(4);
    assert!(!place.bench.output(), "the output is on\n{said}");
    let (run, trace) = place.kept();
    assert_eq!((run.outcome, &trace.ending.stop), (Outcome::Aborted, &Stop::Aborted));
    assert_eq!(trace.ending.output, OutputState::Off);
    assert!(trace.samples.len() > 3, "{trace:?}");
    assert_eq!(said.json()["outcome"], "ABORTED", "{said}");
    assert!(!place.log().path().join("started.json").exists(), "the mark is still there");
}

#[test]
fn ctrl_c_switches_off_and_keeps_the_record() {
    aborted_by("INT");
}

#[test]
fn a_request_to_end_switches_off_and_keeps_the_record() {
    aborted_by("TERM");
}

#[test]
fn a_terminal_that_is_closed_switches_off_and_keeps_the_record() {
    aborted_by("HUP");
}

#[test]
fn a_request_to_quit_switches_off_and_keeps_the_record() {
    aborted_by("QUIT");
}

/// Whoever presses Ctrl-C twice gets no further with it, but no less: the output is off and the record kept.
#[test]
fn a_second_ctrl_c_does_not_keep_the_output_from_going_off() {
    let place = Workplace::new();
    let running = place.test_under_way(&[]);
    running.signal("INT");
    running.signal("INT");
    let said = running.end();
    said.ended(4);
    assert!(!place.bench.output() && said.out.contains("ABORTED"), "{said}");
    assert_eq!(place.kept().0.outcome, Outcome::Aborted);
}

/// The demonstration tests two boards; whoever stops it during the first does not want to see the second.
#[test]
fn a_demonstration_that_is_stopped_ends_there() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let mut running = Running::start(folder.path(), &["demo"]);
    let mark = folder.path().join("logs/demo/started.json");
    running.until("a run has begun", || mark.exists());
    running.signal("INT");
    let said = running.end();
    said.ended(4);
    assert!(said.out.contains("ABORTED") && !said.out.contains("RN000002"), "{said}");
}

#[test]
fn a_simulated_bench_that_is_stopped_takes_its_ports_along() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let mut running = Running::start(folder.path(), &["sim", "--bench-file", "bench.toml"]);
    let file = folder.path().join("bench.toml");
    let text = || std::fs::read_to_string(&file).unwrap_or_default();
    running.until("the bench file is there", || text().contains("load_voltmeter"));
    let ports: Vec<String> =
        text().lines().filter_map(|line| line.strip_prefix("port = ")).map(str::to_owned).collect();
    let is_there = |port: &String| std::path::Path::new(port.trim_matches('"')).exists();
    assert!(ports.len() == 4 && ports.iter().all(is_there), "{ports:?}");
    running.signal("TERM");
    running.end().ended(0);
    assert!(!ports.iter().any(is_there), "{ports:?}");
}
