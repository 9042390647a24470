//! The append-only log on a real file system: what is kept, and what is found after a crash.
#![expect(clippy::expect_used, reason = "a test that cannot be set up has failed")]

mod disk_full;
mod leftover;
mod torn_line;

use crate::run_sample::{finished, moment, passing, subject, trace};
use ebbmark::record::{Log, LogError, Moment, Occasion, Opened, Run, Subject};
use ebbmark::verdict::{Outcome, Verdict};
use std::fs;
use std::io::Write;
use std::path::Path;

const MORNING: &str = "2026-10-19T14:22:33Z";

fn open(root: &Path) -> Opened {
    Log::open(root, "bench-1", &moment("2026-10-20T06:00:00Z")).expect("nobody else has it open")
}

/// Runs one passing board.
fn run(log: &mut Log, serial_number: &str, started: Moment) -> Run {
    log.start(subject(serial_number), started).expect("ready");
    log.finish(&finished(passing()), &trace()).expect("space left")
}

fn names(root: &Path) -> Vec<String> {
    let entries = fs::read_dir(root.join("bench-1")).expect("a log");
    let mut names: Vec<String> =
        entries.map(|entry| entry.expect("readable").file_name().to_string_lossy().into_owned()).collect();
    names.sort();
    names
}

#[test]
fn what_is_kept_is_read_back_the_same() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    let first = run(&mut log, "RN000123", moment(MORNING));
    let second = run(&mut log, "RN000124", moment(MORNING));
    let again = run(&mut log, "RN000123", moment(MORNING));

    let runs: Vec<Run> = log.folder().runs().expect("readable").map(|run| run.expect("whole")).collect();
    assert_eq!(runs, [first.clone(), second.clone(), again.clone()]);
    assert_eq!(runs.iter().map(|run| run.identity.attempt).collect::<Vec<_>>(), [1, 1, 2]);
    assert_eq!(first.identity.run.as_str(), "bench-1-20261019T142233Z-0001");
    assert_eq!(again.identity.run.as_str(), "bench-1-20261019T142233Z-0003");
    for run in &runs {
        assert_eq!(log.folder().trace(run).expect("its hash is right"), trace());
    }
    assert_eq!(log.folder().run(second.identity.run.as_str()).expect("it is there"), second);
    assert!(matches!(log.folder().run("bench-1-nothing"), Err(LogError::NoSuchRun { .. })));
    assert_eq!(names(root.path()), [".lock", "2026-10.runs.jsonl", "2026-10.traces.jsonl"]);
}

/// The hash in a run is what the system's own tools say of the line: checked against coreutils.
#[cfg(unix)]
#[test]
fn sha256sum_gives_the_hash_of_the_trace_line() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    run(&mut log, "RN000123", moment(MORNING));
    let reference = run(&mut log, "RN000124", moment(MORNING)).trace.expect("kept");
    let file = log.folder().path().join(&reference.file);
    let script = format!("sed -n 2p '{}' | sha256sum", file.display());
    let output = std::process::Command::new("sh").args(["-c", &script]).output().expect("a shell");
    assert_eq!(String::from_utf8_lossy(&output.stdout).split(' ').next(), Some(reference.sha256.as_str()));
}

#[test]
fn a_run_belongs_to_the_month_in_which_it_began() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    run(&mut log, "RN000123", moment("2026-10-31T23:59:59.900Z"));
    let next = run(&mut log, "RN000123", moment("2026-11-01T00:00:20Z"));
    assert_eq!(next.identity.attempt, 2);
    assert_eq!(next.identity.run.as_str(), "bench-1-20261101T000020Z-0001");
    let october = ["2026-10.runs.jsonl", "2026-10.traces.jsonl"];
    let november = ["2026-11.runs.jsonl", "2026-11.traces.jsonl"];
    assert_eq!(names(root.path())[1..], [october, november].concat());
    assert_eq!(log.folder().runs().expect("readable").flatten().count(), 2);
}

#[test]
fn a_second_program_on_the_same_bench_is_refused() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let first = open(root.path());
    let error = Log::open(root.path(), "bench-1", &moment(MORNING)).expect_err("taken");
    let shown = error.to_string();
    assert!(matches!(error, LogError::Taken { .. }), "{shown}");
    assert!(shown.contains("close the other one"), "{shown}");
    assert!(cfg!(windows) || shown.contains(&format!("process {}", std::process::id())), "{shown}");
    assert!(Log::open(root.path(), "bench-2", &moment(MORNING)).is_ok());
    drop(first);
    open(root.path());
}

