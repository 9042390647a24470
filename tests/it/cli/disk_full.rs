//! A disk that runs full: a run that cannot be kept is never told as a result, and what it measured is not lost.
//!
//! The program gets a file size limit from its shell (`ulimit -f`, POSIX), so that the system itself refuses.

use super::workplace::{BOARD, SPEED, Workplace};
use super::{Said, ebbmark};
use ebbmark::record::Run;
use ebbmark::sim::device::Kind;
use std::fs;
use std::process::Command;

/// Blocks of 512 bytes or of 1024, depending on the shell; more than one run needs.
const BLOCKS: usize = 128;

/// Tests the board with no file allowed to grow beyond so many blocks.
fn test_within(place: &Workplace, blocks: usize) -> Said {
    let script = format!("trap '' XFSZ; ulimit -f {blocks}; exec \"$@\"");
    let output = Command::new("sh")
        .args(["-c", &script, "sh", env!("CARGO_BIN_EXE_ebbmark"), "test", "profile.toml"])
        .args(["--bench", "bench.toml", "--serial-number", BOARD, "--format", "json"])
        .current_dir(place.folder())
        .env("TMPDIR", place.folder())
        .output();
    Said::of(&output.expect("a shell"))
}

#[test]
fn a_run_that_cannot_be_kept_is_written_elsewhere_and_said_to_be() {
    let place = Workplace::new();
    let earlier = ["test", "profile.toml", "--bench", "sim", "--station", "sim", "--speed", SPEED];
    ebbmark(place.folder(), &[&earlier[..], &["--serial-number", BOARD]].concat()).ended(0);
    let traces = place.log_files().into_iter().find(|path| path.to_string_lossy().contains("traces"));
    let traces = traces.expect("a file of traces");
    // Whole lines up to the limit: not one of the next run's fits.
    let full = format!("{{\"filler\":\"{}\"}}\n", "x".repeat(BLOCKS * 1024));
    fs::write(&traces, full).expect("writable");

    let said = test_within(&place, BLOCKS);
    said.refuses(
        2,
        &["could not be written to ", ".traces.jsonl", "nothing measured is lost: a copy is in "],
    );
    assert_eq!(said.out, "", "a result that is not kept is none\n{said}");
    assert!(!place.bench.output(), "the output is on\n{said}");

    let rescued = fs::read_dir(place.folder()).expect("a folder").flatten();
    let rescued = rescued.map(|entry| entry.path()).find(|path| path.to_string_lossy().contains("-rescue-"));
    let rescued = fs::read_to_string(rescued.expect("a copy")).expect("text");
    let lines: Vec<&str> = rescued.lines().collect();
    let trace: serde_json::Value = serde_json::from_str(lines[0]).expect("JSON");
    assert!(trace["trace"]["samples"].as_array().expect("samples").len() > 50, "{trace}");
    let run: Run = serde_json::from_str(lines[1]).expect("a run");
    assert_eq!(run.identity.board.serial_number, BOARD);

    // The next start knows that a run is missing.
    let next = place.test_board("XY000123", &[]);
    next.refuses(2, &["never ended; it is recorded as INCOMPLETE", run.identity.run.as_str()]);
}

#[test]
fn a_disk_with_no_room_for_the_mark_ends_the_run_before_it_begins() {
    let place = Workplace::new();
    let said = test_within(&place, 0);
    said.refuses(2, &["logs/sim", "has space left"]);
    assert_eq!((said.out.as_str(), place.bench.take_exchanges(Kind::Supply)), ("", vec![]), "{said}");
}
