//! What a run leaves behind when it never ended, and what the next start makes of it.

use super::{MORNING, names, open, run};
use crate::run_sample::{finished, moment, passing, subject, trace};
use ebbmark::record::{Leftover, Log, LogError, Run};
use ebbmark::trace::OutputState;
use ebbmark::verdict::Outcome;
use std::fs;
use std::path::Path;

/// Starts a run and loses power.
fn start_and_crash(root: &Path, serial_number: &str) {
    let mut log = open(root).log;
    log.start(subject(serial_number), moment(MORNING)).expect("ready");
}

fn runs(log: &Log) -> Vec<Run> {
    log.folder().runs().expect("readable").map(|run| run.expect("whole")).collect()
}

#[test]
fn a_run_that_never_ended_is_recorded_and_blocks_until_the_output_is_confirmed_off() {
    let root = tempfile::tempdir().expect("a temporary folder");
    start_and_crash(root.path(), "RN000123");
    assert!(names(root.path()).contains(&"started.json".to_owned()));

    let mut opened = open(root.path());
    let [Leftover::Incomplete(found)] = &opened.leftovers[..] else { panic!("{:?}", opened.leftovers) };
    assert_eq!((found.outcome, &found.trace, &found.ended), (Outcome::Incomplete, &None, &None));
    assert_eq!(found.identity.board.serial_number, "RN000123");
    assert_eq!(runs(&opened.log), [(**found).clone()]);

    let refused = opened.log.start(subject("RN000124"), moment(MORNING)).expect_err("the output may be on");
    assert!(matches!(refused, LogError::OutputNotConfirmed { run: Some(_) }), "{refused}");
    opened.log.confirm_output_off().expect("writable");
    assert!(!names(root.path()).contains(&"started.json".to_owned()));
    let again = run(&mut opened.log, "RN000123", moment(MORNING));
    assert_eq!(again.identity.attempt, 2);
    assert_ne!(again.identity.run, runs(&opened.log)[0].identity.run);
}

#[test]
fn a_crash_before_the_output_is_confirmed_off_asks_again_but_records_once() {
    let root = tempfile::tempdir().expect("a temporary folder");
    start_and_crash(root.path(), "RN000123");
    assert!(matches!(open(root.path()).leftovers[..], [Leftover::Incomplete(_)]));
    let opened = open(root.path());
    assert!(matches!(opened.leftovers[..], [Leftover::OutputUnknown(_)]), "{:?}", opened.leftovers);
    assert_eq!(runs(&opened.log).len(), 1);
}

/// The crash came after the trace was written and before its run line was.
#[test]
fn a_trace_without_a_run_line_is_recorded_and_can_be_read() {
    for marked in [true, false] {
        let root = tempfile::tempdir().expect("a temporary folder");
        run(&mut open(root.path()).log, "RN000122", moment(MORNING));
        let runs_file = root.path().join("bench-1/2026-10.runs.jsonl");
        let before = fs::read(&runs_file).expect("a file");
        start_and_crash(root.path(), "RN000123");
        let mark = fs::read(root.path().join("bench-1/started.json")).expect("a mark");
        open(root.path()).log.confirm_output_off().expect("writable");
        fs::write(&runs_file, &before).expect("writable");
        run(&mut open(root.path()).log, "RN000123", moment(MORNING));
        fs::write(&runs_file, &before).expect("writable");
        if marked {
            fs::write(root.path().join("bench-1/started.json"), &mark).expect("writable");
        }

        let opened = open(root.path());
        let [Leftover::Incomplete(found)] = &opened.leftovers[..] else {
            panic!("marked: {marked}, {:?}", opened.leftovers)
        };
        assert_eq!(found.identity.board.serial_number, "RN000123");
        assert_eq!(opened.log.folder().trace(found).expect("its hash is right"), trace());
        assert_eq!(runs(&opened.log).len(), 2);
        assert!(found.findings[0].text.contains("its trace was kept"), "{}", found.findings[0].text);
    }
}

#[test]
fn a_run_that_ended_with_the_output_unknown_leaves_its_mark() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    log.start(subject("RN000123"), moment(MORNING)).expect("ready");
    let mut dangerous = trace();
    dangerous.ending.output = OutputState::MayBeOn;
    log.finish(&finished(passing()), &dangerous).expect("space left");
    assert!(matches!(
        log.start(subject("RN000124"), moment(MORNING)),
        Err(LogError::OutputNotConfirmed { run: Some(_) })
    ));
    drop(log);
    let mut opened = open(root.path());
    assert!(matches!(opened.leftovers[..], [Leftover::OutputUnknown(_)]), "{:?}", opened.leftovers);
    opened.log.confirm_output_off().expect("writable");
    drop(opened);
    assert_eq!(open(root.path()).leftovers, []);
}

#[test]
fn a_mark_that_cannot_be_read_still_means_that_the_output_may_be_on() {
    let root = tempfile::tempdir().expect("a temporary folder");
    start_and_crash(root.path(), "RN000123");
    fs::write(root.path().join("bench-1/started.json"), b"{\"run\":").expect("writable");
    let mut opened = open(root.path());
    let [Leftover::UnreadableMark { kept }] = &opened.leftovers[..] else { panic!("{:?}", opened.leftovers) };
    assert_eq!(fs::read(kept).expect("kept"), b"{\"run\":");
    assert!(opened.log.start(subject("RN000124"), moment(MORNING)).is_err());
    opened.log.confirm_output_off().expect("writable");
    assert!(opened.log.start(subject("RN000124"), moment(MORNING)).is_ok());
}

#[test]
fn one_run_at_a_time() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    let nothing = log.finish(&finished(passing()), &trace()).expect_err("no run was started");
    assert!(matches!(nothing, LogError::NotStarted));
    log.start(subject("RN000123"), moment(MORNING)).expect("ready");
    let refused = log.start(subject("RN000124"), moment(MORNING)).expect_err("one is open");
    assert!(matches!(refused, LogError::Unfinished { .. }), "{refused}");
}
