//! What a run says or refuses before anything is switched on.

use super::workplace::Workplace;

/// 2 ohm and the ammeter's 0.1 ohm at 120.5 mA are 253 mV, more than half of 300 mV.
#[test]
fn leads_on_which_no_board_comes_to_rest_are_refused() {
    let place = Workplace::new();
    let bench = std::fs::read_to_string(place.folder().join("bench.toml")).expect("a file");
    assert!(!bench.contains("[fixture]"), "{bench}");
    place.put("bench.toml", &format!("{bench}\n[fixture]\nlead_resistance = \"2 ohm\"\n"));
    let said = place.test(&[]);
    said.refuses(
        2,
        &[
            "cannot be tested on bench sim",
            "of leads and ammeter move the terminals by 253",
            "shorten the leads",
        ],
    );
    assert!(place.runs().is_empty() && !place.bench.output(), "{said}");
}

#[test]
fn a_capacitor_that_cannot_be_charged_in_time_is_told() {
    let place = Workplace::new();
    place.edit("profile.toml", "[timing]", "capacitance = \"470 uF\"\n[timing]");
    let said = place.test(&[]);
    said.warns(&["note: load.capacitance of 470.0 µF takes 10.8 ms to charge", "678.2 mA or more"]);
    assert_eq!(place.runs().len(), 1, "the run goes on\n{said}");
}

/// Three instruments at 115200 baud leave some 4 ms of a reading open; half of three times that is more than 2 ms.
#[test]
fn a_delay_limit_too_narrow_for_the_readings_is_told() {
    let place = Workplace::new();
    place.edit("profile.toml", "[limits]", "[limits]\ndetect_delay = { max = \"5 ms\" }");
    let said = place.test(&[]);
    said.warns(&[
        "note: the limits of the detect delay are 5.000 ms wide",
        "improve first: a reading of 20.00 ms takes",
    ]);
}
