//! Edges on the way of a voltage: where they lie, and which one it passes first.

use super::circuit::Line;
use super::output::STILL;

/// How far beyond an edge the output is put when it passes one, V: clear of rounding, far below any reading.
const STEP_OVER: f64 = STILL / 2.0;

/// Where a rising line comes to `volts`.
#[inline]
pub(super) fn crossing(line: &Line, volts: f64) -> Option<f64> {
    (line.slope > 0.0).then(|| (volts - line.offset) / line.slope)
}

/// The nearest edge that lies between `from` and `to`, with a little beyond it.
#[inline]
pub(super) fn nearest_passed<const N: usize>(from: f64, to: f64, edges: [Option<f64>; N]) -> Option<f64> {
    let direction = (to - from).signum();
    let way = (to - from).abs();
    edges
        .into_iter()
        .flatten()
        .map(|edge| (edge - from) * direction)
        .filter(|distance| *distance >= 0.0 && distance + STEP_OVER < way)
        .min_by(f64::total_cmp)
        .map(|distance| from + direction * (distance + STEP_OVER))
}
