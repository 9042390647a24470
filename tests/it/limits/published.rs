//! Two comparators of makers' application notes: three methods against numpy and scipy.

use super::{close, number, same, within_four_errors};
use ebbmark::limits::input::Input;
use ebbmark::limits::monte_carlo::draw;
use ebbmark::limits::root_sum_square::root_sum_square;
use ebbmark::limits::worst_case::extremes;
use serde_json::Value;

const SEED: u64 = 20_261_201;

/// Fewer than the four million of the reference, so that its own error counts little.
const BOARDS: usize = 200_000;
const TIMES: f64 = 20.0;

/// Deviations to first order come from differences; the curvature of these circuits leaves eight digits.
const FIRST_ORDER: f64 = 1e-7;

fn data(text: &str) -> Value {
    serde_json::from_str(text).expect("JSON")
}

fn tolerant(value: f64, tolerance: f64) -> Input {
    Input::within(value, value * tolerance)
}

/// Compares everything the file says of the quantity called `key`. `halfway`: what the published figure is good for.
fn compare(file: &Value, key: &str, inputs: &[Input], model: impl Fn(&[f64]) -> f64, published: (f64, f64)) {
    let expected = |name: &str| number(file, &format!("/recomputed_only/{key}/{name}"));
    let nominal: Vec<f64> = inputs.iter().map(|input| input.nominal).collect();
    let (figure, half_digit) = published;
    assert!(
        (model(&nominal) - figure).abs() <= half_digit,
        "{key} {} as published {figure}",
        model(&nominal)
    );
    // Corners are sums and quotients of the same numbers: all digits but the last.
    let worst = extremes(inputs, &model);
    same(key, worst, (expected("worst_min"), expected("worst_max")), 1e-13);
    let linear = root_sum_square(inputs, &model);
    close(key, linear.full_tolerance.width() / 2.0, expected("rss_halfwidth"), FIRST_ORDER);
    close(key, linear.standard_deviation, expected("u_rectangular"), FIRST_ORDER);
    let deviations = file.pointer(&format!("/recomputed_only/{key}/sensitivity_times_tol")).expect("a list");
    let squares: f64 = number(file, &format!("/recomputed_only/{key}/rss_halfwidth")).powi(2);
    for (share, deviation) in linear.shares.iter().zip(deviations.as_array().expect("a list")) {
        let share_expected = deviation.as_f64().expect("a number").powi(2) / squares;
        assert!(
            (share - share_expected).abs() < FIRST_ORDER,
            "{key}: share {share} and not {share_expected}"
        );
    }
    let [drawn] = draw(inputs, |values| [model(values)], BOARDS, SEED);
    within_four_errors(
        key,
        &drawn,
        (expected("mc_uniform_mean"), expected("mc_uniform_sd")),
        &[(0.0005, expected("mc_uniform_q0005_q9995/0")), (0.9995, expected("mc_uniform_q0005_q9995/1"))],
        TIMES,
    );
    // Where all is nearly linear, what the draw says of the parts is what the derivatives say: the correlation has a
    // standard error of about 1 / sqrt(boards), its square twice that.
    for (share, linear) in drawn.shares.iter().zip(&linear.shares) {
        let error = 4.0 * 2.0 / (BOARDS as f64).sqrt();
        assert!((share - linear).abs() < error, "{key}: share {share} and not {linear}, seed {SEED}");
    }
}

/// LTC1841 to LTC1843 data sheet: 4.484 V and 5.474 V, printed to the millivolt. The reference's own last digits are
/// half a millivolt off at most.
#[test]
fn the_resistor_string_of_a_window_comparator() {
    let file = data(include_str!("../../data/limits/divider_window_comparator.json"));
    let of = |name: &str| number(&file, &format!("/data/{name}"));
    let inputs = [
        tolerant(of("VREF"), 0.01),
        Input::fixed(of("VH")),
        tolerant(of("R1"), 0.01),
        tolerant(of("R2"), 0.01),
        tolerant(of("R3"), 0.01),
    ];
    let under = |v: &[f64]| (v[0] - v[1]) * (v[2] + v[3] + v[4]) / (v[2] + v[3]);
    let over = |v: &[f64]| (v[0] + v[1]) * (v[2] + v[3] + v[4]) / v[2];
    compare(&file, "uv", &inputs, under, (4.484, 0.0005));
    compare(&file, "ov", &inputs, over, (5.474, 0.0005));
}

/// TIPD144: 2.3 V and 2.7 V, printed to a tenth.
#[test]
fn the_comparator_with_hysteresis_of_a_precision_design() {
    let file = data(include_str!("../../data/limits/comparator_hysteresis_tipd144.json"));
    let of = |name: &str| number(&file, &format!("/data/{name}"));
    let inputs = [
        Input::fixed(of("VCC")),
        tolerant(of("Rx"), 0.001),
        tolerant(of("Ry"), 0.001),
        tolerant(of("Rh"), 0.001),
    ];
    let parallel = |a: f64, b: f64| a * b / (a + b);
    let low = |v: &[f64]| v[0] * parallel(v[2], v[3]) / (v[1] + parallel(v[2], v[3]));
    let high = |v: &[f64]| v[0] * v[2] / (v[2] + parallel(v[1], v[3]));
    compare(&file, "vl", &inputs, low, (2.3, 0.05));
    compare(&file, "vh", &inputs, high, (2.7, 0.05));
}
