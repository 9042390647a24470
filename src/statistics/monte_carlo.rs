//! Propagation of distributions by Monte Carlo (JCGM 101:2008): the check of an uncertainty budget where the model is
//! not a straight sum.
//!
//! The same seed gives the same result on every machine.

use super::influence::{Influence, Shape};
use super::sample::Sample;
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use rand_distr::{ChiSquared, Distribution, StandardNormal};

/// Trials that share one stream of random numbers; each block can be repeated by itself.
const BLOCK: usize = 10_000;

/// Where the random numbers of one trial come from.
#[derive(Clone, Debug)]
pub struct Draws(ChaCha8Rng);

impl Draws {
    /// A standard normal number.
    pub fn normal(&mut self) -> f64 {
        self.0.sample(StandardNormal)
    }

    /// Any number between -1 and 1.
    pub fn rectangular(&mut self) -> f64 {
        2.0 * self.0.random::<f64>() - 1.0
    }

    /// A deviation of `influence` from its estimate. With finite degrees of freedom it is Student's t, scaled by the
    /// standard uncertainty (JCGM 101:2008, 6.4.9); NaN where they are not positive.
    pub fn deviation(&mut self, influence: &Influence) -> f64 {
        let degrees = influence.degrees_of_freedom.filter(|degrees| !degrees.is_infinite());
        let standard = match (degrees, influence.shape) {
            (Some(degrees), _) => match ChiSquared::new(degrees) {
                Ok(squares) => self.normal() / (squares.sample(&mut self.0) / degrees).sqrt(),
                Err(_) => f64::NAN,
            },
            (None, Shape::Normal) => self.normal(),
            (None, Shape::Rectangular) => 3.0_f64.sqrt() * self.rectangular(),
        };
        influence.standard_uncertainty * standard
    }
}

/// The values of a model, sorted.
#[derive(Clone, Debug, PartialEq)]
pub struct Outcome {
    /// Mean and standard deviation: estimate and standard uncertainty (JCGM 101:2008, 7.6).
    pub sample: Sample,
    values: Vec<f64>,
}

/// Evaluates `model` on `trials` sets of draws. `None` for less than two trials, and where a value is not finite.
pub fn propagate(seed: u64, trials: usize, model: impl Fn(&mut Draws) -> f64) -> Option<Outcome> {
    if trials < 2 {
        return None;
    }
    let mut values = Vec::with_capacity(trials);
    let mut stream = 0;
    while values.len() < trials {
        let mut generator = ChaCha8Rng::seed_from_u64(seed);
        generator.set_stream(stream);
        let mut draws = Draws(generator);
        let size = BLOCK.min(trials - values.len());
        values.extend((0..size).map(|_| model(&mut draws)));
        stream += 1;
    }
    if !values.iter().all(|value| value.is_finite()) {
        return None;
    }
    let sample = Sample::of(&values)?;
    values.sort_by(f64::total_cmp);
    Some(Outcome { sample, values })
}

impl Outcome {
    /// The interval that leaves as much below as above (JCGM 101:2008, 7.7.2); `None` unless `0 < probability < 1`.
    pub fn symmetric(&self, probability: f64) -> Option<(f64, f64)> {
        let covered = self.covered(probability)?;
        let first = (self.values.len() - covered) / 2;
        Some((*self.values.get(first)?, *self.values.get(first + covered)?))
    }

    /// The shortest interval (JCGM 101:2008, 7.7.4); `None` unless `0 < probability < 1`.
    pub fn shortest(&self, probability: f64) -> Option<(f64, f64)> {
        let covered = self.covered(probability)?;
        let pairs = self.values.iter().zip(self.values.get(covered..)?);
        pairs.map(|(low, high)| (*low, *high)).min_by(|a, b| (a.1 - a.0).total_cmp(&(b.1 - b.0)))
    }

