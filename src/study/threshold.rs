//! One threshold of one board under one condition, from cycles that each only bracket it.

use super::{Crossing, Cycle, Edge};
use crate::statistics::censored::{
    Bracket, Fit, fit, largest_standard_deviation, standard_deviation_interval,
};
use crate::statistics::distribution::{Distribution, StudentT};
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
    /// Standard uncertainty of the mean by itself: from the curvature of the likelihood, enlarged for few cycles so that
    /// k = 2 gives what Student's t gives (JCGM 100:2008, G.3.2). Where no jitter was seen it is that of a single bracket,
    /// its width over root 12 (4.3.7): that all cycles fell on the same side of an edge may be chance.
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
        let brackets: Vec<Bracket> = found.iter().map(|crossing| bracket(crossing)).collect();
        let width: f64 = found.iter().map(|crossing| (crossing.high - crossing.low).0).sum();
        let bracket_v = width / found.len() as f64;
        let one_bracket = bracket_v / 12.0_f64.sqrt();
        let (mean_v, statistical_v, jitter) = match fit(&brackets)? {
            Fit::Found(estimate) => {
                let interval = standard_deviation_interval(&brackets, confidence);
                let jitter = Jitter::Found {
                    standard_deviation_v: estimate.standard_deviation,
                    low_v: interval.map(|(low, _)| low),
                    high_v: interval.map(|(_, high)| high),
                };
                let few = for_few(found.len())?;
                let least = one_bracket / (found.len() as f64).sqrt();
                (estimate.mean, few * estimate.mean_uncertainty.max(least), jitter)
            }
            Fit::NoSpreadSeen { common } => {
                let at_most_v = largest_standard_deviation(&brackets, confidence);
                let middle = 0.5 * (common.low + common.high);
                (middle, one_bracket, Jitter::NoneSeen { at_most_v })
            }
            Fit::NoBoundSeen => return None,
        };
        let claim = cycles.iter().find_map(|cycle| cycle.claim);
        Some(Self {
            count: found.len(),
            missing: cycles.len() - found.len(),
            mean_v,
            statistical_v,
            instrument_v: claim.map(|claim| claim.standard_uncertainty(mean_v)),
            bracket_v,
            jitter,
        })
    }

    /// Combined standard uncertainty (JCGM 100:2008, 5.1.2), V.
    pub fn standard_uncertainty_v(&self) -> f64 {
        self.statistical_v.hypot(self.instrument_v.unwrap_or(0.0))
    }
}

/// The voltage at an edge is known no better than to this share of a bracket: readings scatter. Without it, neighbouring
/// brackets would leave a gap of microvolts now and then, and that would count as jitter seen.
const EDGE: f64 = 0.02;

fn bracket(crossing: &Crossing) -> Bracket {
    let spare = EDGE * (crossing.high - crossing.low).0;
    Bracket { low: crossing.low.0 - spare, high: crossing.high.0 + spare }
}

/// The probability of a normal value within two standard deviations.
const WITHIN_TWO: f64 = 0.954_499_736;

/// Makes the uncertainty of a mean of so many values, with a standard deviation by maximum likelihood, one that k = 2
/// expands as Student's t would: root (n / (n - 1)) for the estimate, t / 2 for its spread.
fn for_few(count: usize) -> Option<f64> {
    let degrees = count.checked_sub(1)? as f64;
    let t = StudentT::new(degrees)?.upper_quantile(0.5 * (1.0 - WITHIN_TWO))?;
    Some((count as f64 / degrees).sqrt() * t / 2.0)
}

#[cfg(test)]
mod tests {
    use super::super::fixture::cycles;
    use super::*;

    /// JCGM 100:2008, table G.2, for 95.45 %: t of 1, 5 and 19 degrees of freedom is 13.97, 2.65 and 2.14.
    #[test]
    fn few_cycles_count_as_students_t_has_it() {
        for (count, t) in [(2, 13.97), (6, 2.65), (20, 2.14)] {
            let wanted = (count as f64 / (count as f64 - 1.0)).sqrt() * t / 2.0;
            assert!((for_few(count).expect("two or more") / wanted - 1.0).abs() < 0.003, "{count}");
        }
    }

    #[test]
    fn neighbouring_brackets_are_no_jitter() {
        // Two brackets of 2 mV that leave a gap of 5 uV.
        let cycles = cycles(&[6.0, 6.002_005, 6.0, 6.002_005], 2e-3);
        let found = Threshold::of(&cycles.iter().collect::<Vec<_>>(), Edge::Trip, 0.95).expect("found");
        assert!(
            matches!(found.jitter, Jitter::NoneSeen { at_most_v: Some(most) } if most > 1e-3),
            "{found:?}"
        );
        assert!((found.statistical_v - 2e-3 / 12.0_f64.sqrt()).abs() < 1e-9, "{found:?}");
        assert!((found.mean_v - 6.001_002_5).abs() < 1e-9, "{found:?}");
    }
}
