//! Budgets and risks against published examples, and against errors drawn into a trace.

#![expect(clippy::expect_used, reason = "a test fails by panicking")]

use crate::river;
use crate::virtual_run::{MEASURED, run_setup};
use ebbmark::analysis::{Contribution, Quantity, analyse};
use ebbmark::profile::{Limit, QuantityName};
use ebbmark::sim::{Condition, Setup};
use ebbmark::statistics::coverage::coverage_factor;
use ebbmark::trace::{Current, Trace};
use ebbmark::units::{Amps, Unit, Volts};
use ebbmark::verdict::Judged;
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use serde_json::Value;

/// A file of published figures.
struct Example(Value);

impl Example {
    fn read(text: &str) -> Self {
        Self(serde_json::from_str(text).expect("reference data"))
    }

    /// A figure as printed, and half a unit of its last digit.
    fn printed(&self, label: &str) -> (f64, f64) {
        let all = self.0["published"].as_array().expect("a list");
        let entry = all.iter().find(|entry| entry["label"] == label).expect("the label");
        let text = entry["printed"].as_str().expect("text");
        let decimals = text.split_once('.').map_or(0, |(_, decimals)| decimals.len());
        (text.parse().expect("a number"), 0.5 * 0.1_f64.powi(i32::try_from(decimals).expect("few")))
    }

    #[track_caller]
    fn assert_printed(&self, label: &str, value: f64) {
        let (printed, half) = self.printed(label);
        assert!((value - printed).abs() <= half * 1.000_001, "{label}: {value} against {printed}");
    }
}

/// JCGM 100:2008, H.1: l = ls + d - ls (da theta + alpha dtheta). All digits printed; the budget is entered as H.1 enters
/// it, each influence in its own unit with its sensitivity coefficient. The voltage stands in for a length in nanometres.
#[test]
fn the_end_gauge_of_the_gum() {
    let gum = Example::read(include_str!("../data/uncertainty/gum_h1_end_gauge.json"));
    let (length, alpha) = (50_000_623.0, 11.5e-6);
    let lines = vec![
        Contribution::scatter("standard", 25.0, 18.0).through(1.0, Unit::Volt).estimated(length),
        Contribution::scatter("comparator", 9.7, 25.6).through(1.0, Unit::Volt).estimated(215.0),
        Contribution::rectangular("expansion of the standard", 2e-6)
            .through(0.0, Unit::Percent)
            .estimated(alpha),
        Contribution::normal("deviation of temperature", 0.41).through(0.0, Unit::Celsius).estimated(-0.1),
        Contribution {
            degrees_of_freedom: Some(50.0),
            ..Contribution::rectangular("difference of expansion", 1e-6)
        }
        .through(-length * -0.1, Unit::Percent),
        Contribution {
            degrees_of_freedom: Some(2.0),
            ..Contribution::rectangular("difference of temperature", 0.05)
        }
        .through(-length * alpha, Unit::Celsius),
    ];
    let gauge = Quantity::new(QuantityName::Trip, length + 215.0, lines);
    let contribution = |index: usize| gauge.contributions[index].standard_uncertainty;
    gum.assert_printed("l_nm", gauge.value);
    gum.assert_printed("uc_nm", gauge.standard_uncertainty);
    for (label, index) in [("contrib_ls", 0), ("contrib_d", 1), ("contrib_da", 4)] {
        gum.assert_printed(label, contribution(index));
    }
    // The GUM rounds 0.05 / sqrt(3) to 0.029 first and prints 16.7; unrounded it is 16.60.
    assert!((contribution(5) - 16.60).abs() < 0.005, "{}", contribution(5));
    assert!(contribution(2) + contribution(3) == 0.0, "no sensitivity, no contribution");
    let degrees = gauge.effective_degrees_of_freedom().expect("finite");
    // Printed 16.7, from 16.68 with the rounded 16.7 nm.
    assert!((degrees - 16.7).abs() < 0.15, "{degrees}");
    // Printed 2.92 for the 16 degrees that are left after truncation; with all 16.7 of them it is 2.91.
    let factor = coverage_factor(0.99, &gauge.influences()).expect("a factor");
    assert!((factor - 2.92).abs() < 0.02, "{factor}");
    // Printed 93 = 2.92 x 32, both rounded up.
    assert!((factor * gauge.standard_uncertainty - 93.0).abs() < 1.5);
    assert!((2.92 * gauge.standard_uncertainty.ceil() - 93.0).abs() < 0.5);
}

/// EA-4/02 M, supplement 1, S3: u = 8.33 mohm as remembered (8.37 from its own rounded lines), U = 17 mohm with k = 2.
#[test]
fn the_ten_kilohm_resistor_of_ea_4_02() {
    let s3 = Example::read(include_str!("../data/uncertainty/ea402_s3_10k_resistor.json"));
    let data = &s3.0["data"];
    let readings: Vec<f64> = serde_json::from_value(data["ratio_readings"].clone()).expect("numbers");
    let ratio = readings.iter().sum::<f64>() / readings.len() as f64;
    s3.assert_printed("r_mean", ratio);
    let (standard, drift) = (10_000.053, 0.020);
    let pooled = 0.16e-6 / 5.0_f64.sqrt();
    let lines = vec![
        Contribution::normal("standard", 2.5e-3).through(1.0, Unit::Ohm).estimated(standard),
        Contribution::rectangular("drift", 10e-3).through(1.0, Unit::Ohm).estimated(drift),
        Contribution::rectangular("temperature of the standard", 2.75e-3).through(1.0, Unit::Ohm),
        Contribution::rectangular("temperature of the resistor", 5.5e-3).through(-1.0, Unit::Ohm),
        Contribution::normal("parasitics", 0.41e-6).through(1e4, Unit::Percent).estimated(1.0),
        Contribution::normal("ratio", pooled).through(1e4, Unit::Percent).estimated(ratio),
    ];
    let resistor = Quantity::new(QuantityName::OnResistance, (standard + drift) * ratio, lines);
    s3.assert_printed("R_X", resistor.value);
    assert!((resistor.standard_uncertainty - 8.33e-3).abs() < 0.05e-3, "{}", resistor.standard_uncertainty);
    s3.assert_printed("U_mohm_k2", 2e3 * resistor.standard_uncertainty);
}

