//! Tolerance stacks against circuits published by others, and limits against an independent calculation.
#![expect(clippy::expect_used, reason = "a test that cannot be set up has failed")]

mod promise;
mod published;
mod stack;

use ebbmark::limits::Window;
use ebbmark::limits::monte_carlo::Population;
use serde_json::Value;

/// A number of a file of data, named by its path.
#[track_caller]
fn number(data: &Value, path: &str) -> f64 {
    data.pointer(path).and_then(Value::as_f64).unwrap_or_else(|| panic!("no number {path}"))
}

/// Requires agreement within a share of the expected value.
#[track_caller]
fn close(what: &str, found: f64, expected: f64, relative: f64) {
    assert!((found - expected).abs() <= relative * expected.abs(), "{what}: {found} and not {expected}");
}

/// Requires both ends of a window to agree.
#[track_caller]
fn same(what: &str, found: Window, expected: (f64, f64), relative: f64) {
    close(what, found.min, expected.0, relative);
    close(what, found.max, expected.1, relative);
}

/// Requires the mean, the standard deviation and quantiles of a draw to lie within four standard errors of those of
/// another draw, `other` times as large.
#[track_caller]
fn within_four_errors(
    what: &str,
    drawn: &Population,
    (mean, sd): (f64, f64),
    quantiles: &[(f64, f64)],
    other: f64,
) {
    let count = drawn.sorted().len() as f64;
    // Both draws have an error of their own.
    let four = 4.0 * (1.0 + 1.0 / other).sqrt();
    let off = (drawn.mean - mean).abs() / (sd / count.sqrt());
    assert!(off < four, "{what}: mean {} is {off} standard errors from {mean}", drawn.mean);
    // For bounded shapes the kurtosis is below that of the normal, so its formula is on the wide side.
    let off = (drawn.standard_deviation - sd).abs() / (sd / (2.0 * count).sqrt());
    assert!(off < four, "{what}: deviation {} is {off} standard errors from {sd}", drawn.standard_deviation);
    for (probability, expected) in quantiles {
        // The share of the draw below a quantile is binomial, whatever the distribution is.
        let below = drawn.sorted().partition_point(|value| value < expected) as f64 / count;
        let error = (probability * (1.0 - probability) / count).sqrt();
        let off = (below - probability).abs() / error;
        assert!(off < four, "{what}: {below} below {expected}, {off} standard errors from {probability}");
    }
}
