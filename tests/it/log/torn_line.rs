//! A power cut in the middle of a line, at every byte of it.

use super::{MORNING, names, open, run};
use crate::run_sample::{finished, moment, passing, subject, trace};
use ebbmark::record::{Leftover, Log, Run};
use std::fs;
use std::path::Path;

/// A run with few bytes, so that there are few places to cut.
fn short_run(log: &mut Log, serial_number: &str) {
    let mut subject = subject(serial_number);
    subject.bench.instruments.clear();
    subject.profile.limits.clear();
    let (mut verdict, mut trace) = (passing(), trace());
    verdict.judged.clear();
    trace.samples.truncate(2);
    log.start(subject, moment(MORNING)).expect("ready");
    log.finish(&finished(verdict), &trace).expect("space left");
}

/// Cuts `file` after every byte of its second line, and hands the opened log to `check`.
fn cut_everywhere(file: &str, check: impl Fn(usize, super::Opened)) {
    // In memory where the system has such a folder: thousands of syncs of a real disk would prove nothing more.
    let memory = Path::new("/dev/shm");
    let root = if memory.is_dir() { tempfile::tempdir_in(memory) } else { tempfile::tempdir() };
    let root = root.expect("a temporary folder");
    let mut log = open(root.path()).log;
    short_run(&mut log, "RN000123");
    short_run(&mut log, "RN000124");
    drop(log);
    let kept = [".lock", "2026-10.runs.jsonl", "2026-10.traces.jsonl"];
    assert_eq!(names(root.path()), kept);
    let folder = root.path().join("bench-1");
    let whole: Vec<Vec<u8>> = kept.iter().map(|name| fs::read(folder.join(name)).expect("a file")).collect();
    let index = kept.iter().position(|name| *name == file).expect("one of them");
    let first_line = whole[index].iter().position(|byte| *byte == b'\n').expect("two lines") + 1;

    for cut in first_line + 1..whole[index].len() {
        for (name, bytes) in kept.iter().zip(&whole) {
            fs::write(folder.join(name), bytes).expect("writable");
        }
        if file.contains("traces") {
            // The run line is written after the trace, so a torn trace has none.
            let runs = &whole[1];
            let end = runs.iter().position(|byte| *byte == b'\n').expect("two lines") + 1;
            fs::write(folder.join(kept[1]), &runs[..end]).expect("writable");
        }
        fs::write(folder.join(file), &whole[index][..cut]).expect("writable");
        let aside = folder.join(file.replace("jsonl", "torn"));
        let _ = fs::remove_file(&aside);

        let opened = open(root.path());
        let [torn] = &opened.torn[..] else { panic!("cut at {cut}: {:?}", opened.torn) };
        assert_eq!((torn.offset, torn.length), (first_line as u64, cut - first_line), "cut at {cut}");
        assert_eq!(torn.kept, aside);
        let set_aside = fs::read(&aside).expect("set aside");
        let heading = format!(
            "# set aside 2026-10-20T06:00:00Z: {file}, {} bytes from byte {first_line}:\n",
            cut - first_line
        );
        let expected = [heading.as_bytes(), &whole[index][first_line..cut], b"\n"].concat();
        assert_eq!(set_aside, expected, "cut at {cut}");
        check(cut, opened);
    }
}

#[test]
fn a_run_line_torn_at_any_byte_is_set_aside_and_its_trace_is_found() {
    cut_everywhere("2026-10.runs.jsonl", |cut, opened| {
        let [Leftover::Incomplete(found)] = &opened.leftovers[..] else {
            panic!("cut at {cut}: {:?}", opened.leftovers)
        };
        assert_eq!(found.identity.board.serial_number, "RN000124", "cut at {cut}");
        let runs: Vec<Run> =
            opened.log.folder().runs().expect("readable").map(|run| run.expect("whole")).collect();
        assert_eq!(runs.len(), 2, "cut at {cut}");
        assert_eq!(runs[1], **found, "cut at {cut}");
        assert_eq!(
            opened.log.folder().trace(found).expect("its hash is right").samples.len(),
            2,
            "cut at {cut}"
        );
    });
}

#[test]
fn a_trace_line_torn_at_any_byte_is_set_aside_and_the_next_is_not_joined_to_it() {
    cut_everywhere("2026-10.traces.jsonl", |cut, opened| {
        assert_eq!(opened.leftovers, [], "cut at {cut}");
        let mut log = opened.log;
        let next = run(&mut log, "RN000125", moment(MORNING));
        assert!(log.folder().trace(&next).is_ok(), "cut at {cut}");
        assert_eq!(log.folder().runs().expect("readable").flatten().count(), 2, "cut at {cut}");
    });
}

/// Some file systems leave blocks of zeros after a power cut; a newline may follow them.
#[test]
fn zeros_at_the_end_are_set_aside_too() {
    let root = tempfile::tempdir().expect("a temporary folder");
    run(&mut open(root.path()).log, "RN000123", moment(MORNING));
    let path = root.path().join("bench-1/2026-10.runs.jsonl");
    let whole = fs::read(&path).expect("a file");
    fs::write(&path, [&whole[..], &[0; 512], b"\n", &[0; 100]].concat()).expect("writable");
    let opened = open(root.path());
    assert_eq!(opened.torn.iter().map(|torn| torn.length).collect::<Vec<_>>(), [100, 513]);
    assert_eq!(fs::read(&path).expect("a file"), whole);
    assert_eq!(opened.leftovers, []);
}
