//! A bench checked as a whole: at rest, with the output on, with a known load, and with reference boards.

use super::workplace::{BOARD, Workplace, always, at, quick_profile};
use super::{Said, ebbmark};
use crate::simulated_bench::setup;
use ebbmark::record::{BenchEntry, BenchFound, Occasion};
use ebbmark::sim::bench::InFixture;
use ebbmark::sim::device::Kind;
use ebbmark::sim::link_faults::Effect;
use ebbmark::units::{Ohms, Volts};

fn check(place: &Workplace, more: &[&str]) -> Said {
    ebbmark(place.folder(), &[&["bench", "check", "bench.toml"][..], more].concat())
}

/// The last entry about the bench, the output off in truth behind it.
#[track_caller]
fn last(place: &Workplace, said: &Said) -> BenchEntry {
    assert!(!place.bench.output(), "the output is on\n{said}");
    place.log().bench_entries().expect("readable").pop().unwrap_or_else(|| panic!("nothing kept\n{said}"))
}

#[track_caller]
fn not_ready(place: &Workplace, more: &[&str], phrase: &str) {
    let said = check(place, more);
    said.ended(3);
    assert!(said.out.contains("The bench is not ready."), "{said}");
    let problems = last(place, &said).problems;
    assert!(problems.iter().any(|told| told.contains(phrase)), "no {phrase:?} in {problems:?}");
}

#[test]
fn unless_asked_for_the_output_is_never_switched_on() {
    let place = Workplace::with(vec![always(Kind::Supply, at("OUTP ON"), Effect::HangUp)]);
    let said = check(&place, &["--format", "json"]);
    said.ended(0);
    let found = said.json();
    assert_eq!(found["ready"], true);
    let check = &found["check"]["found"];
    assert_eq!(check["instruments"].as_array().map(Vec::len), Some(4), "{said}");
    assert!(
        check["instruments"][0]["slowest_response_s"].as_f64()
            >= check["instruments"][0]["response_s"].as_f64()
    );
    assert_eq!(check["rest"].as_array().map(Vec::len), Some(4), "two ranges, two voltmeters: {said}");
    assert!(last(&place, &said).is_good());
}

#[test]
fn an_overdue_calibration_makes_a_bench_not_ready_and_a_profile_may_refuse_it() {
    let place = Workplace::new();
    let roles = "roles = [\"ammeter\"]\n";
    place.edit("bench.toml", roles, &format!("{roles}calibrated = 2001-02-03\n"));
    not_ready(&place, &[], "the calibration of ammeter was due 2002-02-03");
    let rules = "when_calibration_overdue = \"refuse\"";
    place.put("profile.toml", &format!("{}\n[bench]\n{rules}\n", quick_profile()));
    place.test(&[]).refuses(2, &["past their calibration: ammeter, due 2002-02-03"]);
    assert!(place.runs().is_empty());
}

/// The leads of the simulation are known: the measured ones lie within U of them.
#[test]
fn a_known_load_shows_the_leads() {
    let place = Workplace::holding(InFixture::Resistor(Ohms(55.0)), Vec::new());
    let energised =
        ["--energise", "--load", "55 ohm", "--test-voltage", "7.6 V", "--profile", "profile.toml"];
    let said = check(&place, &energised);
    said.ended(0);
    let BenchFound::Check(found) = last(&place, &said).found else { panic!("{said}") };
    let (leads, truth) = (found.leads.expect("four steps"), setup().wiring.lead_resistance.0);
    assert!(
        (leads.leads_ohm - truth).abs() < 2.0 * leads.standard_uncertainty_ohm,
        "{leads:?}, true {truth}"
    );
    assert!(leads.standard_uncertainty_ohm < 0.03, "{leads:?}");
    assert!((found.load.expect("seen").found_ohm - 55.0).abs() < 0.6);

    let wrong = ["--energise", "--load", "47 ohm", "--test-voltage", "5 V", "--profile", "profile.toml"];
    not_ready(&place, &wrong, "look whether it is the load named");
    check(&place, &["--energise", "--load", "55 ohm", "--test-voltage", "7.6 V"])
        .refuses(2, &["a small resistor"]);
}

