//! What the program writes, to whom: results to standard output, the rest to standard error, plain for programs.

use super::workplace::{SPEED, quick_profile};
use super::{Said, ebbmark};
use serde_json::Value;
use std::fs;
use std::process::{Command, Stdio};
use tempfile::TempDir;

/// Keys every run has in JSON, in this order.
const KEYS: [&str; 7] = ["schema", "outcome", "board", "revision", "serial_number", "quantities", "findings"];

fn folder() -> TempDir {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let put = |name: &str, text: &str| fs::write(folder.path().join(name), text).expect("writable");
    put("profile.toml", &quick_profile());
    put("good.csv", include_str!("../../data/circuit/good.csv"));
    put("high.csv", include_str!("../../data/circuit/high_trip.csv"));
    folder
}

/// Tests a simulated board many times faster than real.
fn simulated(folder: &TempDir, condition: &str, more: &[&str]) -> Said {
    let arguments = [
        "test",
        "profile.toml",
        "--bench",
        "sim",
        "--serial-number",
        "RN000123",
        "--speed",
        SPEED,
        "--again",
    ];
    ebbmark(folder.path(), &[&arguments[..], &["--condition", condition], more].concat())
}

fn analysed(folder: &TempDir, trace: &str, more: &[&str]) -> Said {
    let arguments = ["analyse", trace, "--profile", "profile.toml", "--serial-number", "RN000123"];
    ebbmark(folder.path(), &[&arguments[..], more].concat())
}

fn keys(value: &Value) -> Vec<&str> {
    value.as_object().expect("an object").keys().map(String::as_str).collect()
}

/// The keys of the contract, the exit code of the outcome.
#[track_caller]
fn keeps_the_contract(said: &Said) {
    let json = said.json();
    for key in KEYS {
        assert!(keys(&json).contains(&key), "no {key} in {json}");
    }
    let order: Vec<usize> =
        KEYS.iter().map(|key| said.out.find(&format!("\"{key}\":")).expect("a key")).collect();
    assert!(order[..6].is_sorted(), "{said}");
    assert_eq!((&json["schema"], &json["board"]), (&1.into(), &"RN-204".into()));
    for quantity in json["quantities"].as_array().expect("an array") {
        for key in
            ["name", "value", "unit", "standard_uncertainty", "coverage_factor", "expanded_uncertainty"]
        {
            assert!(keys(quantity).contains(&key), "no {key} in {quantity}");
        }
        let number = |key: &str| quantity[key].as_f64().expect("a number");
        let expanded = number("coverage_factor") * number("standard_uncertainty");
        assert!((number("expanded_uncertainty") - expanded).abs() <= 1e-12 * expanded.abs());
        if let Some(decision) = quantity.get("decision") {
            let words = ["pass", "conditional_pass", "conditional_fail", "fail"];
            assert!(words.contains(&decision.as_str().expect("a word")), "{quantity}");
            assert!(quantity.get("min").or(quantity.get("max")).is_some(), "{quantity}");
        }
    }
    for finding in json["findings"].as_array().expect("an array") {
        assert!(["board", "bench"].contains(&finding["about"].as_str().expect("a word")), "{finding}");
        assert!(finding["code"].is_string() && finding["text"].is_string(), "{finding}");
    }
    let code = match json["outcome"].as_str().expect("a word") {
        "PASS" | "CONDITIONAL PASS" => 0,
        "FAIL" | "CONDITIONAL FAIL" => 1,
        "INVALID" => 3,
        "ABORTED" => 4,
        other => panic!("{other} is no outcome of a run that ended"),
    };
    said.ended(code);
}

#[test]
fn test_and_analyse_write_the_same_json_and_exit_with_the_outcome() {
    let folder = folder();
    let outcomes = [
        simulated(&folder, "good", &["--format", "json"]),
        simulated(&folder, "high-trip", &["--format", "json"]),
        simulated(&folder, "reversed", &["--format", "json"]),
        analysed(&folder, "good.csv", &["--format", "json"]),
        analysed(&folder, "high.csv", &["--format", "json"]),
    ];
    for said in &outcomes {
        keeps_the_contract(said);
        assert!(said.out.ends_with("}\n") && said.out.lines().count() == 1, "one line: {said}");
    }
    assert_eq!(outcomes.each_ref().map(|said| said.code), [0, 1, 3, 0, 1]);
}

#[test]
fn what_is_no_terminal_gets_no_escape_codes() {
    let folder = folder();
    for condition in ["good", "high-trip"] {
        let said = simulated(&folder, condition, &[]);
        assert!(!said.out.contains('\x1b') && !said.err.contains('\x1b'), "{said}");
        // The steps of this profile are coarse for its hysteresis, and that is said.
        let notes = ["note: the limits of the hysteresis are", "note: board RN-204 RN000123 passed"];
        let note = |line: &str| notes.iter().any(|note| line.starts_with(note));
        assert!(!said.out.contains('\r') && said.err.lines().all(note), "no progress either: {said}");
    }
    let said = analysed(&folder, "high.csv", &[]);
    assert!(!said.out.contains('\x1b'), "{said}");
    let said = ebbmark(folder.path(), &["log", "show"]);
    assert!(!said.out.contains('\x1b') && said.out.contains("RN000123"), "{said}");
}

