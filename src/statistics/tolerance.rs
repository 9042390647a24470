//! Tolerance intervals: between which limits a stated part of a population lies, with a stated confidence, from a
//! sample.
//!
//! For a normal population the limits are mean plus and minus factor times standard deviation of the sample (ISO
//! 16269-6). For any other continuous one the sample's extremes serve, if the sample is large enough.

use super::distribution::{ChiSquared, Distribution, NonCentralT, Normal};
use super::root::root;

/// Factors are found to this, relative to themselves.
const TOLERANCE: f64 = 1e-12;

/// Spacing of the means over which the two-sided factor is averaged, in standard deviations of a mean. The trapezoidal
/// rule is exact to rounding for so smooth a bump.
const SPACING: f64 = 0.2;

/// Means further out than this many of their standard deviations do not occur.
const FURTHEST: i32 = 45;

/// Which sides of a population are to be bounded.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sides {
    /// Only above, or only below.
    One,
    /// Both.
    Two,
}

/// The factor by which the standard deviation of a normal sample of `count` is multiplied, so that with `confidence`
/// at least the part `content` of the population lies on the inner side of mean plus or minus that. Exact.
///
/// `None` for fewer than two values, and unless both parts lie between 0 and 1.
pub fn factor(sides: Sides, count: usize, content: f64, confidence: f64) -> Option<f64> {
    if count < 2 || !is_part(content) || !is_part(confidence) {
        return None;
    }
    match sides {
        Sides::One => one_sided(count as f64, content, confidence),
        Sides::Two => two_sided(count as f64, content, confidence),
    }
}

/// The smallest sample of any continuous population whose largest value (one side), or whose smallest and largest
/// (two sides), bound at least the part `content` of it with `confidence` (Wilks 1941). `None` unless both lie
/// between 0 and 1.
pub fn least_sample(sides: Sides, content: f64, confidence: f64) -> Option<usize> {
    if !is_part(content) || !is_part(confidence) {
        return None;
    }
    let doubt = |count: f64| match sides {
        Sides::One => content.powf(count),
        Sides::Two => count * content.powf(count - 1.0) - (count - 1.0) * content.powf(count),
    };
    let enough = |count: f64| doubt(count) <= 1.0 - confidence;
    let smallest = if sides == Sides::One { 1.0 } else { 2.0 };
    let mut most = smallest;
    while !enough(most) {
        most *= 2.0;
    }
    let mut too_few = (most / 2.0).floor();
    while most - too_few > 1.0 {
        let middle = (0.5 * (most + too_few)).floor();
        if enough(middle) { most = middle } else { too_few = middle }
    }
    Some(most.max(smallest) as usize)
}

fn is_part(part: f64) -> bool {
    part > 0.0 && part < 1.0
}

/// Through the non-central t distribution (Owen 1968).
fn one_sided(count: f64, content: f64, confidence: f64) -> Option<f64> {
    let delta = Normal.quantile(content)? * count.sqrt();
    Some(NonCentralT::new(count - 1.0, delta)?.quantile(confidence)? / count.sqrt())
}

/// For a given mean the sample's standard deviation must reach a certain size; the probability of that is averaged over
/// the means (Odeh 1978).
fn two_sided(count: f64, content: f64, confidence: f64) -> Option<f64> {
    let degrees = count - 1.0;
    let squares = ChiSquared::new(degrees)?;
    let mut means = Vec::new();
    for index in 0..=FURTHEST {
        let z = f64::from(index) * SPACING;
        let sides = if index == 0 { 1.0 } else { 2.0 };
        means.push((sides * SPACING * Normal::density(z), half_width(z / count.sqrt(), content)?));
    }
    let reached = |factor: f64| -> f64 {
        let enough = |half_width: f64| squares.upper(degrees * (half_width / factor).powi(2));
        means.iter().map(|(probability, half_width)| probability * enough(*half_width)).sum()
    };
    let mut most = Normal.upper_quantile(0.5 * (1.0 - content))?;
    while reached(most) < confidence {
        most *= 2.0;
        if most > 1e100 {
            return None;
        }
    }
    // In logarithms: with two values the factor may be of any size.
    root(|log| reached(log.exp()) - confidence, f64::MIN_POSITIVE.ln() / 4.0, most.ln(), TOLERANCE)
        .map(f64::exp)
}

