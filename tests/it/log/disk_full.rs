//! A disk that runs full in the middle of a line.
//!
//! A child process gets a file size limit from its shell (`ulimit -f`, POSIX), so that the system itself refuses the
//! rest of a write after the first bytes went in: exactly what a full disk does to an append.
#![cfg(unix)]

use super::{MORNING, names, open, run};
use crate::run_sample::{finished, moment, passing, subject, trace};
use ebbmark::record::{Leftover, LogError, Rescue};
use std::fs;
use std::path::{Path, PathBuf};
use std::process::Command;

const ROOT: &str = "EBBMARK_TEST_ROOT";
/// The limit of the child, in blocks of 512 bytes or of 1024, depending on the shell.
const BLOCKS: usize = 64;

/// The child: one run, told on standard output.
#[test]
#[ignore = "run by the other tests of this file, under a limit"]
fn child_under_a_limit() {
    let Some(root) = std::env::var_os(ROOT).map(PathBuf::from) else { return };
    let mut log = open(&root).log;
    log.start(subject("RN000124"), moment(MORNING)).expect("a mark fits");
    let error = log.finish(&finished(passing()), &trace()).expect_err("the file cannot grow");
    let LogError::NotKept { path, rescue: Rescue::Written(rescue), .. } = &error else { panic!("{error}") };
    assert!(error.to_string().contains("nothing measured is lost"), "{error}");
    let refused = log.start(subject("RN000125"), moment(MORNING)).expect_err("the first is not kept");
    assert!(matches!(refused, LogError::Unfinished { .. }), "{refused}");
    fs::write(root.join("told"), format!("{}\n{}", path.display(), rescue.display())).expect("a small file");
}

/// Pads `file` with whole lines to just below the limit, runs the child, and gives the file's content before it.
fn fill_and_run(root: &Path, file: &str) -> Vec<u8> {
    run(&mut open(root).log, "RN000123", moment(MORNING));
    let shell = |script: &str| {
        let mut command = Command::new("sh");
        command.args(["-c", script]).arg("sh").env(ROOT, root).env("TMPDIR", root);
        command
    };
    let probe = format!("trap '' XFSZ; ulimit -f {BLOCKS}; cat /dev/zero >\"$1\"");
    let status = shell(&probe).arg(root.join("probe")).stderr(std::process::Stdio::null()).status();
    assert!(!status.expect("a shell").success(), "the limit does not work here");
    let limit = fs::metadata(root.join("probe")).expect("written").len() as usize;

    let path = root.join("bench-1").join(file);
    let mut bytes = fs::read(&path).expect("a file");
    let last = bytes.clone();
    let room = 100;
    let padding = limit - room - bytes.len();
    let filler = format!("{{\"filler\":\"{}\"}}\n", "x".repeat(padding - 14));
    bytes = [filler.as_bytes(), &last].concat();
    assert_eq!(bytes.len(), limit - room);
    fs::write(&path, &bytes).expect("writable");

    let script = format!("trap '' XFSZ; ulimit -f {BLOCKS}; exec \"$@\"");
    let output = shell(&script)
        .arg(std::env::current_exe().expect("this test"))
        .args(["--ignored", "--exact", "log::disk_full::child_under_a_limit"])
        .output()
        .expect("a shell");
    let told = String::from_utf8_lossy(&output.stdout).into_owned();
    assert!(output.status.success() && told.contains("1 passed"), "{told}");
    bytes
}

fn told(root: &Path) -> (PathBuf, PathBuf) {
    let told = fs::read_to_string(root.join("told")).expect("the child told");
    let (path, rescue) = told.split_once('\n').expect("two lines");
    (path.into(), rescue.into())
}

#[test]
fn a_trace_that_does_not_fit_leaves_the_file_as_it_was_and_a_copy_elsewhere() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let before = fill_and_run(root.path(), "2026-10.traces.jsonl");
    let (path, rescue) = told(root.path());
    assert_eq!(path, root.path().join("bench-1/2026-10.traces.jsonl"));
    assert!(fs::read(&path).expect("a file") == before, "the file changed");

    let copy = fs::read_to_string(rescue).expect("the copy");
    let lines: Vec<&str> = copy.lines().collect();
    let value: serde_json::Value = serde_json::from_str(lines[0]).expect("JSON");
    assert_eq!(value["trace"], serde_json::to_value(trace()).expect("plain data"));
    let run: ebbmark::record::Run = serde_json::from_str(lines[1]).expect("a run");
    assert_eq!((run.identity.board.serial_number.as_str(), lines.len()), ("RN000124", 2));

    let opened = open(root.path());
    assert_eq!(opened.torn, []);
    assert!(matches!(&opened.leftovers[..], [Leftover::Incomplete(run)] if run.trace.is_none()));
}

#[test]
fn a_run_line_that_does_not_fit_leaves_its_trace_to_be_found() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let before = fill_and_run(root.path(), "2026-10.runs.jsonl");
    let (path, _) = told(root.path());
    assert_eq!(path, root.path().join("bench-1/2026-10.runs.jsonl"));
    assert!(fs::read(&path).expect("a file") == before, "the file changed");
    assert!(names(root.path()).contains(&"started.json".to_owned()));

    let opened = open(root.path());
    let [Leftover::Incomplete(found)] = &opened.leftovers[..] else { panic!("{:?}", opened.leftovers) };
    assert_eq!(opened.log.folder().trace(found).expect("its hash is right"), trace());
}

/// The file is made read-only in effect by a folder in its place; once that is gone, the same run is kept once.
#[test]
fn a_run_that_was_refused_can_be_finished_later() {
    let root = tempfile::tempdir().expect("a temporary folder");
    let mut log = open(root.path()).log;
    log.start(subject("RN000123"), moment(MORNING)).expect("ready");
    let in_the_way = log.folder().path().join("2026-10.runs.jsonl");
    fs::create_dir(&in_the_way).expect("a folder");
    let refused = log.finish(&finished(passing()), &trace()).expect_err("a folder is no file");
    let LogError::NotKept { rescue: Rescue::Written(copy), .. } = refused else { panic!("{refused}") };
    fs::remove_file(copy).expect("the copy was written");
    fs::remove_dir(&in_the_way).expect("an empty folder");
    let kept = log.finish(&finished(passing()), &trace()).expect("now it is");
    assert_eq!(log.folder().trace(&kept).expect("its hash is right"), trace());
    let traces = fs::read_to_string(log.folder().path().join("2026-10.traces.jsonl")).expect("text");
    assert_eq!(traces.lines().count(), 1);
}
