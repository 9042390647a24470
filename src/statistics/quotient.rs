//! A quotient of two uncertain numbers, whatever the size of the divisor's uncertainty.
//!
//! A quotient of a positive divisor lies below `t` where its dividend less `t` times its divisor lies below zero, and
//! that is a sum of independent influences whose distribution is known (E. C. Fieller, Some problems in interval
//! estimation, J. R. Stat. Soc. B 16 (1954), 175-185, from memory). So the distribution of the quotient (JCGM 101:2008,
//! 5.2) is that of a sum for each place looked at, without trials and without a linear model.

use super::coverage::Spread;
use super::influence::{Influence, Shape};
use super::root::root;

/// A half-width is found to this, relative to itself.
const TOLERANCE: f64 = 1e-5;

/// How often a half-width is doubled before there is none.
const MOST_DOUBLINGS: usize = 40;

/// A quotient and what it is uncertain by, everything in the unit of the quotient.
#[derive(Clone, Debug)]
pub struct Quotient {
    value: f64,
    dividend: Vec<Influence>,
    divisor: Vec<Influence>,
}

impl Quotient {
    /// The quotient of the best estimates, with the influences of `dividend` and `divisor`, each by how far it moves the
    /// quotient where it is small.
    pub fn new(value: f64, dividend: Vec<Influence>, divisor: Vec<Influence>) -> Self {
        Self { value, dividend, divisor }
    }

    /// Standard deviation of the quotient: the second-order terms (JCGM 100:2008, 5.1.2, note) up to the fourth moment
    /// of the divisor, within 1 % for a rectangle of a third of it.
    pub fn standard_uncertainty(&self) -> f64 {
        let variance = |influences: &[Influence]| -> f64 {
            influences.iter().map(|part| part.standard_uncertainty.powi(2)).sum()
        };
        let squared = self.value.powi(2);
        let (dividend, second) = (variance(&self.dividend), variance(&self.divisor) / squared);
        // A rectangle's fourth moment is 9/5 of the square of its variance, that of a bell 3.
        let flatter: f64 = self
            .divisor
            .iter()
            .filter(|part| part.shape == Shape::Rectangular)
            .map(|part| 1.2 * (part.standard_uncertainty / self.value).powi(4))
            .sum();
        let fourth = 3.0 * second.powi(2) - flatter;
        let of_divisor = second - second.powi(2) + 3.0 * fourth;
        (squared * of_divisor + dividend * (1.0 + 3.0 * second + 5.0 * fourth)).sqrt()
    }

    /// Probability that the quotient is at most `t`.
    pub fn below(&self, t: f64) -> f64 {
        let scale = (t / self.value).abs();
        let divisor = self
            .divisor
            .iter()
            .map(|part| Influence { standard_uncertainty: scale * part.standard_uncertainty, ..*part });
        let influences: Vec<Influence> = self.dividend.iter().copied().chain(divisor).collect();
        match Spread::new(&influences) {
            Some(spread) => 1.0 - spread.beyond(t - self.value),
            None => f64::from(u8::from(t >= self.value)),
        }
    }

    /// Half the width of the interval about the quotient of the best estimates that holds the true one with
    /// `probability`; `None` unless that is between 0 and 1, and where nothing is uncertain.
    pub fn half_width(&self, probability: f64) -> Option<f64> {
        let linear: Vec<Influence> = self.dividend.iter().chain(&self.divisor).copied().collect();
        let start = Spread::new(&linear)?.half_width(probability)?;
        let short = |half_width: f64| {
            probability - (self.below(self.value + half_width) - self.below(self.value - half_width))
        };
        // The linear model is a good guess, and a root nearby is soon found.
        let mut high = NEARBY * start;
        let mut doublings = 0;
        while short(high) > 0.0 {
            (high, doublings) = (2.0 * high, doublings + 1);
            if doublings > MOST_DOUBLINGS {
                return None;
            }
        }
        let low = [start / NEARBY, 0.0].into_iter().find(|low| short(*low) >= 0.0)?;
        root(short, low, high, TOLERANCE)
    }
}

/// How far from the linear model's the half-width is looked for first, as a factor.
const NEARBY: f64 = 1.2;

#[cfg(test)]
mod tests {
    use super::super::monte_carlo::propagate;
    use super::*;

    const TRIALS: usize = 200_000;
    const SEED: u64 = 21;

