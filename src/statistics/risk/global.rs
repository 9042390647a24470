//! Global risks of a process and its test (JCGM 106:2012, 9.5).

use super::Interval;
use crate::statistics::distribution::{Distribution, Normal};
use crate::statistics::quadrature::integral;

/// True values further from the mean than this many standard deviations do not occur.
const FURTHEST: i32 = 12;

/// Within this many standard uncertainties of an acceptance limit the probability of acceptance changes.
const REACH: i32 = 8;

/// How the true values of the items of a process are spread: normally.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Process {
    /// Mean.
    pub mean: f64,
    /// Standard deviation of the true values, without the measurement's share.
    pub standard_deviation: f64,
}

/// What becomes of an item taken at random. The four cases add up to one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GlobalRisk {
    /// Consumer's risk: outside of the tolerance and accepted.
    pub consumer: f64,
    /// Producer's risk: within the tolerance and rejected.
    pub producer: f64,
    /// Probability of an item outside of the tolerance, accepted or not.
    pub nonconforming: f64,
}

impl GlobalRisk {
    /// Probability that an item is accepted.
    pub fn accepted(&self) -> f64 {
        1.0 - self.nonconforming - self.producer + self.consumer
    }
}

/// Risks of `process`, whose items are measured with a normal error of `standard_uncertainty`, conform within
/// `tolerance`, and are accepted when the result is within `acceptance`; a value on a limit is within. Where the
/// acceptance limits have met, nothing is accepted.
///
/// `None` where the process' figures or the uncertainty are negative or not finite, where a limit is not finite, and
/// where the limits of the tolerance leave nothing between them. Process and uncertainty may be as narrow as zero.
pub fn global_risk(
    process: Process,
    standard_uncertainty: f64,
    tolerance: Interval,
    acceptance: Interval,
) -> Option<GlobalRisk> {
    let Process { mean, standard_deviation } = process;
    let is_size = |number: f64| number.is_finite() && number >= 0.0;
    let numbers = is_size(standard_deviation) && is_size(standard_uncertainty) && mean.is_finite();
    let mut limits = [tolerance.min, tolerance.max, acceptance.min, acceptance.max].into_iter().flatten();
    if !numbers || !limits.all(f64::is_finite) || has_met(tolerance) {
        return None;
    }
    let test = |value: f64| {
        if has_met(acceptance) {
            Within::NOTHING
        } else {
            Within::of(acceptance, value, standard_uncertainty)
        }
    };
    let conforming = Within::of(tolerance, mean, standard_deviation);
    if standard_deviation == 0.0 {
        let result = test(mean);
        return Some(GlobalRisk {
            consumer: conforming.outside * result.inside,
            producer: conforming.inside * result.outside,
            nonconforming: conforming.outside,
        });
    }
    // From here on in standard deviations of the process about its mean.
    let place = |limit: f64| (limit - mean) / standard_deviation;
    let end = f64::from(FURTHEST);
    let low = tolerance.min.map_or(-end, place).clamp(-end, end);
    let high = tolerance.max.map_or(end, place).clamp(-end, end);
    let mut edges: Vec<f64> = (-FURTHEST..=FURTHEST).map(f64::from).collect();
    for limit in [acceptance.min, acceptance.max].into_iter().flatten() {
        edges.extend((-REACH..=REACH).map(|steps| place(limit + f64::from(steps) * standard_uncertainty)));
    }
    edges.sort_by(f64::total_cmp);
    let over = |from: f64, to: f64, probability: &dyn Fn(Within) -> f64| {
        let inner = edges.iter().copied().filter(|edge| *edge > from && *edge < to);
        let edges: Vec<f64> = [from].into_iter().chain(inner).chain([to]).collect();
        integral(&edges, |z| Normal::density(z) * probability(test(mean + z * standard_deviation)))
    };
    let accepted = |result: Within| result.inside;
    Some(GlobalRisk {
        consumer: over(-end, low, &accepted) + over(high, end, &accepted),
        producer: over(low, high, &|result| result.outside),
        nonconforming: conforming.outside,
    })
}

/// True where nothing is left between two limits.
fn has_met(interval: Interval) -> bool {
    interval.min.zip(interval.max).is_some_and(|(min, max)| max <= min)
}

/// Probabilities of lying within and outside of an interval; each keeps its digits when it is small.
#[derive(Clone, Copy)]
struct Within {
    inside: f64,
    outside: f64,
}

impl Within {
    const NOTHING: Self = Self { inside: 0.0, outside: 1.0 };

