//! Traces of a circuit simulated by ngspice, which shares no code with this project: the analysis must find the truth in
//! `cases.json` within its own uncertainty, or say what is wrong. Origin: `tests/data/circuit/ORIGIN.md`.
#![expect(clippy::expect_used, reason = "a test stops at what it cannot read")]

use crate::river;
use ebbmark::analysis::{About, Analysis, FindingCode, Quantity, analyse, from_rates};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::trace::{Trace, csv};
use ebbmark::verdict::{Decision, Outcome, Verdict, judge};
use std::path::{Path, PathBuf};
use std::time::Duration;

/// What the ramps must give: thresholds to 3 mV, delays to a fifth.
const RAMP_VOLTS: f64 = 0.003;
const RAMP_SHARE: f64 = 0.2;
/// Coverage factor of the stated expanded uncertainty.
const COVERAGE: f64 = 2.0;

fn folder() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/data/circuit")
}

fn trace(case: &str) -> Trace {
    let name = format!("{case}.csv");
    let text = std::fs::read_to_string(folder().join(&name)).expect("a trace");
    csv::read(&name, &text).expect("a good file")
}

fn truth(case: &str, key: &str) -> f64 {
    let text = std::fs::read_to_string(folder().join("cases.json")).expect("the cases");
    let cases: serde_json::Value = serde_json::from_str(&text).expect("JSON");
    cases[case][key].as_f64().expect("a number")
}

/// The profile that fits a case: its board is allowed the delay it has.
fn profile_of(case: &str) -> Profile {
    let mut profile = river::profile();
    let delay = Duration::from_secs_f64(truth(case, "delay"));
    profile.timing.detect_delay = profile.timing.detect_delay.max(delay);
    profile.timing.release_delay = profile.timing.release_delay.max(delay);
    profile
}

fn judged(case: &str) -> (Analysis, Verdict) {
    let (trace, profile) = (trace(case), profile_of(case));
    let analysis = analyse(&trace, &profile);
    let verdict = judge(&analysis, &profile, &trace.ending);
    (analysis, verdict)
}

fn quantity(analysis: &Analysis, name: QuantityName) -> Option<&Quantity> {
    analysis.quantities.iter().find(|quantity| quantity.name == name)
}

fn found(analysis: &Analysis, code: FindingCode) -> bool {
    analysis.findings.iter().any(|finding| finding.code == code)
}

fn assert_true_within_uncertainty(case: &str, analysis: &Analysis) {
    let wanted = [
        (QuantityName::Trip, truth(case, "trip")),
        (QuantityName::ReEnable, truth(case, "rel")),
        (QuantityName::Hysteresis, truth(case, "rel") - truth(case, "trip")),
    ];
    for (name, truth) in wanted {
        let quantity =
            quantity(analysis, name).unwrap_or_else(|| panic!("{case}: no {name:?}: {analysis:#?}"));
        let expanded = COVERAGE * quantity.standard_uncertainty;
        assert!((quantity.value - truth).abs() <= expanded, "{case}: {name:?} {truth} V, found {quantity:?}");
    }
}

fn decision(verdict: &Verdict, name: QuantityName) -> Option<Decision> {
    verdict.judged.iter().find(|judged| judged.quantity.name == name)?.decision
}

#[test]
fn a_good_board_passes_with_the_truth_inside_the_uncertainty() {
    let (analysis, verdict) = judged("good");
    assert_true_within_uncertainty("good", &analysis);
    assert_eq!(verdict.outcome, Outcome::Pass, "{verdict:#?}");
    let trip = quantity(&analysis, QuantityName::Trip).expect("a trip");
    // One step of 10 mV: 2.9 mV, and a noise of 0.3 mV hardly adds to it.
    assert!((0.0028..0.0033).contains(&trip.standard_uncertainty), "{trip:?}");
    // Pull-up, detector and leakage at 5.8 V: 5.8 / 3.3 M + 0.9 u + 5.8 / 50 M = 2.77 uA.
    let off = quantity(&analysis, QuantityName::OffCurrent).expect("an off current");
    assert!((off.value - 2.774e-6).abs() < 0.03e-6, "{off:?}");
}

