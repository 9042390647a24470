//! A 6.0 V trip from a 3.0 V detector behind a divider: our own calculation by an independent program.

use super::{close, number, same, within_four_errors};
use crate::river;
use ebbmark::limits::{
    Basis, Condition, Proposal, Question, ThresholdStack, Warning, WarningCode, monte_carlo,
};
use ebbmark::profile::{Detector, Divider, Environment, Parts, QuantityName, Spread, Temperatures};
use ebbmark::units::{Celsius, Ohms, PerKelvin, Volts};
use serde_json::Value;
use std::collections::BTreeMap;

const SEED: u64 = 20_261_202;
const BOARDS: usize = 200_000;
const TIMES: f64 = 20.0;

fn temperatures(min: f64, max: f64) -> Temperatures {
    Temperatures { min: Celsius(min), max: Celsius(max) }
}

/// The parts of the worked example. Only the detector drifts; boards are tested at the data sheet's temperature.
fn parts() -> Parts {
    Parts {
        detector: Detector {
            trip: Volts(3.0),
            accuracy: 0.02,
            hysteresis: Spread { min: 0.03, typical: Some(0.05), max: 0.08 },
            tempco: PerKelvin(100e-6),
            ageing: 0.0,
            minimum_voltage: None,
            noise: None,
        },
        divider: Some(Divider {
            top: Ohms(100e3),
            bottom: Ohms(100e3),
            tolerance: 0.01,
            tempco: PerKelvin::ZERO,
            ageing: 0.0,
            sense_current: None,
            switching_current: None,
        }),
        environment: Environment {
            temperature: temperatures(0.0, 50.0),
            test: temperatures(25.0, 25.0),
            reference: Celsius(25.0),
        },
    }
}

fn question(basis: Basis) -> Question {
    Question {
        basis,
        samples: BOARDS,
        seed: SEED,
        uncertainty: Volts(0.002),
        guard_band: 1.0,
        production: BTreeMap::new(),
    }
}

fn expected() -> Value {
    serde_json::from_str(include_str!("../../data/limits/threshold_stack.json")).expect("JSON")
}

/// Worst case +-195 mV, root sum square +-128 mV, three standard deviations +-222 mV, which is wider than the worst
/// case because one bounded part dominates, and Monte Carlo +-165 mV. Re-enable 5.98 V to 6.69 V.
#[test]
fn the_three_methods_agree_with_an_independent_program() {
    let proposal = Proposal::new(&river::profile(), &parts(), &question(Basis::WorstCase));
    let reference = expected();
    for (name, key) in [
        (QuantityName::Trip, "trip"),
        (QuantityName::ReEnable, "re_enable"),
        (QuantityName::Hysteresis, "hysteresis"),
    ] {
        let study = &proposal.quantity(name).expect("it is there").study;
        let ends = |end| number(&reference, &format!("/worst_case/{key}/{end}"));
        same(key, study.worst_case, (ends(0), ends(1)), 1e-12);
    }
    let trip = &proposal.quantity(QuantityName::Trip).expect("it is there").study;
    close("nominal", trip.nominal, 6.0, 1e-15);
    let half = |window: ebbmark::limits::Window| window.width() / 2.0;
    close("rss", half(trip.root_sum_square), number(&reference, "/trip_root_sum_square"), 1e-7);
    close("three sigma", half(trip.three_sigma), number(&reference, "/trip_three_sigma"), 1e-7);
    assert!(half(trip.three_sigma) > half(trip.worst_case), "no coverage interval");
    let drawn = half(trip.practically_all.expect("enough boards"));
    assert!(half(trip.root_sum_square) < drawn && drawn < half(trip.worst_case), "{drawn}");
}

#[test]
fn the_boards_drawn_spread_as_those_of_another_generator() {
    let stack = ThresholdStack::new(parts());
    let inputs = stack.inputs(Condition::AtWork);
    let drawn = monte_carlo::draw(&inputs, |values| stack.thresholds(values), BOARDS, SEED);
    let reference = expected();
    for (population, key) in drawn.iter().zip(["trip", "re_enable", "hysteresis"]) {
        let of = |what: &str| number(&reference, &format!("/monte_carlo/{key}/{what}"));
        let quantiles = [0.00135, 0.025, 0.975, 0.99865].map(|p| (p, of(&format!("quantiles/{p}"))));
        within_four_errors(
            &format!("{key}, seed {SEED}"),
            population,
            (of("mean"), of("standard_deviation")),
            &quantiles,
            TIMES,
        );
    }
}