    /// For a normal number of this mean and standard deviation, which may be zero.
    fn of(interval: Interval, mean: f64, standard_deviation: f64) -> Self {
        let place = |limit: Option<f64>, without: f64| {
            let z = limit.map_or(without, |limit| (limit - mean) / standard_deviation);
            // Zero over zero: on the limit, which is within.
            if z.is_nan() { without } else { z }
        };
        let (min, max) = (place(interval.min, f64::NEG_INFINITY), place(interval.max, f64::INFINITY));
        let inside = if max.abs() < min.abs() {
            Normal.lower(max) - Normal.lower(min)
        } else {
            Normal.upper(min) - Normal.upper(max)
        };
        Self { inside, outside: Normal.lower(min) + Normal.upper(max) }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::Value;

    fn between(min: f64, max: f64) -> Interval {
        Interval { min: Some(min), max: Some(max) }
    }

    /// JCGM 106:2012, 9.5.3: wire-wound resistors of 1500 ohm. Printed (from memory): 10 % of the process do not
    /// conform, the risks are 1 % and 7 %. More digits from scipy's bivariate integration.
    #[test]
    fn the_resistors_of_jcgm_106_come_out() {
        let text = include_str!("../../../tests/data/statistics/jcgm106_global_resistor.json");
        let file: Value = serde_json::from_str(text).expect("reference data");
        let number = |key: &str| file["data"][key].as_f64().expect("a number");
        let exact = |key: &str| file["recomputed_only"][key].as_f64().expect("a number");
        let process = Process { mean: number("y0"), standard_deviation: number("u0") };
        let tolerance = between(number("TL"), number("TU"));
        let guarded = between(number("AL"), number("AU"));
        for (acceptance, consumer, producer) in
            [(guarded, "RC", "RP"), (tolerance, "RC_simple_acceptance", "RP_simple_acceptance")]
        {
            let risk = global_risk(process, number("um"), tolerance, acceptance).expect("a risk");
            for (found, key) in [
                (risk.consumer, consumer),
                (risk.producer, producer),
                (risk.nonconforming, "process_nonconforming"),
            ] {
                assert!((found / exact(key) - 1.0).abs() < 1e-9, "{key}: {found}");
            }
        }
    }

    /// Results are normal themselves, with both variances: what is accepted follows without any integral. Holds for
    /// measurements far better and far worse than the process.
    #[test]
    fn what_is_accepted_follows_from_the_results() {
        for (mean, standard_deviation, u) in
            [(0.0, 1.0, 0.2), (0.9, 0.3, 1e-6), (0.5, 1e-6, 0.3), (-2.0, 0.1, 0.4), (1.0, 0.7, 50.0)]
        {
            let process = Process { mean, standard_deviation };
            for acceptance in [between(-1.3, 0.8), Interval { min: None, max: Some(0.9) }] {
                let risk = global_risk(process, u, between(-1.1, 1.0), acceptance).expect("a risk");
                let both = standard_deviation.hypot(u);
                let wanted = Within::of(acceptance, mean, both).inside;
                assert!(
                    (risk.accepted() - wanted).abs() < 1e-10,
                    "{mean} {standard_deviation} {u}: {risk:?}"
                );
            }
        }
    }

    #[test]
    fn a_perfect_measurement_takes_no_risk() {
        let process = Process { mean: 0.3, standard_deviation: 1.0 };
        let limits = between(-1.0, 1.0);
        let risk = global_risk(process, 0.0, limits, limits).expect("a risk");
        assert!(risk.consumer < 1e-15 && risk.producer < 1e-15, "{risk:?}");
        let guarded = global_risk(process, 0.0, limits, limits.guarded(0.5)).expect("a risk");
        let lost = Normal.upper(0.2) - Normal.upper(0.7) + Normal.lower(-0.8) - Normal.lower(-1.3);
        assert!((guarded.producer - lost).abs() < 1e-13 && guarded.consumer < 1e-15, "{guarded:?}");
    }

    #[test]
    fn a_process_without_spread_is_one_item() {
        let inside = Process { mean: 1.0, standard_deviation: 0.0 };
        let limits = Interval { min: None, max: Some(1.0) };
        let risk = global_risk(inside, 0.1, limits, limits).expect("a risk");
        assert!(risk.consumer == 0.0 && (risk.producer - 0.5).abs() < 1e-15, "{risk:?}");
        let outside = Process { mean: 1.1, ..inside };
        let risk = global_risk(outside, 0.1, limits, limits).expect("a risk");
        assert!(risk.producer == 0.0 && (risk.consumer - Normal.lower(-1.0)).abs() < 1e-15, "{risk:?}");
    }

    #[test]
    fn limits_that_have_met_accept_nothing() {
        let process = Process { mean: 0.0, standard_deviation: 1.0 };
        let limits = between(-1.0, 1.0);
        let risk = global_risk(process, 0.1, limits, limits.guarded(1.2)).expect("a risk");
        assert!(risk.consumer == 0.0 && risk.accepted().abs() < 1e-12, "{risk:?}");
        assert_eq!(global_risk(process, 0.1, limits.guarded(1.2), limits), None);
    }

    #[test]
    fn nonsense_has_no_risk() {
        let good = Process { mean: 0.0, standard_deviation: 1.0 };
        let limits = between(-1.0, 1.0);
        assert_eq!(global_risk(Process { mean: f64::NAN, ..good }, 0.1, limits, limits), None);
        assert_eq!(global_risk(Process { standard_deviation: -1.0, ..good }, 0.1, limits, limits), None);
        assert_eq!(global_risk(good, f64::NAN, limits, limits), None);
        assert_eq!(global_risk(good, 0.1, between(f64::NAN, 1.0), limits), None);
        assert_eq!(global_risk(good, 0.1, limits, between(-1.0, f64::INFINITY)), None);
    }
}