/// Half the width of the interval about `off_centre` that holds `content` of the standard normal distribution.
fn half_width(off_centre: f64, content: f64) -> Option<f64> {
    let central = Normal.upper_quantile(0.5 * (1.0 - content))?;
    // What lies outside keeps its digits for a content next to one.
    let outside = |half: f64| Normal.upper(half + off_centre) + Normal.upper(half - off_centre);
    // Wide enough on the nearer side is more than wide enough; the one added is for rounding.
    root(|half| 1.0 - content - outside(half), 0.0, central + off_centre + 1.0, TOLERANCE)
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::Value;

    fn file(text: &str) -> Value {
        serde_json::from_str(text).expect("reference data")
    }

    fn number(value: &Value) -> f64 {
        value.as_f64().expect("a number")
    }

    /// Compares every factor of a table to `digits`, relative, and gives how many there were.
    fn check(table: &Value, key: &str, sides: Sides, digits: f64) -> usize {
        let rows = table.as_array().expect("a table");
        for row in rows {
            let count = row["n"].as_u64().expect("a count") as usize;
            let found = factor(sides, count, number(&row["p"]), number(&row["conf"])).expect("a factor");
            let wanted = number(&row[key]);
            assert!((found / wanted - 1.0).abs() < digits, "{row}: {found}");
        }
        rows.len()
    }

    /// Two-sided factors computed with scipy 1.17.1 by quadrature and root finding; printed to two decimals in
    /// Berthouex and Brown, Statistics for Environmental Engineers, Table 21.1 (ISO 16269-6 has the same quantity).
    #[test]
    fn two_sided_factors_agree_with_quadrature() {
        let file = file(include_str!("../../tests/data/statistics/tolerance_two_sided_95.json"));
        assert_eq!(check(&file["data"]["table"], "k_exact", Sides::Two, 1e-8), 42);
    }

    /// One-sided factors from scipy's non-central t; Owen's table as reproduced in NBS Handbook 91 to three decimals.
    #[test]
    fn one_sided_factors_agree_with_the_non_central_t() {
        let file = file(include_str!("../../tests/data/statistics/tolerance_one_sided_95.json"));
        assert_eq!(check(&file["data"]["factors"], "k", Sides::One, 1e-11), 15);
    }

    /// NIST/SEMATECH e-Handbook, 7.2.6.3: 43 wafers, 90 % with 99 % confidence. The page's own 2.217 and 1.875 are
    /// approximations; the exact factors are scipy's.
    #[test]
    fn the_wafers_of_the_handbook_come_out() {
        let file = file(include_str!("../../tests/data/statistics/nist_tolerance_wafer43.json"));
        let exact = &file["recomputed_only"];
        for (sides, key, page) in [(Sides::Two, "k2_exact", 2.217), (Sides::One, "k1_exact", 1.875)] {
            let found = factor(sides, 43, 0.9, 0.99).expect("a factor");
            assert!((found - number(&exact[key])).abs() < 1e-8, "{found}");
            assert!((found / page - 1.0).abs() < 0.003, "{found}");
        }
    }

    /// Sample sizes of ISO 16269-6 (from memory): 59 and 299 for one side, 93 and 473 for two, at 95 % confidence.
    #[test]
    fn extremes_bound_a_population_from_fifty_nine_values_on() {
        for (sides, content, confidence, count) in [
            (Sides::One, 0.95, 0.95, 59),
            (Sides::One, 0.99, 0.95, 299),
            (Sides::One, 0.9, 0.95, 29),
            (Sides::Two, 0.95, 0.95, 93),
            (Sides::Two, 0.99, 0.95, 473),
            (Sides::Two, 0.9, 0.95, 46),
            (Sides::One, 0.5, 0.5, 1),
            (Sides::Two, 0.01, 0.01, 2),
        ] {
            assert_eq!(
                least_sample(sides, content, confidence),
                Some(count),
                "{sides:?} {content} {confidence}"
            );
        }
    }

    /// A large sample knows its population: the factors tend to the quantiles of the normal distribution.
    #[test]
    fn large_samples_need_no_more_than_the_quantile() {
        for (sides, quantile) in [(Sides::One, 1.644_853_6), (Sides::Two, 1.959_964_0)] {
            let content = 0.95;
            let found = factor(sides, 4_000_000, content, 0.5).expect("a factor");
            assert!((found - quantile).abs() < 1e-4, "{found}");
        }
    }

    #[test]
    fn nonsense_has_no_factor() {
        for sides in [Sides::One, Sides::Two] {
            assert_eq!(factor(sides, 1, 0.9, 0.9), None);
            for wrong in [0.0, 1.0, -0.5, f64::NAN] {
                assert_eq!(factor(sides, 10, wrong, 0.9), None);
                assert_eq!(factor(sides, 10, 0.9, wrong), None);
                assert_eq!(least_sample(sides, wrong, 0.9), None);
                assert_eq!(least_sample(sides, 0.9, wrong), None);
            }
            assert!(factor(sides, 2, 0.999, 0.999).is_some_and(f64::is_finite));
        }
    }
}