/// 15 mV of drift either way at the nominal trip; the board that drifts most is the one that is highest already,
/// 6.182 V x 100 ppm/K x 25 K = 15.45 mV. By hand.
#[test]
fn what_happens_after_the_test_comes_off_the_design_limits() {
    let proposal = Proposal::new(&river::profile(), &parts(), &question(Basis::WorstCase));
    let sets = proposal.quantity(QuantityName::Trip).expect("it is there").sets;
    let highest = 3.0 * 1.02 * (1.0 + 1.01 / 0.99);
    close("share up", sets.share_up, highest * 0.0025, 1e-9);
    close("share down", sets.share_down, highest * 0.0025, 1e-9);
    let test = sets.test.expect("something is left");
    close("lower", test.min, sets.design.min + highest * 0.0025 + 0.002, 1e-12);
    close("upper", test.max, sets.design.max - highest * 0.0025 - 0.002, 1e-12);
    // Every board inside the test limits keeps the design limits afterwards: what was promised.
    let worst_after = test.max + 0.002 + highest * 0.0025;
    assert!(worst_after <= sets.design.max + 1e-12);
}

/// The data sheet: 2 % of 6.0 V, and hysteresis 3 % to 8 % of that. By hand.
#[test]
fn the_data_sheet_limits_are_those_of_the_detector_alone() {
    let proposal = Proposal::new(&river::profile(), &parts(), &question(Basis::WorstCase));
    let sheet = |name| proposal.quantity(name).expect("it is there").sets.data_sheet;
    same("trip", sheet(QuantityName::Trip), (5.88, 6.12), 1e-12);
    same("re-enable", sheet(QuantityName::ReEnable), (5.88 * 1.03, 6.12 * 1.08), 1e-12);
    same("hysteresis", sheet(QuantityName::Hysteresis), (5.88 * 0.03, 6.12 * 0.08), 1e-12);
}

#[test]
fn the_basis_decides_which_method_gives_the_design_limits() {
    let trip = |basis| {
        let proposal = Proposal::new(&river::profile(), &parts(), &question(basis));
        let quantity = proposal.quantity(QuantityName::Trip).expect("it is there").clone();
        (quantity.sets.design, quantity.study)
    };
    let (design, study) = trip(Basis::WorstCase);
    assert_eq!(design, study.worst_case);
    let (design, study) = trip(Basis::RootSumSquare);
    assert_eq!(design, study.root_sum_square);
    let (design, study) = trip(Basis::MonteCarlo);
    assert_eq!(Some(design), study.practically_all);
}

/// The worked example's re-enable may be 5.98 V where the trip may be 6.20 V: only the hysteresis of one board tells.
#[test]
fn a_pair_that_overlaps_is_named() {
    let proposal = Proposal::new(&river::profile(), &parts(), &question(Basis::WorstCase));
    let code = |code| proposal.warnings.iter().find(|warning| warning.code == code);
    let Warning { text, .. } = code(WarningCode::Overlap).expect("they overlap");
    assert!(text.contains("overlap by") && text.contains("limit on the hysteresis"), "{text}");
    let mut wide = parts();
    wide.detector.hysteresis = Spread { min: 0.15, typical: None, max: 0.16 };
    let proposal = Proposal::new(&river::profile(), &wide, &question(Basis::WorstCase));
    assert!(proposal.warnings.iter().all(|warning| warning.code != WarningCode::Overlap));
}

#[test]
fn the_same_seed_gives_the_same_proposal_and_another_one_another() {
    let with = |seed| {
        let question = Question { seed, samples: 5000, ..question(Basis::MonteCarlo) };
        Proposal::new(&river::profile(), &parts(), &question)
    };
    assert_eq!(with(7), with(7));
    assert_ne!(with(7), with(8));
}