/// JCGM 106:2012, 7.4: a Zener diode conforms with 92 %, a burst container with 98.9 % (printed 0.99 here).
#[test]
fn the_specific_risks_of_jcgm_106() {
    let examples = Example::read(include_str!("../data/statistics/jcgm106_specific_one_sided.json"));
    let risk = |value, spread, min, max| {
        let quantity = Quantity::new(QuantityName::Trip, value, vec![Contribution::normal("all", spread)]);
        Judged::new(quantity, Some(Limit { at: None, min, max })).risk.expect("a limit")
    };
    examples.assert_printed("pc_zener", 1.0 - risk(-5.47, 0.05, None, Some(-5.4)));
    examples.assert_printed("pc_burst", 1.0 - risk(509.7, 8.6, Some(490.0), None));
    assert!((risk(510.0, 8.6, None, Some(510.0)) - 0.5).abs() < 1e-9, "right at the limit it is an even bet");
    // Outside, the risk is that of a wrong rejection.
    assert!((risk(-5.4 + 0.07, 0.05, None, Some(-5.4)) - risk(-5.47, 0.05, None, Some(-5.4))).abs() < 1e-9);
}

/// Errors of instruments as their makers allow them, the same for a whole run.
struct Errors {
    volts: (f64, f64),
    amps: [(f64, f64, f64); 2],
}

impl Errors {
    fn draw(trace: &Trace, rng: &mut ChaCha8Rng) -> Self {
        let mut within = |half: f64| rng.random_range(-1.0..1.0) * half;
        let sense = trace.claims.sense.expect("a voltmeter");
        let volts = (within(sense.relative), within(sense.absolute));
        let amps = [1e-4, 1.0].map(|full_scale| {
            let claim = trace.claims.current_accuracy(Some(Amps(full_scale)), Amps(0.0)).expect("a claim");
            (full_scale, within(claim.relative), within(claim.absolute))
        });
        Self { volts, amps }
    }

    fn put_on(&self, trace: &Trace) -> Trace {
        let mut trace = trace.clone();
        for sample in &mut trace.samples {
            sample.sense = sample.sense.map(|volts| Volts(volts.0 * (1.0 + self.volts.0) + self.volts.1));
            let range = self.amps.iter().find(|(full_scale, ..)| sample.range == Some(Amps(*full_scale)));
            if let (Current::Value(amps), Some((_, gain, offset))) = (sample.current, range) {
                sample.current = Current::Value(Amps(amps.0 * (1.0 + gain) + offset));
            }
        }
        trace
    }
}

/// The propagation of errors against the analysis itself (JCGM 101:2008): instruments of one trace are drawn anew again and
/// again, and what comes out scatters as the lines of gain and offset say, two thresholds as far in step as their covariance
/// says.
#[test]
fn drawn_instrument_errors_move_the_results_as_the_budget_says() {
    const DRAWS: usize = 1500;
    /// Standard deviations from so many draws are off by 1.8 %; four times that.
    const TOLERANCE: f64 = 0.075;
    let profile = river::profile();
    let trace = run_setup(&profile, &Setup::new(&profile, Condition::Good, 11)).trace;
    let stated = analyse(&trace, &profile).quantities;
    let mut rng = ChaCha8Rng::seed_from_u64(42);
    let drawn: Vec<Vec<f64>> = (0..DRAWS)
        .map(|_| analyse(&Errors::draw(&trace, &mut rng).put_on(&trace), &profile).quantities)
        .map(|quantities| quantities.iter().map(|quantity| quantity.value).collect())
        .collect();
    let deviations = |index: usize| -> Vec<f64> {
        let mean = drawn.iter().map(|values| values[index]).sum::<f64>() / DRAWS as f64;
        drawn.iter().map(|values| values[index] - mean).collect()
    };
    let product = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(a, b)| a * b).sum::<f64>() / DRAWS as f64;
    let is_drawn = |line: &&Contribution| line.source.ends_with("gain") || line.source.ends_with("offset");
    let is_ours = |quantity: &Quantity| MEASURED.contains(&quantity.name);
    for (index, quantity) in stated.iter().enumerate().filter(|(_, quantity)| is_ours(quantity)) {
        let is_drawn =
            |line: &&Contribution| line.source.ends_with("gain") || line.source.ends_with("offset");
        let lines = quantity.contributions.iter().filter(is_drawn);
        let expected = lines.map(|line| line.standard_uncertainty.powi(2)).sum::<f64>().sqrt();
        let deviations = deviations(index);
        let found = product(&deviations, &deviations).sqrt();
        let name = quantity.name.key();
        assert!(
            (found / expected - 1.0).abs() < TOLERANCE,
            "{name}: {found:e}, the budget says {expected:e}"
        );
    }
    let of_meters = |quantity: &Quantity| {
        let lines = quantity.contributions.iter().filter(is_drawn).cloned().collect();
        Quantity::new(quantity.name, quantity.value, lines)
    };
    let expected = of_meters(&stated[0]).covariance(&of_meters(&stated[1]));
    let found = product(&deviations(0), &deviations(1));
    assert!((found / expected - 1.0).abs() < 2.0 * TOLERANCE, "covariance {found:e} against {expected:e}");
}
