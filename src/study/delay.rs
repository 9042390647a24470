//! A threshold at rest and its delay, from ramps of several rates.
//!
//! A ramp of rate r has gone on by r x d when a board with delay d changes. Here the ramp is a staircase, of height
//! h = r x T every T, and each step is read t after it was set. The change is first seen at the reading after it, so that
//! on average the bracket's middle lies beyond the threshold by r x (d - t + T / 2), give or take half a step: which
//! reading sees the change is decided by the whole number of periods in the delay. So the middles, moved back by
//! r x (T / 2 - t), lie on a straight line over the rate within h / 2; its intercept is the threshold, its slope the
//! delay.

use super::{Crossing, Cycle, Edge, Threshold};
use crate::statistics::line::{Line, Point};
use serde::Serialize;

/// Coverage factor of what is stated here.
const COVERAGE_FACTOR: f64 = 2.0;

/// Rates that differ by less than this are one rate: the scatter of a bench's pace would pass for a delay.
const LEAST_RATIO: f64 = 1.2;

/// A threshold at rest and its delay.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Delay {
    /// The threshold at rate zero, V.
    pub at_rest_v: f64,
    /// Its standard uncertainty without the instrument's, V.
    pub statistical_v: f64,
    /// The delay, s.
    pub delay_s: f64,
    /// Its expanded uncertainty, k = 2, s: hardly better than one period of the ramp.
    pub expanded_uncertainty_s: f64,
}

/// What one rate says: rate, middle moved back, its statistical uncertainty, height of a step.
struct AtRate {
    rate: f64,
    along: f64,
    statistical: f64,
    height: f64,
}

impl Delay {
    /// From the cycles at each rate; `None` where they do not differ enough to tell, as when the bench was too slow for them.
    pub(super) fn of(by_rate: &[(Vec<&Cycle>, &Threshold)], edge: Edge) -> Option<Self> {
        let at_rates: Vec<AtRate> =
            by_rate.iter().filter_map(|(cycles, threshold)| AtRate::of(cycles, threshold, edge)).collect();
        let slowest = at_rates.iter().map(|at| at.rate).fold(f64::INFINITY, f64::min);
        let fastest = at_rates.iter().map(|at| at.rate).fold(0.0, f64::max);
        if fastest <= slowest * LEAST_RATIO {
            return None;
        }
        let point = |at: &AtRate| {
            let variance = at.statistical.powi(2) + at.height.powi(2) / 12.0;
            Point { x: at.rate, y: at.along, weight: 1.0 / variance }
        };
        let line = Line::fit(at_rates.iter().map(point))?;
        let cycles = || by_rate.iter().flat_map(|(cycles, _)| cycles);
        let settle = cycles().map(|cycle| cycle.settle).fold(0.0, f64::max);
        let integration = cycles().map(|cycle| cycle.integration).fold(0.0, f64::max);
        // A step arrives at the terminals somewhere within the settling time.
        let delay_s = line.slope - 0.5 * settle;
        let standard = (worst_slope(&at_rates, point).powi(2) / 3.0
            + line.slope_uncertainty(1.0).powi(2)
            + (settle.powi(2) + integration.powi(2)) / 12.0)
            .sqrt();
        Some(Self {
            at_rest_v: edge.sign() * line.at(0.0),
            statistical_v: line.uncertainty_at(0.0, 1.0),
            delay_s,
            expanded_uncertainty_s: COVERAGE_FACTOR * standard,
        })
    }
}

impl AtRate {
    fn of(cycles: &[&Cycle], threshold: &Threshold, edge: Edge) -> Option<Self> {
        let found: Vec<&Crossing> = cycles.iter().filter_map(|cycle| edge.of(cycle)).collect();
        let mean = |of: fn(&Crossing) -> f64| found.iter().map(|it| of(it)).sum::<f64>() / found.len() as f64;
        let (rate, period) = (mean(|it| it.rate), mean(|it| it.period));
        let moved_back = rate * (0.5 * period - mean(|it| it.seen_after));
        let along = edge.sign() * threshold.mean_v - moved_back;
        (rate.is_finite() && along.is_finite()).then_some(Self {
            rate,
            along,
            statistical: threshold.statistical_v,
            height: rate * period,
        })
    }
}

