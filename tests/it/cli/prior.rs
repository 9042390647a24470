//! What earlier boards showed is used for the next one of their kind.

use super::ebbmark;
use super::workplace::SPEED;
use ebbmark::record::LogFolder;
use std::fs;
use std::path::Path;

/// The same board and bench each time, under whatever serial number.
const SEED: &str = "7";

/// Tests the board in this log; how many set-points it took.
fn set_points(folder: &Path, logs: &str, serial_number: &str) -> usize {
    let arguments = ["test", "profile.toml", "--bench", "sim", "--seed", SEED, "--speed", SPEED];
    ebbmark(folder, &[&arguments[..], &["--logs", logs, "--serial-number", serial_number]].concat()).ended(0);
    let log = LogFolder::new(&folder.join(logs), "simulated").expect("a plain name");
    let run = log.runs().expect("readable").last().expect("a run").expect("whole");
    assert_eq!(run.identity.board.serial_number, serial_number);
    log.trace(&run).expect("its trace").settings.len()
}

/// Five boards of one kind are the fewest a search learns from.
#[test]
fn a_search_begins_where_the_boards_before_had_their_thresholds() {
    let folder = tempfile::tempdir().expect("a temporary folder");
    fs::write(folder.path().join("profile.toml"), include_str!("../../../profiles/river-node.toml"))
        .expect("ours");
    let numbers = |from: u32| (from..from + 5).map(|number| format!("RN{number:06}"));
    let first: Vec<usize> = numbers(1).map(|number| set_points(folder.path(), "logs", &number)).collect();
    let sixth = set_points(folder.path(), "logs", "RN000006");
    let alone = set_points(folder.path(), "elsewhere", "RN000006");
    let least = first.iter().copied().chain([alone]).min().expect("some");
    assert!(sixth < least, "{sixth} after {first:?}, {alone} where there were none");
}