/// A megohm of the simulation draws 3 µA at 3 V, whatever the ammeter says.
#[test]
fn a_known_resistor_is_compared_on_the_small_ranges_and_kept() {
    let place = Workplace::holding(InFixture::Resistor(Ohms(1e6)), Vec::new());
    let said = check(&place, &["--energise", "--standard", "1 Mohm"]);
    said.ended(0);
    assert!(said.out.contains("ammeter through 1.000 MΩ ± 1 % at "), "{said}");
    let BenchFound::Check(found) = last(&place, &said).found else { panic!("{said}") };
    assert_eq!(found.standard.len(), 2, "100 µA and 1 mA: {said}");
    for compared in &found.standard {
        assert!((compared.expected_a - 3e-6).abs() < 0.01e-6, "{said}");
        assert!(compared.normalised_error <= 1.0, "{said}");
    }

    not_ready(
        &place,
        &["--energise", "--standard", "2 Mohm"],
        "wanted at most 1: look whether it is the resistor",
    );
    check(&place, &["--energise", "--standard", "100 kohm"]).refuses(2, &["for at most 10.00 µA"]);
    let above = ["--energise", "--standard", "10 Mohm", "--test-voltage", "9 V", "--profile", "profile.toml"];
    check(&place, &above).refuses(2, &["the maximum of the profile"]);
    check(&place, &["--standard", "1 Mohm"]).refuses(2, &["--energise"]);
}

#[test]
fn a_supply_and_a_voltmeter_that_disagree_are_told() {
    let mut apart = setup();
    apart.supply.offset_error = Volts(0.05);
    let place = Workplace::of(&apart);
    check(&place, &[]).ended(0);
    not_ready(&place, &["--energise"], "look for an open or loose sense lead");
}

#[test]
fn a_live_fixture_and_a_garbled_reading_end_it_with_the_output_off() {
    let live = Effect::Garbage(b"+1.0500000E+00\n".to_vec());
    let place = Workplace::with(vec![always(Kind::Voltmeter, at("READ?"), live)]);
    not_ready(&place, &["--energise"], "stood at the terminals with the output off");

    let garbage = Effect::Garbage(b"\xff~\n".to_vec());
    let place = Workplace::with(vec![always(Kind::Ammeter, at("READ?"), garbage)]);
    not_ready(&place, &["--energise"], "READ?");
}

#[test]
fn a_test_waits_for_a_check_that_is_young_enough() {
    let place = Workplace::new();
    let rules = |rules: &str| place.put("profile.toml", &format!("{}\n[bench]\n{rules}\n", quick_profile()));
    rules("check_every = \"24 h\"");
    place.test(&[]).refuses(2, &["check: never done with these instruments", "ebbmark bench check"]);
    check(&place, &[]).ended(0);
    rules("check_every = \"1 ms\"");
    place.test(&[]).refuses(2, &["check: done 0 min ago"]);
    assert!(place.runs().is_empty() && !place.bench.output());
    rules("check_every = \"24 h\"");
    place.test(&[]).ended(0);
    rules("check_every = \"1 ms\"\nwhen_overdue = \"warn\"");
    let said = place.test(&["--again"]);
    said.ended(0);
    said.warns(&["note: check: done"]);
}

/// A reference board drawn by the simulation, its values as the simulation defines them.
#[test]
fn a_reference_board_must_come_out_as_what_it_is_known_to_be() {
    let place = Workplace::new();
    let (trip, hysteresis) = (setup().board.trip.0, setup().board.hysteresis.0);
    let reference = |must: &str, trip: f64| {
        format!(
            "schema = 1\nserial_number = \"{BOARD}\"\ntitle = \"reference\"\nmust = \"{must}\"\n[values]\n\
             trip = {{ value = \"{trip} V\", expanded_uncertainty = \"40 mV\" }}\n\
             hysteresis = {{ value = \"{hysteresis} V\", expanded_uncertainty = \"60 mV\" }}\n"
        )
    };
    let profile = format!("{}\n[bench]\nreference_every = \"24 h\"\n", quick_profile());
    place.put("profile.toml", &profile);
    place.put("good.toml", &reference("pass", trip));
    let measure = |file: &str| check(&place, &["--profile", "profile.toml", "--reference", file]);
    place.test(&[]).refuses(2, &["reference board: never done"]);
    let said = measure("good.toml");
    said.ended(0);
    let entry = last(&place, &said);
    let BenchFound::Reference { result, run, .. } = &entry.found else { panic!("{said}") };
    assert!(result.compared.iter().all(|found| found.normalised_error <= 1.0), "{result:?}");
    assert_eq!(place.runs()[0].identity.run, *run);
    assert_eq!(place.runs()[0].identity.occasion, Occasion::Reference);
    place.test(&[]).ended(0);

    // Known to be bad, and passed.
    place.put("bad.toml", &reference("fail", trip).replace(BOARD, "RN900002"));
    let said = measure("bad.toml");
    said.ended(3);
    assert!(last(&place, &said).problems[0].contains("would let bad boards through"), "{said}");
    place.test(&["--again"]).refuses(2, &["reference board RN900002: 0 min ago it found", "must FAIL"]);

    // Known to be elsewhere: 0.2 V over the root of 40 mV squared and what the bench adds is more than 1.
    place.put("moved.toml", &reference("pass", trip + 0.2));
    let said = measure("moved.toml");
    said.ended(3);
    assert!(last(&place, &said).problems[0].contains("E_n = "), "{said}");
}
