//! The non-central t distribution: a normal number of mean delta over an independent root mean square.
//!
//! Given the root mean square `sqrt(w / degrees)` the probability is a normal one, and `w` is chi-squared. Over the
//! logarithm of `w` that is a smooth bump, for which the trapezoidal rule is exact to rounding once the step is finer
//! than the bump. Every term is positive, so neither tail loses digits.

use super::{Distribution, Normal, Tails, special};

/// Parts of the bump below this, relative to its top, are left out.
const NEGLIGIBLE: f64 = 1e-40;

/// The non-central t distribution.
#[derive(Clone, Debug, PartialEq)]
pub struct NonCentralT {
    delta: f64,
    /// Root mean squares, with the probability of each.
    spreads: Vec<(f64, f64)>,
}

impl NonCentralT {
    /// With positive, finite degrees of freedom and a finite non-centrality `delta`; else `None`.
    pub fn new(degrees_of_freedom: f64, delta: f64) -> Option<Self> {
        if !(degrees_of_freedom > 0.0 && degrees_of_freedom.is_finite() && delta.is_finite()) {
            return None;
        }
        Some(Self { delta, spreads: spreads(degrees_of_freedom, delta) })
    }
}

/// Values of `sqrt(w / degrees)`, evenly spaced in the logarithm of `w`, with their probabilities.
fn spreads(degrees: f64, delta: f64) -> Vec<(f64, f64)> {
    let half = 0.5 * degrees;
    // The bump is about 1 / sqrt(half) wide; the normal probability it is multiplied with turns over within 2 / delta.
    let step = (0.4 / half.sqrt()).min(0.12).min(0.8 / delta.abs());
    let log_peak = half * half.ln() - half - special::log_gamma(half);
    let density = |s: f64| (log_peak + half * (1.0 + s - s.exp())).exp();
    let least = density(0.0) * NEGLIGIBLE;
    let side = |direction: f64| {
        (1..).map(move |index| direction * f64::from(index) * step).take_while(move |s| density(*s) > least)
    };
    std::iter::once(0.0)
        .chain(side(1.0))
        .chain(side(-1.0))
        .map(|s| ((0.5 * s).exp(), density(s) * step))
        .collect()
}

impl Distribution for NonCentralT {
    fn tails(&self, t: f64) -> Tails {
        let mut tails = Tails { lower: 0.0, upper: 0.0 };
        for (spread, probability) in &self.spreads {
            let given = Normal.tails(t * spread - self.delta);
            tails.lower += probability * given.lower;
            tails.upper += probability * given.upper;
        }
        tails
    }

    fn centre(&self) -> f64 {
        self.delta
    }
}
