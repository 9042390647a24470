//! `limits` as an engineer and a program meet it.

use super::{Said, ebbmark};
use insta::assert_snapshot as says;
use serde_json::Value;
use std::fs;
use std::os::unix::fs::{PermissionsExt, symlink};
use std::path::PathBuf;
use tempfile::TempDir;

const RIVER_NODE: &str = include_str!("../../../profiles/river-node.toml");

struct Desk(TempDir);

impl Desk {
    fn new() -> Self {
        Self::with(RIVER_NODE)
    }

    fn with(profile: &str) -> Self {
        let desk = Self(tempfile::tempdir().expect("a temporary folder"));
        fs::write(desk.profile(), profile).expect("writable");
        desk
    }

    fn profile(&self) -> PathBuf {
        self.0.path().join("profile.toml")
    }

    fn text(&self) -> String {
        fs::read_to_string(self.profile()).expect("a file")
    }

    fn limits(&self, more: &[&str]) -> Said {
        ebbmark(self.0.path(), &[&["limits", "profile.toml"], more].concat())
    }
}

#[test]
fn the_engineer_sees_methods_parts_sets_and_risks() {
    let said = Desk::new().limits(&["--uncertainty", "1.6 mV"]);
    said.ended(0);
    assert_eq!(said.err, "");
    says!(said.out, @r#"
    RN-204 revision C: limits from its parts

    detector     3.000 V ± 1.2 %, hysteresis 5 % to 8.3 %, typically 6.7 %, 100 ppm/K, ageing 0.1 %
    divider      2.200 MΩ above 2.200 MΩ, ± 1 % each, 100 ppm/K, ageing 0.1 %, sense current -1.000 nA to 1.000 nA
    temperature  -20 °C to 60 °C at work, 18 °C to 28 °C at the test, data sheets at 25 °C

    trip voltage, nominal 6.000 V
      method                                             trip voltage      from nominal
      worst case: every part at its worst end            5.803 to 6.204 V  -196.7 +203.8 mV
      root sum square of the full tolerances             5.910 to 6.090 V  -90.2 +90.2 mV
      mean and 3 standard deviations by root sum square  5.844 to 6.156 V  -156.2 +156.2 mV
      Monte Carlo: 99.73 % of the boards drawn           5.867 to 6.136 V  -133.1 +135.7 mV
      Monte Carlo: 95 % of the boards drawn              5.902 to 6.099 V  -97.9 +98.9 mV

      part                         alone, worst case  variance, first order  variance, boards drawn
      detector accuracy            -72.0 +72.0 mV     63.7 %                 63.6 %
      top resistor tolerance       -30.0 +30.0 mV     11.1 %                 11.1 %
      bottom resistor tolerance    -29.7 +30.3 mV     11.1 %                 11.3 %
      detector temperature         -27.0 +27.0 mV     9.0 %                  9.2 %
      top resistor temperature     -13.5 +13.5 mV     2.2 %                  2.3 %
      bottom resistor temperature  -13.4 +13.6 mV     2.2 %                  2.2 %
      detector ageing              -6.0 +6.0 mV       0.4 %                  0.5 %
      top resistor ageing          -3.0 +3.0 mV       0.1 %                  0.1 %
      bottom resistor ageing       -3.0 +3.0 mV       0.1 %                  0.1 %
      sense current                -2.2 +2.2 mV       0.1 %                  0.1 %

    re-enable voltage, nominal 6.402 V
      method                                             re-enable voltage  from nominal
      worst case: every part at its worst end            6.094 to 6.719 V   -308.5 +316.5 mV
      root sum square of the full tolerances             6.262 to 6.538 V   -140.2 +135.9 mV
      mean and 3 standard deviations by root sum square  6.194 to 6.606 V   -208.1 +204.1 mV
      Monte Carlo: 99.73 % of the boards drawn           6.212 to 6.590 V   -190.1 +188.0 mV
      Monte Carlo: 95 % of the boards drawn              6.268 to 6.533 V   -134.2 +131.5 mV

      part                         alone, worst case  variance, first order  variance, boards drawn
      detector accuracy            -76.8 +76.8 mV     41.7 %                 41.7 %
      detector hysteresis          -102.0 +96.0 mV    34.6 %                 34.4 %
      top resistor tolerance       -32.0 +32.0 mV     7.2 %                  7.2 %
      bottom resistor tolerance    -31.7 +32.3 mV     7.2 %                  7.4 %
      detector temperature         -28.8 +28.8 mV     5.9 %                  5.9 %
      top resistor temperature     -14.4 +14.4 mV     1.5 %                  1.5 %
      bottom resistor temperature  -14.3 +14.5 mV     1.5 %                  1.5 %
      detector ageing              -6.4 +6.4 mV       0.3 %                  0.3 %
      top resistor ageing          -3.2 +3.2 mV       0.1 %                  0.1 %
      bottom resistor ageing       -3.2 +3.2 mV       0.1 %                  0.1 %
      sense current                -2.2 +2.2 mV       0.0 %                  0.0 %

    hysteresis, nominal 402.0 mV
      method                                             hysteresis         from nominal
      worst case: every part at its worst end            290.3 to 514.7 mV  -111.7 +112.7 mV
      root sum square of the full tolerances             299.8 to 498.2 mV  -102.2 +96.2 mV
      mean and 3 standard deviations by root sum square  278.3 to 521.7 mV  -123.7 +119.7 mV
      Monte Carlo: 99.73 % of the boards drawn           304.3 to 494.9 mV  -97.7 +92.9 mV
      Monte Carlo: 95 % of the boards drawn              322.2 to 476.7 mV  -79.8 +74.7 mV

      part                         alone, worst case  variance, first order  variance, boards drawn
      detector hysteresis          -102.0 +96.0 mV    99.3 %                 99.3 %
      detector accuracy            -4.8 +4.8 mV       0.5 %                  0.5 %
      top resistor tolerance       -2.0 +2.0 mV       0.1 %                  0.1 %
      bottom resistor tolerance    -2.0 +2.0 mV       0.1 %                  0.1 %
      detector temperature         -1.8 +1.8 mV       0.1 %                  0.0 %
      top resistor temperature     -0.9 +0.9 mV       0.0 %                  0.0 %
      bottom resistor temperature  -0.9 +0.9 mV       0.0 %                  0.0 %
      detector ageing              -0.4 +0.4 mV       0.0 %                  0.0 %
      top resistor ageing          -0.2 +0.2 mV       0.0 %                  0.0 %
      bottom resistor ageing       -0.2 +0.2 mV       0.0 %                  0.0 %

    limits             data sheet         design             moves after test  guard band  test               profile now
    trip voltage       5.928 to 6.072 V   5.803 to 6.204 V   -71.1 +72.0 mV    1.6 mV      5.876 to 6.130 V   5.880 to 6.120 V
    re-enable voltage  6.224 to 6.576 V   6.094 to 6.719 V   -77.0 +77.9 mV    1.6 mV      6.173 to 6.638 V   6.240 to 6.560 V
    hysteresis         296.4 to 504.0 mV  290.3 to 514.7 mV  -5.9 +6.0 mV      2.3 mV      299.0 to 506.0 mV  300.0 to 500.0 mV

    Design limits are the worst case. A board that passes the test limits keeps the design limits at any
    working temperature and age. The guard band is 1 x U; U = 1.600 mV for a threshold (k = 2) is as
    given, and for the hysteresis it is taken root 2 times as large. 200000 boards drawn, seed 1.

    risks over a production  mean      standard deviation  does not conform  consumer's  producer's  both without guard band
    trip voltage             6.000 V   48.6 mV             0.82 %            3.3 ppm     844.8 ppm   154.7 ppm, 163.3 ppm
    re-enable voltage        6.400 V   65.8 mV             373.9 ppm         0.1 ppm     36.5 ppm    6.7 ppm, 7.1 ppm
    hysteresis               399.9 mV  40.6 mV             0.90 %            6.1 ppm     0.16 %      279.6 ppm, 306.3 ppm

    A board conforms when its true value at the test lies inside the design limits less what it may move
    afterwards. Consumer's risk: it does not, and passes. Producer's risk: it does, and fails.
    Production and measurement are taken as normal (JCGM 106:2012, 9.5); mean and standard deviation
    come from the parts at the test unless given. Parts have ends and a normal distribution has none, so
    risks worked out from parts are on the large side.

    warning: trip voltage: 0.2 % of the boards drawn from good parts lie outside the profile's present
    limits, 5.880 to 6.120 V, at the test.

    warning: re-enable voltage: 0.9 % of the boards drawn from good parts lie outside the profile's
    present limits, 6.240 to 6.560 V, at the test.
    "#);
}

/// The keys of the contract, their order where it is fixed, and what must hold between the numbers.
#[test]
fn json_keeps_its_keys_and_its_order_of_limits() {
    let said = Desk::new().limits(&["--format", "json", "--seed", "7", "--samples", "20000"]);
    said.ended(0);
    assert_eq!(said.out.lines().count(), 1, "one line: {said}");
    let json = said.json();
    let keys =
        |value: &Value| -> Vec<String> { value.as_object().expect("an object").keys().cloned().collect() };
    let sorted = |mut list: Vec<&str>| -> Vec<String> {
        list.sort_unstable();
        list.into_iter().map(str::to_owned).collect()
    };
    let known = |value: &Value, list: Vec<&str>| {
        let mut found = keys(value);
        found.sort_unstable();
        assert_eq!(found, sorted(list), "{value}");
    };
    known(
        &json,
        vec![
            "schema",
            "board",
            "revision",
            "basis",
            "samples",
            "seed",
            "guard_band_factor",
            "quantities",
            "warnings",
        ],
    );
    assert_eq!(
        (&json["schema"], &json["basis"], &json["seed"], &json["samples"]),
        (&1.into(), &"worst_case".into(), &7.into(), &20_000.into())
    );
    let quantities = json["quantities"].as_array().expect("a list");
    assert_eq!(
        quantities.iter().map(|q| &q["name"]).collect::<Vec<_>>(),
        ["trip", "re_enable", "hysteresis"]
    );
    for quantity in quantities {
        known(
            quantity,
            vec![
                "name",
                "unit",
                "nominal",
                "worst_case",
                "root_sum_square",
                "three_sigma",
                "monte_carlo",
                "contributions",
                "data_sheet",
                "design",
                "environment_share",
                "expanded_uncertainty",
                "guard_band",
                "test",
                "profile",
                "good_boards_outside_profile",
                "process",
                "risks",
            ],
        );
        known(
            &quantity["monte_carlo"],
            vec!["mean", "standard_deviation", "coverage_0.9973", "coverage_0.95"],
        );
        known(
            &quantity["risks"],
            vec![
                "nonconforming",
                "consumer",
                "producer",
                "consumer_without_guard_band",
                "producer_without_guard_band",
            ],
        );
        let end = |path: &str| quantity.pointer(path).and_then(Value::as_f64).expect("a number");
        let inside = |inner: &str, outer: &str| {
            assert!(
                end(&format!("{outer}/min")) <= end(&format!("{inner}/min")),
                "{inner} in {outer}: {quantity}"
            );
            assert!(
                end(&format!("{inner}/max")) <= end(&format!("{outer}/max")),
                "{inner} in {outer}: {quantity}"
            );
        };
        inside("/test", "/design");
        inside("/monte_carlo/coverage_0.9973", "/worst_case");
        inside("/monte_carlo/coverage_0.95", "/monte_carlo/coverage_0.9973");
        let shares: f64 = quantity["contributions"]
            .as_array()
            .expect("a list")
            .iter()
            .map(|part| part["variance_share"].as_f64().expect("a number"))
            .sum();
        assert!((shares - 1.0).abs() < 1e-9, "{shares}");
    }
    for warning in json["warnings"].as_array().expect("a list") {
        assert!(warning["code"].is_string() && warning["text"].is_string(), "{warning}");
    }
}

#[test]
fn csv_has_a_line_per_quantity_and_kind() {
    let said = Desk::new().limits(&["--format", "csv"]);
    said.ended(0);
    let mut reader = csv::Reader::from_reader(said.out.as_bytes());
    assert_eq!(reader.headers().expect("a heading"), vec!["quantity", "limits", "min_v", "max_v"]);
    let rows: Vec<csv::StringRecord> = reader.records().map(|row| row.expect("a row")).collect();
    assert_eq!(rows.len(), 3 * 9);
    assert!(
        rows.iter().all(|row| row[2].parse::<f64>().expect("a number") < row[3].parse().expect("a number"))
    );
}

#[test]
fn writing_changes_the_limits_and_nothing_else_and_says_what() {
    let desk = Desk::new();
    fs::set_permissions(desk.profile(), fs::Permissions::from_mode(0o640)).expect("own file");
    let said = desk.limits(&["--write", "--uncertainty", "1.6 mV"]);
    said.ended(0);
    says!(said.err, @r#"
    note: the decision rule of profile.toml keeps 1 x U from the limits at every run, so the limits are written without that; with rule = "simple" in [decision] they would hold it themselves
    wrote profile.toml:
    -trip        = { min = "5.88 V", max = "6.12 V" }        # falling: the switch opens
    +trip        = { min = "5.875 V", max = "6.131 V" }        # falling: the switch opens
    -re_enable   = { min = "6.24 V", max = "6.56 V" }        # rising: the switch closes again
    +re_enable   = { min = "6.171 V", max = "6.640 V" }        # rising: the switch closes again
    -hysteresis  = { min = "300 mV", max = "500 mV" }        # re-enable less trip of the same board
    +hysteresis  = { min = "297 mV", max = "508 mV" }        # re-enable less trip of the same board
    "#);
    let (old, new) = (RIVER_NODE.lines(), desk.text());
    let changed: Vec<&str> =
        old.zip(new.lines()).filter(|(old, new)| old != new).map(|(_, new)| new).collect();
    assert_eq!(changed.len(), 3, "{new}");
    assert_eq!(new.lines().count(), RIVER_NODE.lines().count());
    assert_eq!(fs::metadata(desk.profile()).expect("a file").permissions().mode() & 0o777, 0o640);
    let again = desk.limits(&["--write", "--uncertainty", "1.6 mV"]);
    again.ended(0);
    again.warns(&["has these limits already"]);
    assert_eq!(desk.text(), new);
}

/// A rule without a guard band leaves it to the limits; the usual one keeps it by itself, and it is not taken off twice.
#[test]
fn the_guard_band_is_written_only_where_the_rule_does_not_keep_it() {
    let written = |rule: &str| {
        let desk = Desk::with(&format!("{RIVER_NODE}\n[decision]\n{rule}\n"));
        let said = desk.limits(&["--write", "--uncertainty", "20 mV"]);
        said.ended(0);
        let profile = ebbmark::profile::Profile::read("profile.toml", &desk.text()).expect("a good profile");
        let trip = profile.limits[&ebbmark::profile::QuantityName::Trip];
        (trip.min.expect("both ends"), trip.max.expect("both ends"), said.err.contains("x U from the limits"))
    };
    let (simple, guarded) = (written("rule = \"simple\""), written("rule = \"guard_band\""));
    assert_eq!((simple.2, guarded.2), (false, true));
    for (low, high) in [(guarded.0, simple.0), (simple.1, guarded.1)] {
        // Both rounded to whole millivolts.
        assert!((high - low - 20e-3).abs() < 1.1e-3, "{simple:?} {guarded:?}");
    }
    let half = written("rule = \"guard_band\"\nguard_band = \"50 %\"");
    assert!((half.0 - guarded.0 - 10e-3).abs() < 1.1e-3, "{half:?} {guarded:?}");
    let bounded = written("rule = \"wrong_acceptance\"");
    assert_eq!((bounded.0, bounded.1), (guarded.0, guarded.1));
}

#[test]
fn a_link_to_a_profile_stays_a_link() {
    let desk = Desk::new();
    let real = desk.0.path().join("real.toml");
    fs::rename(desk.profile(), &real).expect("own file");
    symlink("real.toml", desk.profile()).expect("a link");
    desk.limits(&["--write"]).ended(0);
    assert!(fs::symlink_metadata(desk.profile()).expect("a link").is_symlink());
    assert_ne!(fs::read_to_string(real).expect("a file"), RIVER_NODE);
}

/// The parts allow a re-enable above 6.60 V; a supply that starts there would never see the board come back.
#[test]
fn limits_that_contradict_the_supply_are_not_written() {
    let profile = RIVER_NODE.replace("start = \"7.60 V\"", "start = \"6.60 V\"");
    let desk = Desk::with(&profile);
    let said = desk.limits(&["--write"]);
    said.refuses(2, &["nothing was written", "limits.re_enable.max", "not below supply.start = \"6.60 V\""]);
    assert_eq!(desk.text(), profile);
}

/// 30 mV of uncertainty and a guard band of ten times that leave nothing of 400 mV.
#[test]
fn where_no_test_limits_are_left_nothing_is_written() {
    let desk = Desk::new();
    let said = desk.limits(&["--write", "--uncertainty", "30 mV", "--guard-band", "10"]);
    said.refuses(2, &["nothing is left between the test limits of the trip voltage"]);
    assert!(said.out.contains("none left") && said.out.contains("warning: trip voltage"), "{said}");
    assert_eq!(desk.text(), RIVER_NODE);
}

#[test]
fn a_profile_without_parts_says_what_is_wanted() {
    let (own, _) = RIVER_NODE.split_once("[detector]").expect("it has parts");
    let said = Desk::with(own).limits(&[]);
    said.refuses(2, &["profile.toml does not say what its thresholds are made of", "[detector]"]);
    assert_eq!(said.out, "");
}

#[test]
fn a_known_production_takes_the_place_of_the_parts() {
    let desk = Desk::new();
    let consumer = |more: &[&str]| {
        let said = desk.limits(&[&["--format", "json", "--uncertainty", "20 mV"][..], more].concat());
        said.ended(0);
        let json = said.json();
        (json["quantities"][0]["process"].clone(), json["quantities"][0]["risks"]["consumer"].as_f64())
    };
    let (process, at_the_edge) = consumer(&["--process-mean", "trip=6.10 V", "--process-sd", "trip=40 mV"]);
    assert_eq!(process, serde_json::json!({ "mean": 6.1, "standard_deviation": 0.04 }));
    let (_, from_parts) = consumer(&[]);
    assert!(at_the_edge > from_parts, "{at_the_edge:?} and {from_parts:?}");
}

#[test]
fn wrong_arguments_say_what_was_wanted() {
    let desk = Desk::new();
    for (argument, phrase) in [
        ("--uncertainty=1.6", "the unit is missing"),
        ("--uncertainty=-1 mV", "wanted zero or more"),
        ("--process-sd=trips=1 mV", "wanted trip=, re_enable= or hysteresis="),
        ("--samples=1", "wanted a whole number from 2"),
        ("--guard-band=NaN", "wanted a number from 0 to 10"),
    ] {
        desk.limits(&[argument]).refuses(2, &[phrase]);
    }
}

#[test]
fn the_bench_s_voltmeter_counts() {
    let desk = Desk::new();
    let bench = include_str!("../../../instruments/benches/first-bench.toml");
    fs::write(desk.0.path().join("bench.toml"), bench).expect("writable");
    let uncertainty = |more: &[&str]| {
        let said = desk.limits(&[&["--format", "json"], more].concat());
        said.ended(0);
        said.json()["quantities"][0]["expanded_uncertainty"].as_f64().expect("a number")
    };
    // 2 mV / root 12 x 2 from the profile's resolution; with the 10 V range of the 6.5-digit class, 0.0035 % of 6 V +
    // 0.0005 % of 10 V = 0.26 mV, rectangular, a little more. By hand.
    let bracket = 0.002 / 12.0_f64.sqrt();
    let meter = (35e-6 * 6.0 + 5e-6 * 10.0) / 3.0_f64.sqrt();
    assert!((uncertainty(&[]) - 2.0 * bracket).abs() < 1e-12);
    let with = uncertainty(&["--bench", "bench.toml"]);
    assert!((with - 2.0 * bracket.hypot(meter)).abs() < 2e-7, "{with}, resolution of the meter aside");
}