    /// One over a number anywhere between 1 - h and 1 + h, whose distribution is that of the inverse: below t with the
    /// probability (1 + h - 1/t) / 2h, variance 1 / (1 - h²) - (ln((1 + h) / (1 - h)) / 2h)² (closed forms).
    #[test]
    fn one_over_a_rectangle_is_the_closed_form() {
        let h: f64 = 0.3;
        let quotient = Quotient::new(1.0, Vec::new(), vec![Influence::rectangular(h / 3.0_f64.sqrt())]);
        let closed = |t: f64| ((1.0 + h - 1.0 / t) / (2.0 * h)).clamp(0.0, 1.0);
        for t in [0.7, 0.77, 0.8, 0.9, 1.0, 1.1, 1.2, 1.3, 1.42, 1.43] {
            assert!((quotient.below(t) - closed(t)).abs() < 1e-6, "{t}: {}", quotient.below(t));
        }
        let mean = ((1.0 + h) / (1.0 - h)).ln() / (2.0 * h);
        let deviation = (1.0 / (1.0 - h * h) - mean * mean).sqrt();
        assert!((quotient.standard_uncertainty() / deviation - 1.0).abs() < 0.01);
        // The lower end is that of the rectangle, so 95 % lie below the upper end of the interval.
        let half_width = quotient.half_width(0.95).expect("uncertain");
        assert!((closed(1.0 + half_width) - 0.95).abs() < 1e-4, "{half_width}");
    }

    /// Charge known to 30 % over a drain of which most is known to 30 %, and a bell: against trials (JCGM 101:2008, 7).
    #[test]
    fn a_stored_battery_agrees_with_trials() {
        for (own, bell) in [(0.07, 0.01), (0.5, 0.01), (0.9, 0.1)] {
            let root3 = 3.0_f64.sqrt();
            let rectangle = |half_width: f64| Influence::rectangular(half_width / root3);
            let divisor = vec![rectangle(0.3 * (1.0 - own)), Influence::normal(bell * own)];
            let quotient = Quotient::new(5.0, vec![rectangle(5.0 * 0.3)], scaled(&divisor, 5.0));
            let outcome = propagate(SEED, TRIALS, |draws| {
                let drain: f64 = 1.0 + divisor.iter().map(|part| draws.deviation(part)).sum::<f64>();
                5.0 * (1.0 + 0.3 * draws.rectangular()) / drain
            })
            .expect("an outcome");
            let deviation = outcome.sample.standard_deviation.expect("many values");
            let found = quotient.standard_uncertainty();
            assert!((found / deviation - 1.0).abs() < 0.01, "seed {SEED}, {own}: {found}, {deviation}");
            let (low, high) = outcome.symmetric(0.95).expect("an interval");
            // Four standard errors of a share of 200 000 trials.
            for (end, wanted) in [(low, 0.025), (high, 0.975)] {
                let below = quotient.below(end);
                assert!((below - wanted).abs() < 1.4e-3, "seed {SEED}, {own}: {below} for {wanted}");
            }
            let half_width = quotient.half_width(0.95).expect("uncertain");
            let inside = quotient.below(5.0 + half_width) - quotient.below(5.0 - half_width);
            assert!((inside - 0.95).abs() < 1e-4, "{own}: {inside}");
        }
    }

    fn scaled(influences: &[Influence], factor: f64) -> Vec<Influence> {
        let one = |part: &Influence| Influence {
            standard_uncertainty: factor * part.standard_uncertainty,
            ..*part
        };
        influences.iter().map(one).collect()
    }

    /// Where the divisor is known the quotient is a sum: four rectangles, 3.88 for 95 % (JCGM 101:2008, 9.2.3).
    #[test]
    fn a_certain_divisor_leaves_the_additive_example_of_supplement_1() {
        let quotient = Quotient::new(100.0, vec![Influence::rectangular(1.0); 4], Vec::new());
        assert!((quotient.standard_uncertainty() - 2.0).abs() < 1e-12);
        assert!((quotient.half_width(0.95).expect("uncertain") - 3.88).abs() < 5e-3);
    }

    #[test]
    fn nothing_uncertain_has_no_width() {
        let certain = Quotient::new(2.0, Vec::new(), vec![Influence::rectangular(0.0)]);
        assert_eq!(certain.half_width(0.95), None);
        assert_eq!((certain.below(1.9), certain.below(2.0)), (0.0, 1.0));
        let uncertain = Quotient::new(2.0, vec![Influence::normal(1.0)], Vec::new());
        assert_eq!(uncertain.half_width(1.0), None);
    }
}