/// On a terminal (of `script`, util-linux), colour is there, and `NO_COLOR` takes it away.
#[cfg(target_os = "linux")]
#[test]
fn no_color_takes_the_colour_away_on_a_terminal() {
    let folder = folder();
    let command = format!("{} analyse high.csv --profile profile.toml", env!("CARGO_BIN_EXE_ebbmark"));
    let on_a_terminal = |no_color: Option<&str>| {
        let mut script = Command::new("script");
        script.args(["-qec", &command, "/dev/null"]).current_dir(folder.path()).env("TERM", "xterm");
        script.env_remove("NO_COLOR").envs(no_color.map(|value| ("NO_COLOR", value)));
        String::from_utf8(script.output().expect("script is there").stdout).expect("UTF-8")
    };
    assert!(on_a_terminal(None).contains("\x1b["), "a terminal gets colour");
    let plain = on_a_terminal(Some("1"));
    assert!(plain.contains("FAIL") && !plain.contains('\x1b'), "{plain}");
}

#[test]
fn the_help_of_every_command_has_an_example() {
    let folder = folder();
    let commands: [&[&str]; 13] = [
        &[],
        &["demo"],
        &["test"],
        &["characterise"],
        &["analyse"],
        &["bench"],
        &["bench", "check"],
        &["bench", "zero"],
        &["bench", "list"],
        &["sim"],
        &["log"],
        &["log", "show"],
        &["limits"],
    ];
    for command in commands {
        let said = ebbmark(folder.path(), &[command, &["--help"]].concat());
        said.ended(0);
        let example = said.out.split("Example:\n").nth(1).unwrap_or_else(|| panic!("{command:?}: {said}"));
        let wanted = format!("  ebbmark {}", command.join(" "));
        assert!(example.starts_with(wanted.trim_end()), "{command:?}: {example}");
        // A command of the list of the house is in one of these.
        if let Some(listed) = said.out.split("Commands:\n").nth(1) {
            for line in listed.lines().take_while(|line| !line.is_empty()) {
                let name = line
                    .split_whitespace()
                    .next()
                    .filter(|_| line.starts_with("  ") && !line.starts_with("   "));
                if let Some(name) = name.filter(|name| *name != "help") {
                    let whole = [command, &[name]].concat();
                    assert!(commands.contains(&whole.as_slice()), "{whole:?} is not looked at here");
                }
            }
        }
    }
}

/// As in `ebbmark log show | head -1`: the reader has gone before anything is written.
#[test]
fn a_reader_that_went_away_is_no_mistake() {
    let folder = folder();
    simulated(&folder, "good", &[]).ended(0);
    let commands: [&[&str]; 4] = [
        &["log", "show"],
        &["bench", "list"],
        &["analyse", "good.csv", "--profile", "profile.toml"],
        &["test", "--help"],
    ];
    for command in commands {
        let mut child = Command::new(env!("CARGO_BIN_EXE_ebbmark"))
            .args(command)
            .current_dir(folder.path())
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .expect("the program starts");
        drop(child.stdout.take());
        let said = Said::of(&child.wait_with_output().expect("it ends"));
        said.ended(0);
        assert_eq!(said.err, "", "{command:?}");
    }
}

/// Several conditions act together, joined or given one by one, and the result names them all.
#[test]
fn conditions_are_joined_by_a_plus_or_repeated() {
    let folder = folder();
    for conditions in [&["high-trip+low-pull-up"][..], &["high-trip", "--condition", "low-pull-up"]] {
        let said = simulated(&folder, conditions[0], &[&conditions[1..], &["--format", "json"]].concat());
        let json = said.json();
        assert_eq!(json["outcome"], "FAIL", "{said}");
        assert_eq!(json["simulated"]["condition"], "high-trip+low-pull-up", "{said}");
        assert_eq!(json["findings"][0]["code"], "off_current_high", "{said}");
        let trip = json["quantities"].as_array().expect("an array").iter().find(|q| q["name"] == "trip");
        assert_eq!(trip.expect("a trip")["decision"], "fail", "{said}");
    }
    simulated(&folder, "high-trip+sleepy", &[]).refuses(2, &["sleepy", "wanted the name of a condition"]);
}

/// However fast simulated time runs, a reply that comes too late does so on the program's clock.
#[test]
fn conditions_of_a_line_are_met_on_a_bench_in_a_hurry() {
    let folder = folder();
    for condition in ["late-reply", "supply-restart"] {
        let said = simulated(&folder, condition, &["--format", "json"]);
        assert_eq!(said.json()["outcome"], "INVALID", "{condition}: {said}");
        assert_eq!(said.json()["findings"][0]["code"], "bench_fault", "{condition}: {said}");
    }
}

#[test]
fn a_speed_without_meaning_is_refused() {
    let folder = folder();
    let commands: [&[&str]; 3] = [
        &["demo"],
        &["test", "profile.toml", "--bench", "sim", "--serial-number", "RN000123"],
        &["sim", "--profile", "profile.toml"],
    ];
    for command in commands {
        for speed in ["0", "-1", "-0.5", "NaN", "inf", "fast"] {
            let said = ebbmark(folder.path(), &[command, &["--speed", speed]].concat());
            said.refuses(2, &[&format!("'{speed}'"), "--speed", "wanted a number above 0"]);
            assert_eq!(said.out, "", "{command:?}");
        }
    }
    assert!(!folder.path().join("logs").exists(), "nothing was begun");
}