/// How far the slope may be off when every rate is off by half its step in the direction that does most: with the same
/// period at all rates they all err alike.
fn worst_slope(at_rates: &[AtRate], point: impl Fn(&AtRate) -> Point) -> f64 {
    let points: Vec<Point> = at_rates.iter().map(point).collect();
    let weights: f64 = points.iter().map(|point| point.weight).sum();
    let mean = points.iter().map(|point| point.weight * point.x).sum::<f64>() / weights;
    let spread: f64 = points.iter().map(|point| point.weight * (point.x - mean).powi(2)).sum();
    let influences = points.iter().map(|point| (point.weight * (point.x - mean) / spread).abs());
    influences.zip(at_rates).map(|(influence, at)| influence * 0.5 * at.height).sum()
}

#[cfg(test)]
mod tests {
    use super::super::fixture::cycles;
    use super::*;
    use crate::units::Volts;

    const PERIOD: f64 = 0.06;
    const SEEN_AFTER: f64 = 0.05;

    /// What readings of a staircase of this rate say of a board that trips at 6 V after a delay, wherever within a step
    /// the threshold lies: played reading by reading.
    fn staircase(rate: f64, delay: f64) -> Vec<Cycle> {
        let height = rate * PERIOD;
        let middles: Vec<f64> = (0..100)
            .map(|phase| {
                let first_below = 6.0 - height * (f64::from(phase) + 0.5) / 100.0;
                let late = (0..).find(|n| f64::from(*n) * PERIOD + SEEN_AFTER >= delay).unwrap_or(0);
                first_below + 0.5 * height - f64::from(late) * height
            })
            .collect();
        let mut cycles = cycles(&middles, height);
        for trip in cycles.iter_mut().filter_map(|cycle| cycle.trip.as_mut()) {
            *trip =
                Crossing { rate, period: PERIOD, seen_after: SEEN_AFTER, set: Volts(6.0), ..trip.clone() };
        }
        cycles
    }

    /// What ramps of these rates say of that board.
    fn found<const N: usize>(rates: [f64; N], delay: f64) -> Option<Delay> {
        let rates = rates.map(|rate| staircase(rate, delay));
        let cycles = rates.each_ref().map(|cycles| cycles.iter().collect::<Vec<&Cycle>>());
        let thresholds =
            cycles.each_ref().map(|cycles| Threshold::of(cycles, Edge::Trip, 0.95).expect("found"));
        let by_rate: Vec<(Vec<&Cycle>, &Threshold)> = cycles.into_iter().zip(&thresholds).collect();
        Delay::of(&by_rate, Edge::Trip)
    }

    #[test]
    fn rates_that_came_out_alike_tell_no_delay() {
        assert_eq!(found([0.2, 0.21], 0.1), None);
    }

    #[test]
    fn rates_give_threshold_and_delay_within_what_they_claim() {
        for delay in [0.0, 0.02, 0.049, 0.051, 0.1, 0.13, 0.25, 0.5] {
            let found = found([0.05, 0.2, 0.5], delay).expect("three rates");
            assert!((found.at_rest_v - 6.0).abs() <= 2.0 * found.statistical_v, "{delay} s: {found:?}");
            assert!((found.delay_s - delay).abs() <= found.expanded_uncertainty_s, "{delay} s: {found:?}");
            // One period as a rectangle, k = 2, is 34.6 ms; what is stated is less than twice that.
            assert!(found.expanded_uncertainty_s < 0.0692, "{delay} s: {found:?}");
        }
    }
}
