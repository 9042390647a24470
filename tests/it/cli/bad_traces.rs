//! Traces made elsewhere that cannot be used: `analyse` names file, line, what was read and what was wanted.

use super::ebbmark;
use std::fs;

const HEADER: &str = "time_s,set_v,sense_v,current_a\n";

/// Refused as a mistake in the file, with nothing on standard output in either format.
#[track_caller]
fn refused(text: &str, phrases: &[&str]) {
    let folder = tempfile::tempdir().expect("a temporary folder");
    fs::write(folder.path().join("trace.csv"), text).expect("writable");
    fs::write(folder.path().join("profile.toml"), include_str!("../../../profiles/river-node.toml"))
        .expect("writable");
    for format in ["text", "json"] {
        let arguments = ["analyse", "trace.csv", "--profile", "profile.toml", "--format", format];
        let said = ebbmark(folder.path(), &arguments);
        said.refuses(2, phrases);
        assert_eq!(said.out, "", "{said}");
    }
}

#[test]
fn a_missing_column() {
    let text = "time_s,set_v,sense_v\n0,7.6,7.6\n1,7.5,7.5\n";
    refused(
        text,
        &["trace.csv:1: ", "no column \"current_a\"", "wanted time_s, set_v, sense_v and current_a"],
    );
}

#[test]
fn text_in_a_number() {
    let text = format!("{HEADER}0,7.6,7.6,0.138\n1,seven,7.5,0.136\n");
    refused(&text, &["trace.csv:3: set_v: read \"seven\", wanted "]);
}

#[test]
fn time_running_backwards() {
    let text = format!("{HEADER}0,7.6,7.6,0.138\n2,7.5,7.5,0.136\n1,7.4,7.4,0.135\n");
    refused(&text, &["trace.csv:4: time_s: read \"1\"", "time runs backwards"]);
}

#[test]
fn not_a_number() {
    let text = format!("{HEADER}0,7.6,7.6,NaN\n1,7.5,7.5,0.136\n");
    refused(&text, &["trace.csv:2: current_a: read \"NaN\", wanted "]);
}

#[test]
fn every_problem_is_said_at_once() {
    let text = format!("{HEADER}0,7.6,7.6,NaN\n1,inf,7.5,0.136\n-1,7.4,,0.135\n");
    refused(&text, &["trace.csv:2: current_a", "trace.csv:3: set_v", "trace.csv:4: time_s"]);
}

#[test]
fn an_empty_file() {
    refused("", &["trace.csv:1: "]);
}
