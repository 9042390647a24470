//! Mean and standard deviation of a normal population whose values were never read, only bracketed.
//!
//! A board that cycles through its threshold tells between which two set-points it changed, each time. Taking the
//! middles for readings makes a small jitter too large and a very small one zero; the likelihood of the brackets does
//! neither (interval censoring). In one over the standard deviation and mean over the standard deviation its
//! logarithm has a single hill (Burridge 1981), so that climbing always leads to the top.

mod likelihood;
mod profile;
mod scaled;

use likelihood::{Place, likelihood};
use scaled::Scale;

/// Steps of Newton's method; a dozen are enough on a hill this smooth.
const MOST_STEPS: usize = 200;

/// How often a step may be halved.
const MOST_HALVES: i32 = 40;

/// Where the logarithm of the likelihood can be raised by no more than this, the next step ends the climb.
const AT_THE_TOP: f64 = 1e-9;

/// Where one value lies: between `low` and `high`, either of which may be infinite. Both the same for a value that
/// was read.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Bracket {
    /// Not below this.
    pub low: f64,
    /// Not above this.
    pub high: f64,
}

/// What brackets say about their population.
#[derive(Clone, Debug, PartialEq)]
pub enum Fit {
    /// Mean and standard deviation were found.
    Found(Estimate),
    /// One value would fit every bracket: the population may have no spread at all. Its standard deviation is bounded
    /// from above only, by [`largest_standard_deviation`].
    NoSpreadSeen {
        /// The values that fit every bracket.
        common: Bracket,
    },
    /// The brackets are open and tell no upper bound for the standard deviation: values below lie above values above.
    NoBoundSeen,
}

/// Maximum-likelihood estimate of a normal population.
#[derive(Clone, Debug, PartialEq)]
pub struct Estimate {
    /// Mean.
    pub mean: f64,
    /// Standard deviation. With few brackets it is too small: by `3 / (4 n)` of itself if values are read (Kendall and
    /// Stuart), more if they are bracketed.
    pub standard_deviation: f64,
    /// Standard uncertainty of the mean, from the curvature of the likelihood (observed information).
    pub mean_uncertainty: f64,
    /// Standard uncertainty of the standard deviation, likewise. For an interval use
    /// [`standard_deviation_interval`], which allows for the skew.
    pub standard_deviation_uncertainty: f64,
    /// Correlation of the two.
    pub correlation: f64,
}

/// Fits a normal population. `None` without brackets, and where one is not a number, upside down or open on both sides.
pub fn fit(brackets: &[Bracket]) -> Option<Fit> {
    if brackets.is_empty() || !brackets.iter().all(Bracket::is_sound) {
        return None;
    }
    let common = common(brackets);
    if common.low <= common.high {
        return Some(Fit::NoSpreadSeen { common });
    }
    let scale = Scale::of(brackets);
    let scaled = scale.apply(brackets);
    Some(match climb(&scaled, scale.start(&scaled)) {
        Some(top) => Fit::Found(scale.estimate(&scaled, top)?),
        None => Fit::NoBoundSeen,
    })
}

pub use profile::{largest_standard_deviation, standard_deviation_interval};

impl Bracket {
    /// A value that was read.
    pub fn read(value: f64) -> Self {
        Self { low: value, high: value }
    }

    fn is_sound(&self) -> bool {
        self.low <= self.high
            && self.low < f64::INFINITY
            && self.high > f64::NEG_INFINITY
            && (self.low.is_finite() || self.high.is_finite())
    }
}

/// What all brackets have in common; upside down where that is nothing.
fn common(brackets: &[Bracket]) -> Bracket {
    let low = brackets.iter().map(|bracket| bracket.low).fold(f64::NEG_INFINITY, f64::max);
    let high = brackets.iter().map(|bracket| bracket.high).fold(f64::INFINITY, f64::min);
    Bracket { low, high }
}

/// Newton's method on the hill, with shorter steps where a whole one would not lead up. `None` where the top is at an
/// infinite standard deviation.
fn climb(brackets: &[Bracket], start: Place) -> Option<Place> {
    let mut place = start;
    for _ in 0..MOST_STEPS {
        let here = likelihood(brackets, place);
        let step = here.step_up()?;
        if step.gain < AT_THE_TOP {
            // Heights no longer tell up from down, but the last step still doubles the digits.
            place = step.from(place, 1.0);
            break;
        }
        let leads_up = |next: &Place| next.over > 0.0 && likelihood(brackets, *next).log > here.log;
        place = (0..MOST_HALVES).map(|halves| step.from(place, 0.5_f64.powi(halves))).find(leads_up)?;
        if place.over < scaled::NOTHING {
            return None;
        }
    }
    (place.over > scaled::NOTHING).then_some(place)
}

#[cfg(test)]
mod tests;