    /// From the first to the last value within, in places.
    fn covered(&self, probability: f64) -> Option<usize> {
        let trials = self.values.len();
        if !(probability > 0.0 && probability < 1.0) {
            return None;
        }
        Some(((probability * trials as f64 + 0.5) as usize).min(trials - 1))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::statistics::coverage::Spread;
    use serde_json::Value;

    const TRIALS: usize = 200_000;
    const SEED: u64 = 20;

    /// JCGM 101:2008, 9.2: four normals, four rectangles, one dominant rectangle. An end at 97.5 % of 200 000 trials is
    /// known to 0.4 in a thousand of probability; the exact figures are compared, which leave no digit in doubt.
    #[test]
    fn the_additive_examples_of_supplement_1_come_out() {
        let text = include_str!("../../tests/data/statistics/gums1_additive.json");
        let file: Value = serde_json::from_str(text).expect("reference data");
        let exact = |label: &str| {
            let published = file["published"].as_array().expect("a list");
            let entry = published.iter().find(|entry| entry["label"] == label).expect("the label");
            entry["recomputed"].as_f64().expect("a number")
        };
        let rectangle = Influence::rectangular;
        for (influences, u, half_width) in [
            ([Influence::normal(1.0); 4], "u_case1", "half_case1"),
            ([rectangle(1.0); 4], "u_case2", "half_case2"),
            ([rectangle(1.0), rectangle(1.0), rectangle(1.0), rectangle(10.0)], "u_case3", "half_case3_mcm"),
        ] {
            let (u, half_width) = (exact(u), exact(half_width));
            let outcome =
                propagate(SEED, TRIALS, |draws| influences.iter().map(|part| draws.deviation(part)).sum())
                    .expect("an outcome");
            let found = outcome.sample.standard_deviation.expect("many values");
            // Four standard errors of a standard deviation are 0.6 % of it.
            assert!((found - u).abs() < 0.007 * u, "seed {SEED}: {found} against {u}");
            for (low, high) in [outcome.symmetric(0.95), outcome.shortest(0.95)].into_iter().flatten() {
                // Four standard errors of an end, and the slide of the shortest interval.
                assert!((0.5 * (high - low) - half_width).abs() < 0.06, "seed {SEED}: {low} to {high}");
            }
        }
    }

    /// JCGM 101:2008, 9.4: comparison loss, `x1 squared + x2 squared`, which no straight sum approximates. The exact
    /// figures are those of the non-central chi-squared law; the printed ones (from memory) are Monte Carlo results.
    #[test]
    fn the_comparison_loss_of_supplement_1_comes_out() {
        let text = include_str!("../../tests/data/statistics/gums1_comparison_loss.json");
        let file: Value = serde_json::from_str(text).expect("reference data");
        let published = file["published"].as_array().expect("a list");
        for (x1, r) in
            [("0.0", "0"), ("0.01", "0"), ("0.05", "0"), ("0.0", "0.9"), ("0.01", "0.9"), ("0.05", "0.9")]
        {
            let exact = |what: &str| {
                let label = format!("x{x1}_r{r}_{what}");
                let entry =
                    published.iter().find(|entry| entry["label"] == label.as_str()).expect("the label");
                1e-6 * entry["recomputed"].as_f64().expect("a number")
            };
            let (x1, r): (f64, f64) = (x1.parse().expect("a number"), r.parse().expect("a number"));
            let outcome = propagate(SEED, TRIALS, |draws| {
                let (first, second) = (draws.normal(), draws.normal());
                let x2 = 0.005 * (r * first + (1.0 - r * r).sqrt() * second);
                (x1 + 0.005 * first).powi(2) + x2.powi(2)
            })
            .expect("an outcome");
            let u = exact("u");
            let close = |what: &str, found: f64, wanted: f64, part: f64| {
                assert!(
                    (found - wanted).abs() < part * u,
                    "seed {SEED}, {x1}, {r}, {what}: {found} against {wanted}"
                );
            };
            // In parts of u: four standard errors, and more for the ends of the shortest interval, which slide along
            // wherever the density is nearly the same at both.
            close("estimate", outcome.sample.mean, exact("y"), 0.009);
            close("uncertainty", outcome.sample.standard_deviation.expect("many values"), u, 0.02);
            let (low, high) = outcome.shortest(0.95).expect("an interval");
            close("length", high - low, exact("hi") - exact("lo"), 0.04);
            close("low", low, exact("lo"), 0.12);
            close("high", high, exact("hi"), 0.12);
        }
    }

    /// Scatter with few degrees of freedom beside a rectangle, against the convolution of the two.
    #[test]
    fn draws_of_an_influence_have_its_spread() {
        let influences = [Influence::scatter(1.0, 5.0), Influence::rectangular(1.5)];
        let outcome =
            propagate(SEED, TRIALS, |draws| influences.iter().map(|part| draws.deviation(part)).sum())
                .expect("an outcome");
        let half_width =
            Spread::new(&influences).and_then(|spread| spread.half_width(0.95)).expect("a width");
        let (low, high) = outcome.symmetric(0.95).expect("an interval");
        // Four standard errors.
        assert!((0.5 * (high - low) - half_width).abs() < 0.04, "seed {SEED}: {low} to {high}, {half_width}");
    }

    #[test]
    fn a_seed_repeats_itself_and_another_does_not() {
        let run = |seed, trials| propagate(seed, trials, Draws::normal).expect("an outcome");
        assert_eq!(run(1, 25_000), run(1, 25_000));
        assert!(run(1, 25_000) != run(2, 25_000));
        // The first blocks are the same, however many follow.
        let (few, more) = (run(1, BLOCK), run(1, 2 * BLOCK));
        assert!(
            few.values
                .iter()
                .all(|value| more.values.binary_search_by(|other| other.total_cmp(value)).is_ok())
        );
    }

    #[test]
    fn nonsense_has_no_outcome() {
        assert_eq!(propagate(1, 1, Draws::normal), None);
        assert_eq!(propagate(1, 10, |_| f64::NAN), None);
        assert_eq!(propagate(1, 100, |draws| draws.deviation(&Influence::scatter(1.0, -1.0))), None);
        let outcome = propagate(1, 100, Draws::rectangular).expect("an outcome");
        for wrong in [0.0, 1.0, -1.0, f64::NAN] {
            assert_eq!(outcome.symmetric(wrong), None);
            assert_eq!(outcome.shortest(wrong), None);
        }
    }
}
