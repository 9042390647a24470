//! A reference board as measured, held against what is known of it.

use super::reference::{KnownValue, Must, Reference};
use crate::profile::QuantityName;
use crate::units::{prefixed, with_decimals_of};
use crate::verdict::{Decision, Judged, Outcome};
use serde::{Deserialize, Serialize};

/// What came of measuring a reference board.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct ReferenceResult {
    /// Its serial number.
    pub serial_number: String,
    /// What it had to come out as.
    pub must: Must,
    /// What it came out as.
    pub outcome: Outcome,
    /// Its values, known and measured.
    pub compared: Vec<Compared>,
    /// What is wrong; empty when the bench is in order.
    pub problems: Vec<String>,
}

/// One value, known and measured, in the SI unit of its name.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Compared {
    /// Which quantity.
    pub name: QuantityName,
    /// As known.
    pub known: f64,
    /// Expanded uncertainty of that.
    pub known_expanded_uncertainty: f64,
    /// As measured.
    pub measured: f64,
    /// Expanded uncertainty of that.
    pub expanded_uncertainty: f64,
    /// The normalised error E_n: the difference over the root of the sum of both squared expanded uncertainties.
    pub normalised_error: f64,
    /// Difference from the known value.
    pub drift: f64,
    /// Drift allowed; absent where no limit has two ends.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub allowed_drift: Option<f64>,
}

/// Holds what was measured against what is known.
///
/// Measured and known agree when E_n is at most 1 (ISO/IEC 17043:2010, B.3.1.3: normalised error of a comparison with a
/// reference value; cited from memory). That alone lets a bench of large uncertainty pass, so the drift has a bound of its own.
pub fn compare(reference: &Reference, outcome: Outcome, measured: &[Judged]) -> ReferenceResult {
    let mut problems = Vec::new();
    problems.extend(wrong_outcome(reference, outcome));
    for name in &reference.fails {
        let failed = measured
            .iter()
            .any(|judged| judged.quantity.name == *name && judged.decision == Some(Decision::Fail));
        if !failed {
            problems.push(format!("the {} did not fail, as it must on this board", name.title()));
        }
    }
    let mut compared = Vec::new();
    for (name, known) in &reference.values {
        let Some(judged) = measured.iter().find(|judged| judged.quantity.name == *name) else {
            problems.push(format!("the {} was not measured", name.title()));
            continue;
        };
        let found = hold(reference, *name, known, judged);
        problems.extend(apart(&found));
        compared.push(found);
    }
    let (serial_number, must) = (reference.serial_number.clone(), reference.must);
    ReferenceResult { serial_number, must, outcome, compared, problems }
}

fn wrong_outcome(reference: &Reference, outcome: Outcome) -> Option<String> {
    let as_it_must = match reference.must {
        Must::Pass => matches!(outcome, Outcome::Pass | Outcome::ConditionalPass),
        Must::Fail => outcome == Outcome::Fail,
    };
    (!as_it_must).then(|| match reference.must {
        Must::Pass => format!("it came out as {outcome} and must pass"),
        Must::Fail => {
            format!("it came out as {outcome} and must FAIL: this bench would let bad boards through")
        }
    })
}

fn hold(reference: &Reference, name: QuantityName, known: &KnownValue, judged: &Judged) -> Compared {
    let (measured, expanded) = (judged.quantity.value, judged.expanded_uncertainty());
    let drift = measured - known.value;
    let limit = judged.limit.unwrap_or_default();
    let half_width = limit.min.zip(limit.max).map(|(min, max)| (max - min) / 2.0);
    Compared {
        name,
        known: known.value,
        known_expanded_uncertainty: known.expanded_uncertainty,
        measured,
        expanded_uncertainty: expanded,
        normalised_error: drift.abs() / known.expanded_uncertainty.hypot(expanded),
        drift,
        allowed_drift: half_width.map(|half_width| half_width * reference.allowed_drift),
    }
}

