//! What the program says of a board against what the simulated board really is.

use super::workplace::{BOARD, Running, Workplace};
use ebbmark::profile::Profile;
use ebbmark::sim::{Condition, Setup};
use ebbmark::units::Volts;

/// Good boards and benches; the same each time.
const SEEDS: [u64; 3] = [1, 2, 3];

/// Once in a thousand times a value of a normal distribution lies farther off than so many U of 95 %.
const FARTHEST: f64 = 1.7;

/// The truth is that of the simulation's world, which never goes over a port.
#[test]
fn what_is_said_of_good_boards_is_true_within_the_expanded_uncertainty() {
    let text = include_str!("../../../profiles/river-node.toml");
    let profile = Profile::read("river-node.toml", text).expect("a sound profile");
    let runs = SEEDS.map(|seed| {
        let place = Workplace::of(&Setup::new(&profile, Condition::Good, seed));
        place.put("profile.toml", text);
        let arguments =
            ["test", "profile.toml", "--bench", "bench.toml", "--serial-number", BOARD, "--format", "json"];
        let running = Running::start(place.folder(), &arguments);
        (seed, place, running)
    });
    let mut outside = Vec::new();
    for (seed, place, running) in runs {
        let said = running.end();
        assert_eq!(said.code, 0, "seed {seed}: {said}");
        let json = said.json();
        let truth = place.bench.world().with(|world| world.truth());
        for name in ["trip", "re_enable", "hysteresis", "off_current"] {
            let quantities = json["quantities"].as_array().expect("an array");
            let quantity = quantities.iter().find(|quantity| quantity["name"] == name);
            let quantity = quantity.unwrap_or_else(|| panic!("seed {seed}: no {name} in {said}"));
            let number =
                |key: &str| quantity[key].as_f64().unwrap_or_else(|| panic!("seed {seed}: no {key}: {said}"));
            let (value, expanded) = (number("value"), number("expanded_uncertainty"));
            let wanted = match name {
                "trip" => truth.trip.0,
                "re_enable" => truth.re_enable.0,
                "hysteresis" => truth.hysteresis.0,
                _ => truth.off_current(Volts(number("at"))).0,
            };
            let error = (value - wanted).abs();
            let what = format!("seed {seed}: {name} {value} ± {expanded}, truly {wanted}");
            assert!(expanded > 0.0 && error <= FARTHEST * expanded, "{what}");
            outside.extend((error > expanded).then_some(what));
        }
    }
    // Of twelve values that U covers with 95 %, more than two lie outside once in fifty times (binomial law), and the
    // hysteresis goes with a threshold.
    assert!(outside.len() <= 2, "{outside:#?}");
}
