//! One threshold of one board under one condition, from cycles that each only bracket it.

use super::{Crossing, Cycle, Edge};
use crate::statistics::censored::{
    Bracket, Fit, fit, largest_standard_deviation, standard_deviation_interval,
};
use serde::Serialize;

/// How far a threshold moves from cycle to cycle: a standard deviation in volts.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
#[serde(tag = "kind", rename_all = "snake_case")]
pub enum Jitter {
    /// Estimated, with a two-sided interval at the confidence of the study.
    Found {
        /// Maximum-likelihood estimate.
        standard_deviation_v: f64,
        /// Lower end of the interval; absent where it cannot be told.
        low_v: Option<f64>,
        /// Upper end.
        high_v: Option<f64>,
    },
    /// One value would fit every bracket: no jitter was seen, and with the confidence of the study it is no larger.
    NoneSeen {
        /// The bound; absent for a single cycle.
        at_most_v: Option<f64>,
    },
}

/// A threshold at the terminals, in volts.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Threshold {
    /// Cycles in which it was found.
    pub count: usize,
    /// Cycles in which it was not.
    pub missing: usize,
    /// Maximum-likelihood mean of the brackets; the middle of what they have in common where no jitter was seen.
    pub mean_v: f64,
    /// Standard uncertainty of the mean by itself: from the curvature of the likelihood, or the width of what the brackets
    /// have in common over root 12 (JCGM 100:2008, 4.3.7).
    pub statistical_v: f64,
    /// Standard uncertainty of the instrument as its maker claims it; absent where nothing is claimed. It is the same in
    /// every cycle and does not average out.
    pub instrument_v: Option<f64>,
    /// Width of a bracket, on average.
    pub bracket_v: f64,
    /// How far it moves from cycle to cycle.
    pub jitter: Jitter,
}

impl Threshold {
    /// From the cycles of one board under one condition; `None` where none found the threshold.
    pub(super) fn of(cycles: &[&Cycle], edge: Edge, confidence: f64) -> Option<Self> {
        let found: Vec<&Crossing> = cycles.iter().filter_map(|cycle| edge.of(cycle)).collect();
        let brackets: Vec<Bracket> =
            found.iter().map(|crossing| Bracket { low: crossing.low.0, high: crossing.high.0 }).collect();
        let (mean_v, statistical_v, jitter) = match fit(&brackets)? {
            Fit::Found(estimate) => {
                let interval = standard_deviation_interval(&brackets, confidence);
                let jitter = Jitter::Found {
                    standard_deviation_v: estimate.standard_deviation,
                    low_v: interval.map(|(low, _)| low),
                    high_v: interval.map(|(_, high)| high),
                };
                (estimate.mean, estimate.mean_uncertainty, jitter)
            }
            Fit::NoSpreadSeen { common } => {
                let at_most_v = largest_standard_deviation(&brackets, confidence);
                let middle = 0.5 * (common.low + common.high);
                (middle, (common.high - common.low) / 12.0_f64.sqrt(), Jitter::NoneSeen { at_most_v })
            }
            Fit::NoBoundSeen => return None,
        };
        let claim = cycles.iter().find_map(|cycle| cycle.claim);
        let width: f64 = brackets.iter().map(|bracket| bracket.high - bracket.low).sum();
        Some(Self {
            count: found.len(),
            missing: cycles.len() - found.len(),
            mean_v,
            statistical_v,
            instrument_v: claim.map(|claim| claim.standard_uncertainty(mean_v)),
            bracket_v: width / found.len() as f64,
            jitter,
        })
    }

    /// Combined standard uncertainty (JCGM 100:2008, 5.1.2), V.
    pub fn standard_uncertainty_v(&self) -> f64 {
        self.statistical_v.hypot(self.instrument_v.unwrap_or(0.0))
    }
}
