//! From the first cycle to the last: does a threshold wander while a board is cycled?

use super::{Cycle, Edge};
use crate::statistics::distribution::{Distribution, StudentT};
use crate::statistics::line::{Line, Point};
use serde::Serialize;

/// Change of a threshold from the first cycle to the last, by a straight line over the number of the cycle.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Drift {
    /// The change, V.
    pub first_to_last_v: f64,
    /// Half the width of its two-sided interval at the confidence of the study, V.
    pub expanded_uncertainty_v: f64,
    /// Whether the interval leaves zero out.
    pub significant: bool,
}

impl Drift {
    /// From three cycles or more. Middles of the brackets stand for the values; a point counts as no better than the
    /// width of its bracket over root 12, so that cycles that all fell into one bracket claim nothing.
    pub(super) fn of(cycles: &[&Cycle], edge: Edge, confidence: f64) -> Option<Self> {
        let points: Vec<(f64, f64, f64)> = cycles
            .iter()
            .filter_map(|cycle| {
                let found = edge.of(cycle)?;
                let (low, high) = (found.low.0, found.high.0);
                Some((f64::from(cycle.order.cycle), 0.5 * (low + high), high - low))
            })
            .collect();
        let line = Line::fit(points.iter().map(|&(x, y, _)| Point::plain(x, y)))?;
        let width = points.iter().map(|(_, _, width)| width).sum::<f64>() / points.len() as f64;
        let sigma = line.scatter?.max(width / 12.0_f64.sqrt());
        let degrees = points.len().checked_sub(2)? as f64;
        let (first, last) = (points.first()?.0, points.last()?.0);
        let t = StudentT::new(degrees)?.upper_quantile(0.5 * (1.0 - confidence))?;
        let first_to_last_v = line.slope * (last - first);
        let expanded_uncertainty_v = t * line.slope_uncertainty(sigma) * (last - first);
        let significant = first_to_last_v.abs() > expanded_uncertainty_v;
        Some(Self { first_to_last_v, expanded_uncertainty_v, significant })
    }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::cycles;
    use super::*;

    fn drift(values: &[f64], width: f64) -> Option<Drift> {
        let cycles = cycles(values, width);
        Drift::of(&cycles.iter().collect::<Vec<_>>(), Edge::Trip, 0.95)
    }

    /// By hand: mean 2 and sum of squares 10 over the cycles, products 9 mV, slope 0.9 mV a cycle, so 3.6 mV in four.
    /// Residuals -0.2, -0.1, 1.0, -0.9, 0.2 mV: squares 1.90, over 3 degrees s = 0.7958 mV, of the slope s / root 10.
    /// Student's t for 95 % and 3 degrees is 3.182 (JCGM 100:2008, table G.2), so U = 4 x 3.182 x 0.25166 = 3.203 mV.
    #[test]
    fn a_line_worked_out_by_hand() {
        let found = drift(&[6.0, 6.001, 6.003, 6.002, 6.004], 1e-6).expect("five cycles");
        assert!((found.first_to_last_v - 3.6e-3).abs() < 1e-9, "{found:?}");
        assert!((found.expanded_uncertainty_v - 3.203e-3).abs() < 1e-6, "{found:?}");
        assert!(found.significant);
    }

    #[test]
    fn cycles_that_all_fall_into_one_bracket_claim_nothing() {
        let found = drift(&[6.0; 5], 2e-3).expect("five cycles");
        // 4 x 3.182 x (2 mV / root 12) / root 10.
        assert!((found.expanded_uncertainty_v - 2.324e-3).abs() < 1e-6, "{found:?}");
        assert!(found.first_to_last_v.abs() < 1e-12 && !found.significant, "{found:?}");
        assert_eq!(drift(&[6.0, 6.1], 2e-3), None, "two points have no scatter");
    }
}
