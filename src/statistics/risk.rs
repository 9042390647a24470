//! Risks of wrong decisions (JCGM 106:2012).
//!
//! The specific risk belongs to one result: given what was measured, how probable is it that the true value is on the
//! other side of a limit? The global risk belongs to a process and its test: how often will an item be both outside the
//! tolerance and accepted (consumer's risk), or inside and rejected (producer's risk)?

mod global;

pub use global::{GlobalRisk, Process, global_risk};

use super::coverage::Spread;
use super::root::root;

/// A guard band is found to this, relative to itself.
const TOLERANCE: f64 = 1e-9;

/// What lies between two limits, each of which may be absent.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Interval {
    /// Lower limit.
    pub min: Option<f64>,
    /// Upper limit.
    pub max: Option<f64>,
}

impl Interval {
    /// Both limits moved inwards by `guard` (JCGM 106:2012, 8.3); outwards where it is negative.
    pub fn guarded(self, guard: f64) -> Self {
        Self { min: self.min.map(|min| min + guard), max: self.max.map(|max| max - guard) }
    }
}

/// Probability that the true value lies outside of `limits`, where `value` was measured and `spread` is how far it
/// may be off. It is the specific consumer's risk of accepting the item (JCGM 106:2012, 9.3.2), and one less the
/// conformance probability (7.3, 7.4). What was known of the item beforehand is not used.
pub fn nonconformance(value: f64, spread: &Spread, limits: Interval) -> f64 {
    let below = limits.min.map_or(0.0, |min| spread.beyond(value - min));
    let above = limits.max.map_or(0.0, |max| spread.beyond(max - value));
    (below + above).clamp(0.0, 1.0)
}

/// Probability that the true value lies within `limits`: the specific producer's risk of rejecting the item (JCGM
/// 106:2012, 9.3.3). Its digits are those of one less [`nonconformance`].
pub fn conformance(value: f64, spread: &Spread, limits: Interval) -> f64 {
    1.0 - nonconformance(value, spread, limits)
}

