//! `characterise` over pseudo-terminals: a short study, its interruption, and what is refused.

use super::terminal::typed;
use super::workplace::{Running, SPEED, Workplace, quick_profile};
use super::{Said, ebbmark};
use std::fs;
use std::path::Path;
use tempfile::TempDir;

fn folder() -> TempDir {
    let folder = tempfile::tempdir().expect("a temporary folder");
    fs::write(folder.path().join("profile.toml"), quick_profile()).expect("writable");
    folder
}

const STUDY: [&str; 9] = [
    "characterise",
    "profile.toml",
    "--bench",
    "sim",
    "--serial-number",
    "RN000001",
    "--speed",
    SPEED,
    "--name=short",
];

fn study(folder: &Path, more: &[&str]) -> Said {
    ebbmark(folder, &[&STUDY[..], more].concat())
}

#[test]
fn a_short_study_gives_thresholds_and_is_shown_again_without_measuring() {
    let folder = folder();
    let said = study(folder.path(), &["--cycles", "2", "--rate", "0.5 V/s", "--format", "json"]);
    said.ended(0);
    let json = said.json();
    assert_eq!((&json["cycles"], &json["ordered"]), (&2.into(), &2.into()), "{said}");
    // What the board really is, the simulation tells; RN-204 trips between 5.88 V and 6.12 V.
    let trip = json["cells"][0]["threshold"]["mean_v"].as_f64().expect("a number");
    assert!((5.85..6.15).contains(&trip), "{said}");
    let file = folder.path().join("logs/simulated/studies/short.jsonl");
    let kept = fs::read_to_string(&file).expect("a file");
    assert_eq!(kept.lines().count(), 3, "a heading and two cycles");
    assert!(!folder.path().join("logs/simulated/started.json").exists(), "the mark is still there");

    let again = study(folder.path(), &["--cycles", "2", "--rate", "0.5 V/s", "--format", "json"]);
    assert_eq!(again.out, said.out, "the same result again");
    assert_eq!(fs::read_to_string(&file).expect("a file"), kept);

    let other = study(folder.path(), &["--cycles", "3", "--rate", "0.5 V/s"]);
    other
        .refuses(2, &["the study \"short\"", "ordered other boards, conditions or cycles", "another --name"]);
    let text = fs::read_to_string(folder.path().join("profile.toml")).expect("text");
    fs::write(folder.path().join("profile.toml"), text + "\n# changed\n").expect("writable");
    let changed = study(folder.path(), &["--cycles", "2", "--rate", "0.5 V/s"]);
    changed.refuses(2, &["was begun with another text of the profile"]);
}

#[test]
fn a_study_that_is_stopped_keeps_its_cycles_and_goes_on() {
    let folder = folder();
    let more = ["--cycles", "3", "--rate", "0.5 V/s"];
    let mut running = Running::start(folder.path(), &[&STUDY[..], &more[..]].concat());
    let file = folder.path().join("logs/simulated/studies/short.jsonl");
    let lines = || fs::read_to_string(&file).unwrap_or_default().lines().count();
    running.until("a cycle is kept", || lines() >= 2);
    running.signal("INT");
    let said = running.end();
    said.refuses(4, &["stopped on request", "of 3 cycles are kept", "the same command goes on from there"]);
    assert_eq!(said.out, "", "{said}");
    assert!(!folder.path().join("logs/simulated/started.json").exists(), "the mark is still there");
    let kept = lines();
    assert!((2..4).contains(&kept), "{kept} lines");

    study(folder.path(), &more).ended(0);
    assert_eq!(lines(), 4, "a heading and three cycles");
}

#[test]
fn nobody_is_asked_where_there_is_no_terminal() {
    let place = Workplace::new();
    let arguments = ["characterise", "profile.toml", "--bench", "bench.toml", "--serial-number", "RN000001"];
    let said = ebbmark(place.folder(), &[&arguments[..], &["--serial-number", "RN000002"]].concat());
    said.refuses(2, &["no terminal at which to ask", "--yes", "--conditions"]);
    assert!(!place.bench.output());
    let said = ebbmark(place.folder(), &[&arguments[..], &["--temperature", "-20 degC"]].concat());
    said.refuses(2, &["no terminal at which to ask"]);
    let said = ebbmark(place.folder(), &[&arguments[..], &["--load", "10 ohm"]].concat());
    said.refuses(2, &["a load of 10.00 Ω draws up to", "current limit is 350.0 mA"]);
    let said = ebbmark(place.folder(), &[&arguments[..], &["--rate", "5"]].concat());
    said.refuses(2, &["wanted a rate such as \"0.05 V/s\""]);
}

#[test]
fn a_real_bench_is_cycled_and_ends_with_its_output_off() {
    let place = Workplace::new();
    let arguments = [
        "characterise",
        "profile.toml",
        "--bench",
        "bench.toml",
        "--serial-number",
        "RN000123",
        "--cycles",
        "2",
        "--rate",
        "0.5 V/s",
    ];
    let said = ebbmark(place.folder(), &arguments);
    said.ended(0);
    assert!(said.out.contains("2 of 2 cycles") && said.out.contains("trip voltage"), "{said}");
    assert!(!place.bench.output());
}

/// The temperature measured, not the one ordered, stands in the result.
#[test]
fn measured_temperatures_come_from_a_file() {
    let folder = folder();
    let conditions = "schema = 1\n[[temperature]]\nnominal = \"-20 degC\"\nmeasured = \"-19.7 degC\"\n\
                      [[temperature]]\nnominal = \"60 degC\"\n";
    fs::write(folder.path().join("conditions.toml"), conditions).expect("writable");
    let said =
        study(folder.path(), &["--cycles", "2", "--conditions", "conditions.toml", "--format", "json"]);
    said.ended(0);
    let json = said.json();
    let cells = json["cells"].as_array().expect("an array");
    let temperatures: Vec<f64> = cells.iter().filter_map(|cell| cell["temperature_c"].as_f64()).collect();
    assert!(temperatures.contains(&-19.7) && temperatures.contains(&60.0), "{said}");

    fs::write(folder.path().join("wrong.toml"), "schema = 1\n[[temperature]]\nnominal = \"20 V\"\n")
        .expect("ours");
    study(folder.path(), &["--conditions", "wrong.toml"])
        .refuses(2, &["wrong.toml:3:", "which is a voltage"]);
}

#[test]
fn at_a_terminal_the_operator_says_what_was_measured() {
    let place = Workplace::new();
    let arguments = ["characterise", "profile.toml", "--bench", "bench.toml", "--serial-number", "RN000123"];
    let more = ["--cycles", "2", "--rate", "0.5 V/s", "--temperature", "-20 degC", "--format", "json"];
    let arguments = [&arguments[..], &more].concat();
    let said = typed(place.folder(), &arguments, &["cold", "-19.5 degC", ""]);
    said.ended(0);
    said.warns(&[
        "put board RN000123 into the fixture, at -20.00 °C",
        "temperature of the board as measured (Enter for -20.00 °C)",
        "press Enter when it is so",
    ]);
    assert_eq!(said.json()["cells"][0]["temperature_c"], -19.5, "{said}");
    assert!(!place.bench.output());
}
