//! Profiles, bench files and numbers that are wrong: named with place, found and wanted, before any port is opened.

use super::Said;
use super::workplace::{BOARD, Workplace};
use ebbmark::sim::device::Kind;
use std::fs;

/// Refused as a mistake in a file: no instrument heard of it, no run is in the log.
#[track_caller]
fn refused(place: &Workplace, said: &Said, phrases: &[&str]) {
    said.refuses(2, phrases);
    assert_eq!(said.out, "", "{said}");
    assert_eq!(said.err.matches("error: error").count(), 0, "{said}");
    for kind in [Kind::Supply, Kind::Ammeter, Kind::Voltmeter, Kind::LoadVoltmeter] {
        assert_eq!(place.bench.take_exchanges(kind), [], "{kind:?} was opened\n{said}");
    }
    assert_eq!((place.bench.output(), place.runs()), (false, vec![]));
}

/// What is said of a profile in which `from` is replaced by `to`.
#[track_caller]
fn profile_with(from: &str, to: &str, phrases: &[&str]) {
    let place = Workplace::new();
    place.edit("profile.toml", from, to);
    refused(&place, &place.test(&[]), phrases);
}

#[test]
fn a_wrong_unit_is_named_with_its_line_and_the_unit_wanted() {
    profile_with(
        "\"7.60 V\"",
        "\"7.60 A\"",
        &["profile.toml:15:9", "supply.start", "\"7.60 A\"", "a current", "wanted a voltage"],
    );
}

#[test]
fn an_unknown_key_is_named_with_the_nearest_known_one() {
    profile_with(
        "floor =",
        "flor =",
        &["profile.toml:16:1", "unknown key \"flor\"", "did you mean \"floor\""],
    );
}

#[test]
fn crossed_limits_are_named_with_both_values() {
    profile_with(
        "max = \"6.12 V\"",
        "max = \"5.12 V\"",
        &["profile.toml:39:23", "limits.trip.min = \"5.88 V\": above limits.trip.max = \"5.12 V\""],
    );
}

#[test]
fn a_set_point_above_the_profile_s_maximum_is_refused() {
    profile_with(
        "start = \"7.60 V\"",
        "start = \"9.00 V\"",
        &["profile.toml:15:9", "supply.start = \"9.00 V\": above supply.maximum = \"8.40 V\""],
    );
}

#[test]
fn every_problem_of_a_profile_is_said_at_once() {
    let place = Workplace::new();
    place.edit("profile.toml", "\"7.60 V\"", "\"7.60\"");
    place.edit("profile.toml", "resistance = \"55 ohm\"", "resistance = \"55 F\"");
    refused(&place, &place.test(&[]), &["profile.toml:15:9", "profile.toml:22:14"]);
}

#[test]
fn a_supply_that_cannot_reach_the_profile_s_voltages_is_refused() {
    let place = Workplace::new();
    place.edit("programmable-supply.toml", "max = \"32 V\"", "max = \"7 V\"");
    refused(&place, &place.test(&[]), &["RN-204 cannot be tested on bench sim", "7.000 V", "8.400 V"]);
}

#[test]
fn a_wrong_key_in_a_bench_file_is_named_with_its_line() {
    let place = Workplace::new();
    place.edit("bench.toml", "roles = [\"source\"]", "role = [\"source\"]");
    refused(&place, &place.test(&[]), &["bench.toml:9:1", "role", "roles"]);
}

#[test]
fn a_serial_number_of_another_board_is_refused() {
    let place = Workplace::new();
    let said = place.test_board("XY000123", &[]);
    refused(&place, &said, &["\"XY000123\"", "RN-204", "RN[0-9]{6}", "scan again"]);
}

#[test]
fn a_file_that_is_not_there_is_named() {
    let place = Workplace::new();
    fs::remove_file(place.folder().join("profile.toml")).expect("it was there");
    refused(&place, &place.test(&[]), &["cannot read profile.toml"]);
    fs::remove_file(place.folder().join("bench.toml")).expect("it was there");
    refused(&place, &place.test(&[]), &["cannot read bench.toml"]);
}

#[test]
fn a_log_that_cannot_be_written_is_refused_before_anything_is_opened() {
    let place = Workplace::new();
    place.put("in-the-way", "a file");
    let said = place.test(&["--logs", "in-the-way"]);
    refused(&place, &said, &["in-the-way/sim", "see that the folder exists, is writable"]);
}

#[test]
fn a_station_that_cannot_be_a_folder_is_refused() {
    let place = Workplace::new();
    let said = place.test_board(BOARD, &["--station", "../elsewhere"]);
    refused(&place, &said, &["station \"../elsewhere\"", "such as \"bench-1\""]);
}

#[test]
fn a_missing_argument_is_named_with_the_way_to_help() {
    let place = Workplace::new();
    let said = super::ebbmark(place.folder(), &["test", "profile.toml"]);
    refused(&place, &said, &["--bench", "--serial-number", "--help"]);
}
