//! A study as people and programs see it; the cycles are simulated in virtual time, so that the figures are fixed.

use super::{Boards, QUESTION, plan};
use crate::river;
use ebbmark::record::{Moment, StudyHeading};
use ebbmark::report::{StudySheet, study_csv, study_json, study_text};
use ebbmark::study::{Estimates, Plan};
use ebbmark::units::{Celsius, Volts};
use insta::assert_snapshot;
use jiff::tz::TimeZone;
use serde_json::Value;

fn with_sheet<T>(plan: &Plan, show: impl FnOnce(&StudySheet<'_>) -> T) -> T {
    let boards = Boards { jitter: Volts(2e-3), ..Boards::still(7) };
    let estimates = Estimates::of(plan, &boards.study(&river::profile(), plan), QUESTION);
    let moment = Moment::new("2026-12-01T08:00:00Z".parse().expect("RFC 3339"), &TimeZone::UTC);
    let simulated = Some("condition good".to_owned());
    let heading = StudyHeading::new("RN-204", "C", "0", simulated, plan.clone(), moment);
    show(&StudySheet { name: "first", heading: &heading, estimates: &estimates })
}

fn wanted(name: &str) -> String {
    let path = format!("{}/tests/data/study/{name}.txt", env!("CARGO_MANIFEST_DIR"));
    std::fs::read_to_string(path).expect("a file")
}

fn two_boards() -> Plan {
    Plan {
        boards: ["RN000001", "RN000002"].map(str::to_owned).to_vec(),
        temperatures: vec![Some(Celsius(-20.0)), Some(Celsius(60.0))],
        ..plan(5)
    }
}

#[test]
fn the_engineer_sees_conditions_temperature_and_limits() {
    assert_eq!(with_sheet(&two_boards(), study_text), wanted("two_boards"));
}

#[test]
fn one_board_at_two_rates_has_delays_and_limits_of_its_own() {
    let plan = Plan { rates: vec![Some(0.05), Some(0.5)], ..plan(4) };
    assert_eq!(with_sheet(&plan, study_text), wanted("two_rates"));
}

#[test]
fn json_keeps_its_keys() {
    let text = with_sheet(&two_boards(), |sheet| study_json(sheet).expect("text"));
    assert_eq!(text.lines().count(), 1);
    let json: Value = serde_json::from_str(&text).expect("JSON");
    let keys =
        |value: &Value| value.as_object().expect("an object").keys().cloned().collect::<Vec<_>>().join(" ");
    assert_snapshot!(keys(&json), @"at_rest board cells cycles limits ordered plan profile_sha256 question revision schema simulated study temperature");
    assert_snapshot!(keys(&json["cells"][0]), @"board drift load_ohm quantity rate_v_per_s temperature_c threshold");
    assert_snapshot!(keys(&json["cells"][0]["threshold"]), @"bracket_v count instrument_v jitter mean_v missing statistical_v");
    assert_snapshot!(keys(&json["at_rest"][0]), @"board delay delay_included instrument_v load_ohm quantity statistical_v temperature_c value_v");
    assert_snapshot!(
        keys(&json["temperature"][0]["coefficient"]),
        @"expanded_uncertainty_per_k line_probability relative_per_k slope_v_per_k"
    );
    assert_snapshot!(
        keys(&json["limits"][0]["proposal"]),
        @"basis boards_of_any_distribution boards_wanted confidence content count expanded_uncertainty_v factor max_v min_v standard_deviation_v"
    );
    assert_eq!(json["cells"].as_array().map(Vec::len), Some(8));
    let proposal = &json["limits"][0]["proposal"];
    assert_eq!((&proposal["count"], &proposal["basis"]), (&Value::from(2), &Value::from("boards")));
}

#[test]
fn csv_has_a_line_for_each_threshold_and_condition() {
    let mut bytes = Vec::new();
    with_sheet(&two_boards(), |sheet| study_csv(sheet, &mut bytes)).expect("written");
    let mut reader = csv::Reader::from_reader(&bytes[..]);
    let heading = reader.headers().expect("a heading").clone();
    assert_eq!(
        heading.iter().take(6).collect::<Vec<_>>(),
        ["board", "temperature_degc", "load_ohm", "rate_v_per_s", "quantity", "cycles"]
    );
    let lines: Vec<csv::StringRecord> = reader.records().collect::<Result<_, _>>().expect("records");
    assert_eq!(lines.len(), 8);
    assert_eq!(lines[0].iter().take(6).collect::<Vec<_>>(), ["RN000001", "-20", "55", "", "trip", "5"]);
}