#[test]
fn the_drop_in_long_leads_is_taken_off() {
    let (analysis, verdict) = judged("lead_drop");
    assert_true_within_uncertainty("lead_drop", &analysis);
    assert_eq!(verdict.outcome, Outcome::Pass, "{verdict:#?}");
    assert!(!found(&analysis, FindingCode::SourceResistance));
}

#[test]
fn steps_faster_than_a_slow_detector_widen_the_bracket_and_say_so() {
    let (analysis, verdict) = judged("slow_detector");
    assert_true_within_uncertainty("slow_detector", &analysis);
    assert!(found(&analysis, FindingCode::DwellShorterThanDelay));
    assert_eq!(verdict.outcome, Outcome::Pass, "a remark about the bench stops no judgement: {verdict:#?}");
}

#[test]
fn a_leaking_switch_fails_on_its_off_current_and_the_path_is_named() {
    let (analysis, verdict) = judged("leaking_switch");
    assert_true_within_uncertainty("leaking_switch", &analysis);
    assert_eq!(verdict.outcome, Outcome::Fail);
    assert_eq!(decision(&verdict, QuantityName::OffCurrent), Some(Decision::Fail));
    assert_eq!(decision(&verdict, QuantityName::Trip), Some(Decision::Pass));
    assert!(found(&analysis, FindingCode::OffCurrentHigh));
    let finding = analysis.findings.iter().find(|finding| finding.code == FindingCode::OffPathResistive);
    let text = &finding.expect("a finding").text;
    // Pull-up and leak in parallel: 3.3 M || 220 k || 50 M = 205 k.
    assert!(
        text.contains("20") && text.contains("kΩ in all") && text.contains("across the switch"),
        "{text}"
    );
}

#[test]
fn a_trip_above_its_limit_fails_on_the_trip() {
    let (analysis, verdict) = judged("high_trip");
    assert_true_within_uncertainty("high_trip", &analysis);
    assert_eq!(verdict.outcome, Outcome::Fail);
    assert_eq!(decision(&verdict, QuantityName::Trip), Some(Decision::Fail));
}

#[test]
fn chatter_on_a_resistive_source_is_named_and_not_blamed_on_the_board() {
    let (analysis, verdict) = judged("chatter");
    assert!(found(&analysis, FindingCode::Chatter) && found(&analysis, FindingCode::SourceResistance));
    assert_eq!(quantity(&analysis, QuantityName::Trip), None);
    assert_eq!(verdict.outcome, Outcome::Invalid);
}

#[test]
fn a_board_that_never_trips_is_named_and_fails() {
    let (analysis, verdict) = judged("never_trips");
    assert!(found(&analysis, FindingCode::NeverTrips));
    assert_eq!(quantity(&analysis, QuantityName::Trip), None);
    assert_eq!(quantity(&analysis, QuantityName::ReEnable), None);
    assert_eq!(verdict.outcome, Outcome::Fail);
}

#[test]
fn missing_accuracy_is_said_about_the_bench() {
    let (analysis, _) = judged("good");
    let finding = analysis.findings.iter().find(|finding| finding.code == FindingCode::AccuracyNotIncluded);
    assert_eq!(finding.map(|finding| finding.about), Some(About::Bench));
}

#[test]
fn a_single_ramp_with_its_delay_declared_still_holds_the_truth() {
    for case in ["ramp_0v2", "ramp_0v8", "ramp_3v2"] {
        let (analysis, _) = judged(case);
        assert_true_within_uncertainty(case, &analysis);
    }
}

#[test]
fn three_rates_give_the_thresholds_at_rest_and_the_delay() {
    let cases = ["ramp_0v2", "ramp_0v8", "ramp_3v2"];
    let analysis = from_rates(&cases.map(trace), &profile_of("ramp_0v2"));
    assert_true_within_uncertainty("ramp_0v2", &analysis);
    let value = |name| quantity(&analysis, name).expect("found").value;
    assert!((value(QuantityName::Trip) - truth("ramp_0v2", "trip")).abs() < RAMP_VOLTS, "{analysis:#?}");
    assert!((value(QuantityName::ReEnable) - truth("ramp_0v2", "rel")).abs() < RAMP_VOLTS, "{analysis:#?}");
    let delay = truth("ramp_0v2", "delay");
    for name in [QuantityName::DetectDelay, QuantityName::ReleaseDelay] {
        assert!((value(name) - delay).abs() < RAMP_SHARE * delay, "{name:?}: {analysis:#?}");
    }
}