#[test]
fn a_changed_trace_is_detected() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    let kept = run(&mut log, "RN000123", moment(MORNING));
    let path = log.folder().path().join("2026-10.traces.jsonl");
    let text = fs::read_to_string(&path).expect("text");
    let forged = text.replacen("\"set_v\":7.6", "\"set_v\":7.5", 1);
    assert_ne!(forged, text);
    fs::write(&path, forged).expect("writable");
    assert!(matches!(log.folder().trace(&kept), Err(LogError::TraceChanged { .. })));
    fs::write(&path, &text[..text.len() / 2]).expect("writable");
    assert!(matches!(log.folder().trace(&kept), Err(LogError::TraceChanged { .. })));
}

#[test]
fn a_line_that_is_no_run_is_reported_and_the_next_one_is_read() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    run(&mut log, "RN000123", moment(MORNING));
    let path = log.folder().path().join("2026-10.runs.jsonl");
    let mut file = fs::OpenOptions::new().append(true).open(&path).expect("it exists");
    file.write_all(b"{\"schema\":2}\nscribble\n").expect("writable");
    run(&mut log, "RN000124", moment(MORNING));
    file.write_all(b"{\"schema\":1,").expect("writable");

    let read: Vec<_> = log.folder().runs().expect("readable").collect();
    let shown: Vec<String> =
        read.iter().filter_map(|run| run.as_ref().err()).map(ToString::to_string).collect();
    assert_eq!(read.iter().filter(|run| run.is_ok()).count(), 2);
    assert_eq!(
        shown,
        [
            format!("{}:2: schema 2, this version of the program reads schema 1", path.display()),
            format!("{}:3: not a run: expected value at line 1 column 1", path.display()),
            format!("{}:5: a half-written last line", path.display()),
        ]
    );
}

#[test]
fn earlier_passes_are_the_newest_of_the_same_profile_in_the_two_newest_months() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    let old = run(&mut log, "RN000001", moment("2026-07-01T08:00:00Z"));
    let runs: Vec<Run> = ["2026-08-01T08:00:00Z", "2026-08-02T08:00:00Z", "2026-10-19T08:00:00Z"]
        .into_iter()
        .map(|started| run(&mut log, "RN000123", moment(started)))
        .collect();
    log.start(subject("RN000124"), moment(MORNING)).expect("ready");
    let mut failed = passing();
    failed.outcome = Outcome::Fail;
    log.finish(&finished(failed), &trace()).expect("space left");
    let mut other = subject("RN000125");
    other.profile.sha256 = "cd".repeat(32);
    log.start(other, moment(MORNING)).expect("ready");
    log.finish(&finished(passing()), &trace()).expect("space left");

    let earlier = |most| log.folder().earlier_passes(&old.identity.profile, most).expect("readable");
    assert_eq!(earlier(50), runs, "nothing from July, nothing that failed, nothing of another profile");
    assert_eq!(earlier(2), runs[1..]);
}

/// A reference board says nothing of the boards made, and one tested twice is still one.
#[test]
fn of_earlier_passes_each_board_counts_once_and_no_reference_board() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    let first = run(&mut log, "RN000123", moment(MORNING));
    for occasion in [Occasion::Again(first.identity.run.clone()), Occasion::Reference] {
        log.start(Subject { occasion, ..subject("RN000123") }, moment(MORNING)).expect("ready");
        log.finish(&finished(passing()), &trace()).expect("space left");
    }
    let passes = log.folder().earlier_passes(&first.identity.profile, 10).expect("readable");
    assert_eq!(passes, [first]);
}

#[test]
fn a_board_has_passed_unless_it_failed_since() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    let board = subject("RN000123").board;
    let passed = |log: &Log, simulated| log.folder().passed(&board, simulated).expect("readable");
    assert_eq!(passed(&log, true), None);
    let first = run(&mut log, "RN000123", moment(MORNING));
    run(&mut log, "RN000124", moment(MORNING));
    assert_eq!(passed(&log, true), Some(first.clone()));
    assert_eq!(passed(&log, false), None, "a simulated board is none of the real ones");
    let mut ended = |outcome, occasion| {
        log.start(Subject { occasion, ..subject("RN000123") }, moment(MORNING)).expect("ready");
        log.finish(&finished(Verdict { outcome, ..passing() }), &trace()).expect("space left");
        passed(&log, true)
    };
    assert_eq!(ended(Outcome::Aborted, Occasion::Production), Some(first.clone()), "that said nothing of it");
    assert_eq!(ended(Outcome::Fail, Occasion::Reference), Some(first));
    assert_eq!(ended(Outcome::Fail, Occasion::Production), None);
    assert!(ended(Outcome::ConditionalPass, Occasion::Production).is_some());
}