/// Comparisons in the passing sense, so that what is not a number never agrees.
fn apart(found: &Compared) -> Option<String> {
    let agrees = found.normalised_error <= 1.0;
    let drifted = !found.allowed_drift.is_none_or(|allowed| found.drift.abs() <= allowed);
    if agrees && !drifted {
        return None;
    }
    let unit = found.name.unit();
    let shown = |value: f64, spread: f64| {
        let (value, spread, unit) = with_decimals_of(value, spread, unit);
        format!("{value} ± {spread} {unit}")
    };
    let why = if agrees {
        format!(
            "further than the {} of drift allowed",
            prefixed(found.allowed_drift.unwrap_or_default(), unit)
        )
    } else {
        format!("E_n = {:.2}, wanted at most 1", found.normalised_error)
    };
    Some(format!(
        "{}: measured {}, known {}: {why}. Measure a second reference board: when both moved alike it is the bench",
        found.name.title(),
        shown(found.measured, found.expanded_uncertainty),
        shown(found.known, found.known_expanded_uncertainty),
    ))
}

#[cfg(test)]
mod tests {
    use super::super::reference::tests::reference;
    use super::*;
    use crate::analysis::Quantity;
    use crate::profile::Limit;

    fn measured(value: f64, expanded: f64) -> Judged {
        let quantity = Quantity {
            name: QuantityName::Trip,
            value,
            standard_uncertainty: expanded / crate::verdict::COVERAGE_FACTOR,
            contributions: Vec::new(),
        };
        let limit = Limit { at: None, min: Some(5.88), max: Some(6.12) };
        Judged { coverage_factor: crate::verdict::COVERAGE_FACTOR, ..Judged::new(quantity, Some(limit)) }
    }

    /// By hand: 2 mV over the root of (3 mV)² + (2 mV)² = 0.5547; 5 mV over the same = 1.3868.
    #[test]
    fn the_normalised_error_is_that_of_the_standard() {
        let reference = reference(&[]).expect("good");
        let near = compare(&reference, Outcome::Pass, &[measured(6.002, 0.003)]);
        assert_eq!(near.problems, Vec::<String>::new());
        assert!((near.compared[0].normalised_error - 0.5547).abs() < 5e-5, "{near:?}");
        assert!((near.compared[0].allowed_drift.expect("two ends") - 0.036).abs() < 1e-12, "30 % of 120 mV");
        let far = compare(&reference, Outcome::Pass, &[measured(6.005, 0.003)]);
        assert!((far.compared[0].normalised_error - 1.3868).abs() < 5e-5, "{far:?}");
        assert!(far.problems[0].contains("E_n = 1.39, wanted at most 1"), "{far:?}");
    }

    #[test]
    fn a_large_uncertainty_does_not_excuse_a_drift() {
        let reference = reference(&[]).expect("good");
        let drifted = compare(&reference, Outcome::Pass, &[measured(6.04, 0.05)]);
        assert!(drifted.compared[0].normalised_error < 1.0, "{drifted:?}");
        assert!(drifted.problems[0].contains("further than the 36.00 mV of drift allowed"), "{drifted:?}");
        let nan = compare(&reference, Outcome::Pass, &[measured(f64::NAN, 0.003)]);
        assert!(!nan.problems.is_empty());
    }

    #[test]
    fn a_bad_board_must_fail_and_by_what_is_bad() {
        let bad =
            reference(&[("\"pass\"", "\"fail\"\nfails = [\"trip\"]"), ("6.000 V", "6.200 V")]).expect("good");
        let problems = |outcome, value| compare(&bad, outcome, &[measured(value, 0.003)]).problems;
        assert_eq!(problems(Outcome::Fail, 6.2), Vec::<String>::new());
        for outcome in [Outcome::Pass, Outcome::ConditionalFail, Outcome::Invalid, Outcome::Aborted] {
            assert!(problems(outcome, 6.2)[0].contains("would let bad boards through"), "{outcome}");
        }
        assert!(problems(Outcome::Fail, 6.0).iter().any(|told| told.contains("did not fail")));
        assert!(compare(&bad, Outcome::Fail, &[]).problems.iter().any(|told| told.contains("not measured")));
    }
}