/// Width of the guard band inside each limit, so that an item whose result is just accepted conforms but for
/// `largest_risk` (JCGM 106:2012, 8.3.2). Zero where simple acceptance is good enough.
///
/// `None` where `largest_risk` is not between 0 and 1, where there is no limit, and where not even a result in the
/// middle between two limits is that certain.
pub fn guard_band(spread: &Spread, limits: Interval, largest_risk: f64) -> Option<f64> {
    if !(largest_risk > 0.0 && largest_risk < 1.0) {
        return None;
    }
    let (edge, furthest) = match (limits.min, limits.max) {
        (Some(min), Some(max)) if max > min => (max, 0.5 * (max - min)),
        (Some(_), Some(_)) | (None, None) => return None,
        (None, Some(limit)) | (Some(limit), None) if limit.is_finite() => {
            if largest_risk >= 0.5 {
                return Some(0.0);
            }
            return spread.half_width(1.0 - 2.0 * largest_risk);
        }
        _ => return None,
    };
    let excess = |guard: f64| nonconformance(edge - guard, spread, limits) - largest_risk;
    if excess(0.0) <= 0.0 {
        return Some(0.0);
    }
    root(excess, 0.0, furthest, TOLERANCE)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::statistics::influence::Influence;
    use serde_json::Value;

    fn normal(u: f64) -> Spread {
        Spread::new(&[Influence::normal(u)]).expect("a spread")
    }

    fn above(min: f64) -> Interval {
        Interval { min: Some(min), max: None }
    }

    fn below(max: f64) -> Interval {
        Interval { min: None, max: Some(max) }
    }

    fn reference() -> Value {
        let text = include_str!("../../tests/data/statistics/jcgm106_specific_one_sided.json");
        serde_json::from_str(text).expect("reference data")
    }

    /// JCGM 106:2012, 7.4 (figures written down from memory): a diode's breakdown voltage conforms with 92 %, a
    /// container's burst pressure with 99 %. More digits from scipy.
    #[test]
    fn the_diode_and_the_container_conform_as_printed() {
        let file = reference();
        let number = |part: &str, key: &str| file["data"][part][key].as_f64().expect("a number");
        let diode = conformance(
            number("zener", "y"),
            &normal(number("zener", "u")),
            below(number("zener", "limit_upper")),
        );
        assert!((diode - 0.919_243_340_766_227_3).abs() < 1e-10, "{diode}");
        let container = conformance(
            number("burst", "y"),
            &normal(number("burst", "u")),
            above(number("burst", "limit_lower")),
        );
        assert!((container - 0.989_009_547_384_822_2).abs() < 1e-10, "{container}");
    }

    /// JCGM 106:2012, Table 1 (from memory): how many standard uncertainties inside the limit a result must be.
    #[test]
    fn table_1_of_jcgm_106_comes_out() {
        let file = reference();
        for row in file["data"]["z_table"].as_array().expect("a table") {
            let number = |key: &str| row[key].as_f64().expect("a number");
            let guard = guard_band(&normal(2.0), below(7.0), 1.0 - number("pc")).expect("a guard band");
            assert!((guard / 2.0 - number("z")).abs() < 1e-9, "{row}: {guard}");
        }
    }

    /// ILAC-G8:09/2019, Table 1 (from memory): with k = 2 a guard band of U leaves less than 2.5 %, 0.83 U less than
    /// 5 %, none up to 50 %, 1.5 U less than 0.16 %, 3 U less than one in a million.
    #[test]
    fn the_guard_bands_of_ilac_g8_keep_their_promises() {
        for (times, promised, exact) in [
            (0.0, 0.5, 0.5),
            (0.83, 0.05, 0.048_457_226_266_722_82),
            (1.0, 0.025, 0.022_750_131_948_179_2),
            (1.5, 0.001_6, 0.001_349_898_031_630_093_3),
            (3.0, 1e-6, 9.865_876_450_376_946e-10),
        ] {
            let accepted = below(10.0).guarded(times * 2.0 * 0.3).max.expect("a limit");
            let risk = nonconformance(accepted, &normal(0.3), below(10.0));
            assert!(risk <= promised && (risk / exact - 1.0).abs() < 1e-9, "{times}: {risk}");
        }
    }

    #[test]
    fn a_rectangle_needs_no_guard_beyond_its_end() {
        let bracket = Spread::new(&[Influence::rectangular(1.0 / 3.0_f64.sqrt())]).expect("a spread");
        // One in a hundred of a rectangle from -1 to 1 lies above 0.98.
        let guard = guard_band(&bracket, below(5.0), 0.01).expect("a guard band");
        assert!((guard - 0.98).abs() < 1e-6, "{guard}");
        assert!(nonconformance(3.9, &bracket, below(5.0)) == 0.0);
        assert!((nonconformance(5.0, &bracket, below(5.0)) - 0.5).abs() < 1e-9);
    }

    #[test]
    fn two_limits_close_together_share_the_risk() {
        let limits = Interval { min: Some(-1.0), max: Some(1.0) };
        for u in [0.05, 0.3, 0.45] {
            let guard = guard_band(&normal(u), limits, 0.05).expect("a guard band");
            let accepted = limits.guarded(guard);
            for edge in [accepted.min, accepted.max] {
                let risk = nonconformance(edge.expect("a limit"), &normal(u), limits);
                assert!((risk - 0.05).abs() < 1e-7, "{u}: {risk}");
            }
        }
        // 1.96 u is wider than half the distance of the limits.
        assert_eq!(guard_band(&normal(0.52), limits, 0.05), None);
        // Where the other limit is far the guard band is that of one limit.
        let wide = guard_band(&normal(0.05), limits, 0.05).expect("a guard band");
        assert!((wide - 1.644_853_627 * 0.05).abs() < 1e-8);
        assert_eq!(guard_band(&normal(0.05), limits, 0.6), Some(0.0));
    }

    #[test]
    fn nonsense_is_never_safe() {
        for wrong in [0.0, 1.0, -1.0, f64::NAN] {
            assert_eq!(guard_band(&normal(1.0), below(1.0), wrong), None);
        }
        let none = Interval { min: None, max: None };
        assert_eq!(guard_band(&normal(1.0), none, 0.05), None);
        assert_eq!(guard_band(&normal(1.0), below(f64::NAN), 0.05), None);
        assert_eq!(guard_band(&normal(1.0), Interval { min: Some(2.0), max: Some(1.0) }, 0.05), None);
        assert!(nonconformance(f64::NAN, &normal(1.0), below(1.0)).is_nan());
        assert!(conformance(0.0, &normal(1.0), below(f64::NAN)).is_nan());
        assert!(nonconformance(0.0, &normal(1.0), none) == 0.0);
    }
}
