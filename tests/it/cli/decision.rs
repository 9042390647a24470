//! The budget and the decision rule as an engineer meets them at the command line.

use super::workplace::{SPEED, quick_profile};
use super::{Said, ebbmark};
use std::fs;
use tempfile::TempDir;

/// A folder with the quick profile, a table `[decision]` added, and a trace whose thresholds lie well inside the limits.
fn folder(decision: &str) -> TempDir {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let profile = format!("{}\n[decision]\n{decision}\n", quick_profile());
    fs::write(folder.path().join("profile.toml"), profile).expect("writable");
    fs::write(folder.path().join("good.csv"), include_str!("../../data/circuit/good.csv")).expect("writable");
    folder
}

fn analysed(folder: &TempDir, more: &[&str]) -> Said {
    ebbmark(folder.path(), &[&["analyse", "good.csv", "--profile", "profile.toml"], more].concat())
}

#[test]
fn the_budget_is_a_table_for_people_and_always_there_for_programs() {
    let folder = folder("");
    let said = analysed(&folder, &["--budget"]);
    for phrase in ["Budget of the trip voltage", "width of the bracket", "rectangular", "|c| u(x)", "100.0 %"]
    {
        assert!(said.out.contains(phrase), "no {phrase:?} in {said}");
    }
    // A trace from a file comes without its instruments' accuracy.
    assert!(said.out.contains("Instrument accuracy not included in U."), "{said}");
    assert!(!analysed(&folder, &[]).out.contains("Budget of"), "only when it is asked for");
    let json = analysed(&folder, &["--format", "json"]).json();
    for quantity in json["quantities"].as_array().expect("a list") {
        let lines = quantity["budget"].as_array().expect("a budget");
        let shares: f64 = lines.iter().filter_map(|line| line["share"].as_f64()).sum();
        assert!((shares - 1.0).abs() < 1e-9, "{quantity}");
        assert!(lines.iter().all(|line| line["sensitivity"].is_number() && line["unit"].is_string()));
    }
}

#[test]
fn the_coverage_of_the_profile_makes_u_wider_or_narrower() {
    let expanded = |decision: &str| {
        let json = analysed(&folder(decision), &["--format", "json"]).json();
        assert_eq!(json["quantities"][0]["name"], "trip");
        json["quantities"][0]["expanded_uncertainty"].as_f64().expect("a number")
    };
    assert!(expanded("coverage = \"80 %\"") < expanded("") && expanded("") < expanded("coverage = \"99 %\""));
    let said = analysed(&folder("coverage = \"99 %\""), &[]);
    assert!(said.out.contains("U covers the true value with 99 %."), "{said}");
}

#[test]
fn every_judged_quantity_tells_the_risk_of_its_decision() {
    for rule in ["simple", "guard_band", "wrong_acceptance"] {
        let json = analysed(&folder(&format!("rule = \"{rule}\"")), &["--format", "json"]).json();
        for quantity in json["quantities"].as_array().expect("a list") {
            let is_limited = quantity.get("decision").is_some();
            assert_eq!(quantity.get("risk").is_some(), is_limited, "{rule}: {quantity}");
        }
    }
}

#[test]
fn a_run_whose_uncertainty_is_too_large_is_refused_where_the_profile_asks_for_it() {
    let folder = folder("least_ratio = 900\nwhen_below = \"refuse\"");
    let arguments =
        ["test", "profile.toml", "--bench", "sim", "--serial-number", "RN000123", "--speed", SPEED];
    let said = ebbmark(folder.path(), &arguments);
    said.refuses(
        2,
        &["decision.when_below", "the limits of the trip voltage are", "improve first: width of the bracket"],
    );
    assert_eq!(said.out, "");
    let runs = ebbmark(folder.path(), &["log", "show"]);
    assert!(!runs.out.contains("RN000123"), "nothing began: {runs}");
}
