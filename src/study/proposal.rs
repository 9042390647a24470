//! Limits proposed from what was measured: a tolerance interval, widened by what the bench may err.

use crate::statistics::distribution::{Distribution, Normal};
use crate::statistics::sample::Sample;
use crate::statistics::tolerance::{Sides, factor, least_sample};
use serde::Serialize;

/// Over what the interval was taken.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Basis {
    /// Boards: it speaks of boards like these.
    Boards,
    /// Cycles of the only board there is: it speaks of that board alone.
    Cycles,
}

/// Limits between which a stated part of a normal population lies with a stated confidence (ISO 16269-6), widened by
/// the expanded uncertainty of the measurement to either side.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Proposal {
    /// Over what it was taken.
    pub basis: Basis,
    /// How many of them.
    pub count: usize,
    /// Part of the population inside, between 0 and 1.
    pub content: f64,
    /// Confidence of that, between 0 and 1.
    pub confidence: f64,
    /// The factor by which the standard deviation is multiplied.
    pub factor: f64,
    /// The standard deviation, V.
    pub standard_deviation_v: f64,
    /// Expanded uncertainty of the instrument, k = 2, V; 0 where nothing is claimed of it.
    pub expanded_uncertainty_v: f64,
    /// Lower limit, V.
    pub min_v: f64,
    /// Upper limit, V.
    pub max_v: f64,
    /// With so many boards the interval is at most twice as wide as the population itself.
    pub boards_wanted: Option<usize>,
    /// With so many boards their extremes would do, whatever the distribution (Wilks 1941).
    pub boards_of_any_distribution: Option<usize>,
}

/// How much is to lie inside, and how sure that is to be.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Wanted {
    pub(super) content: f64,
    pub(super) confidence: f64,
}

impl Proposal {
    /// Over boards, from the mean of each; `None` with fewer than two.
    pub(super) fn over_boards(means: &[f64], instrument: Option<f64>, wanted: Wanted) -> Option<Self> {
        let sample = Sample::of(means)?;
        Self::new(Basis::Boards, &sample, instrument, wanted)
    }

    /// Over the cycles of the only board, whose jitter is known.
    pub(super) fn over_cycles(
        mean: f64,
        jitter: f64,
        count: usize,
        instrument: Option<f64>,
        wanted: Wanted,
    ) -> Option<Self> {
        let sample = Sample { count, mean, standard_deviation: Some(jitter) };
        Self::new(Basis::Cycles, &sample, instrument, wanted)
    }

    fn new(basis: Basis, sample: &Sample, instrument: Option<f64>, wanted: Wanted) -> Option<Self> {
        let Wanted { content, confidence } = wanted;
        let factor = factor(Sides::Two, sample.count, content, confidence)?;
        let standard_deviation_v = sample.standard_deviation?;
        let expanded_uncertainty_v = 2.0 * instrument.unwrap_or(0.0);
        let reach = factor * standard_deviation_v + expanded_uncertainty_v;
        Some(Self {
            basis,
            count: sample.count,
            content,
            confidence,
            factor,
            standard_deviation_v,
            expanded_uncertainty_v,
            min_v: sample.mean - reach,
            max_v: sample.mean + reach,
            boards_wanted: boards_wanted(wanted),
            boards_of_any_distribution: least_sample(Sides::Two, content, confidence),
        })
    }
}

/// Samples beyond this are no prototypes.
const MOST: usize = 200;

/// The least number of boards whose factor is at most twice that of the population itself.
fn boards_wanted(wanted: Wanted) -> Option<usize> {
    let enough = 2.0 * Normal.upper_quantile(0.5 * (1.0 - wanted.content))?;
    (2..MOST).find(|count| {
        factor(Sides::Two, *count, wanted.content, wanted.confidence).is_some_and(|factor| factor <= enough)
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    const WANTED: Wanted = Wanted { content: 0.99, confidence: 0.95 };

    /// Exact factor for ten values, 99 % and 95 %: 4.43691 (tests/data/statistics/tolerance_two_sided_95.json).
    #[test]
    fn the_limits_are_mean_factor_and_uncertainty() {
        let means: Vec<f64> = (0..10).map(|index| 6.0 + 1e-3 * f64::from(index)).collect();
        let found = Proposal::over_boards(&means, Some(5e-4), WANTED).expect("ten boards");
        // Ten equally spaced values: s = 1 mV x root(82.5 / 9) = 3.0277 mV.
        assert!((found.standard_deviation_v - 3.0277e-3).abs() < 1e-7, "{found:?}");
        assert!((found.factor - 4.436_909).abs() < 1e-5, "{found:?}");
        let reach = found.factor * found.standard_deviation_v + 1e-3;
        assert!((found.min_v - (6.0045 - reach)).abs() < 1e-12, "{found:?}");
        assert!((found.max_v - (6.0045 + reach)).abs() < 1e-12, "{found:?}");
        assert_eq!((found.basis, found.count), (Basis::Boards, 10));
    }

    #[test]
    fn one_board_is_no_sample_of_boards() {
        assert_eq!(Proposal::over_boards(&[6.0], Some(5e-4), WANTED), None);
        let cycles = Proposal::over_cycles(6.0, 1e-4, 20, None, WANTED).expect("twenty cycles");
        assert_eq!((cycles.basis, cycles.count), (Basis::Cycles, 20));
    }

    /// Wilks 1941: 473 for 99 % at 95 %. Twice the normal quantile for 99 % is 5.152; the factor is 5.241 for seven boards
    /// and 4.889 for eight (tests/data/statistics/tolerance_two_sided_95.json).
    #[test]
    fn how_many_boards_it_takes_is_told() {
        let found = Proposal::over_boards(&[6.0, 6.001], None, WANTED).expect("two boards");
        assert_eq!(found.boards_of_any_distribution, Some(473));
        assert_eq!(found.boards_wanted, Some(8));
    }
}
