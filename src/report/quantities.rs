//! The table of a run: quantity, measured value with its uncertainty, limits, decision.

use super::columns::aligned;
use super::paint::{self, Paint};
use super::words;
use crate::analysis::{Finding, FindingCode};
use crate::profile::Limit;
use crate::units::{Unit, prefixed, under_prefix_of, with_decimals_of};
use crate::verdict::{Decision, Judged};

/// A heading and a line per quantity. Value, uncertainty and limits of a line stand under one prefix.
pub(super) fn table(quantities: &[Judged], paint: Paint) -> Vec<String> {
    let heading = ["quantity", "measured ± U", "limits", "decision"].map(str::to_owned).to_vec();
    let mut rows = vec![heading];
    rows.extend(quantities.iter().map(|judged| {
        vec![title(judged), measured(judged), limits(judged).unwrap_or_default(), decision(judged)]
    }));
    let lines = aligned(&rows);
    let styles = std::iter::once(None).chain(quantities.iter().map(|judged| judged.decision));
    lines.iter().zip(styles).map(|(line, decision)| paint.on(paint::of_decision(decision), line)).collect()
}

/// `off current at 5.800 V`
fn title(judged: &Judged) -> String {
    let name = judged.quantity.name.title();
    match judged.limit.and_then(|limit| limit.at) {
        Some(at) => format!("{name} at {at}"),
        None => name.to_owned(),
    }
}

/// `6.0004 ± 0.0016 V`; no uncertainty where none is known.
pub(super) fn measured(judged: &Judged) -> String {
    let expanded = judged.expanded_uncertainty();
    let (quantity, unit) = (judged.quantity.value, judged.quantity.name.unit());
    if expanded <= 0.0 {
        return prefixed(quantity, unit);
    }
    let (value, expanded, unit) = with_decimals_of(quantity, expanded, unit);
    format!("{value} ± {expanded} {unit}")
}

/// `5.88 to 6.12 V`, with no more digits than the profile gave.
pub(super) fn limits(judged: &Judged) -> Option<String> {
    let Limit { min, max, .. } = judged.limit?;
    let value = judged.quantity.value;
    let unit = judged.quantity.name.unit();
    let (_, _, symbol) = with_decimals_of(value, 0.0, unit);
    let number = |limit: f64| shortest(under_prefix_of(limit, value, unit));
    match (min, max) {
        (Some(min), Some(max)) => Some(format!("{} to {} {symbol}", number(min), number(max))),
        (Some(min), None) => Some(format!("at least {} {symbol}", number(min))),
        (None, Some(max)) => Some(format!("at most {} {symbol}", number(max))),
        (None, None) => None,
    }
}

/// `FAIL: too high`; what needs attention is in capitals, so that it stands out without colour.
fn decision(judged: &Judged) -> String {
    let word = |decision| words::spoken(&words::decision(decision));
    match (judged.decision, side(judged)) {
        (None, _) => "-".to_owned(),
        (Some(decision @ (Decision::Pass | Decision::ConditionalPass)), _) => word(decision),
        (Some(decision), Some(side)) => format!("{}: {side}", word(decision).to_uppercase()),
        (Some(decision), None) => word(decision).to_uppercase(),
    }
}

/// Beyond which of its limits a value lies.
fn side(judged: &Judged) -> Option<&'static str> {
    let limit = judged.limit?;
    let value = judged.quantity.value;
    if limit.min.is_some_and(|min| value < min) {
        Some("low")
    } else if limit.max.is_some_and(|max| value > max) {
        Some("high")
    } else {
        None
    }
}

/// What is wrong with a quantity, as a clause: `trip voltage 6.150 V is above 6.12 V`.
pub(super) fn complaint(judged: &Judged) -> String {
    let (name, unit) = (judged.quantity.name, judged.quantity.name.unit());
    let value = prefixed(judged.quantity.value, unit);
    let limit = judged.limit.unwrap_or_default();
    match (side(judged), limit.min, limit.max) {
        (Some("low"), Some(min), _) => format!("{} {value} is below {}", name.title(), plain(min, unit)),
        (Some("high"), _, Some(max)) => format!("{} {value} is above {}", name.title(), plain(max, unit)),
        _ => format!("{} {value} is inside its limits by less than the guard band", name.title()),
    }
}

/// What stands behind the U of a table: `U covers the true value with 95 %.`
pub(super) fn what_u_means(quantities: &[Judged], findings: &[Finding]) -> String {
    let mut probabilities: Vec<Option<f64>> =
        quantities.iter().map(|judged| judged.coverage_probability).collect();
    probabilities.dedup();
    let meaning = match probabilities[..] {
        [Some(probability)] => format!("U covers the true value with {}.", words::percent(probability)),
        _ => {
            let mut factors: Vec<String> =
                quantities.iter().map(|judged| words::factor(judged.coverage_factor)).collect();
            factors.dedup();
            format!("U is the expanded uncertainty, coverage factor k = {}.", factors.join(", "))
        }
    };
    if findings.iter().any(|finding| finding.code == FindingCode::AccuracyNotIncluded) {
        return format!("Instrument accuracy not included in U. For what is included: {meaning}");
    }
    meaning
}

/// The specific risk of a decision, as a sentence.
pub(super) fn risk(judged: &Judged) -> Option<String> {
    let (name, risk) = (judged.quantity.name.title(), words::percent(judged.risk?));
    let guard = judged.guard_band.filter(|guard| *guard > 0.0).map_or_else(String::new, |guard| {
        let unit = judged.quantity.unit();
        let (guard, _, unit) = with_decimals_of(guard, guard, unit);
        format!(", guard band {guard} {unit}")
    });
    let wrong = if side(judged).is_none() {
        "outside its limits although found inside"
    } else {
        "inside its limits although found outside"
    };
    Some(format!("Risk of the decision about the {name}{guard}: {risk} that it is {wrong}."))
}

/// A limit with its own prefix and no needless zeros: `6.12 V`.
fn plain(limit: f64, unit: Unit) -> String {
    let (_, _, symbol) = with_decimals_of(limit, 0.0, unit);
    format!("{} {symbol}", shortest(under_prefix_of(limit, limit, unit)))
}

/// Nine decimals hide the rounding of a division by a prefix; the zeros after them say nothing.
fn shortest(number: f64) -> String {
    let text = format!("{number:.9}");
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::{Contribution, Quantity};
    use crate::profile::QuantityName;
    use crate::units::Volts;

    fn judged(value: f64, min: Option<f64>, max: Option<f64>, decision: Decision) -> Judged {
        let quantity =
            Quantity::new(QuantityName::Hysteresis, value, vec![Contribution::normal("digit", 0.0013)]);
        let limit = Some(Limit { at: None, min, max });
        Judged { coverage_factor: 2.0, limit, decision: Some(decision), ..Judged::new(quantity, None) }
    }

    #[test]
    fn value_uncertainty_and_limits_share_a_prefix() {
        let line = judged(0.4008, Some(0.3), Some(1.5), Decision::Pass);
        assert_eq!(measured(&line), "400.8 ± 2.6 mV");
        assert_eq!(limits(&line).as_deref(), Some("300 to 1500 mV"));
        let line = judged(1.2, Some(0.3), Some(1.1005), Decision::Fail);
        assert_eq!(limits(&line).as_deref(), Some("0.3 to 1.1005 V"));
    }

    #[test]
    fn a_limit_on_one_side_says_which() {
        assert_eq!(limits(&judged(0.4, Some(0.3), None, Decision::Pass)).as_deref(), Some("at least 300 mV"));
        assert_eq!(limits(&judged(0.4, None, Some(0.5), Decision::Pass)).as_deref(), Some("at most 500 mV"));
        assert_eq!(limits(&judged(0.4, None, None, Decision::Pass)), None);
    }

    #[test]
    fn a_failure_says_on_which_side_it_is() {
        assert_eq!(decision(&judged(0.52, None, Some(0.5), Decision::Fail)), "FAIL: high");
        assert_eq!(
            decision(&judged(0.29, Some(0.3), None, Decision::ConditionalFail)),
            "CONDITIONAL FAIL: low"
        );
        assert_eq!(decision(&judged(0.31, Some(0.3), None, Decision::ConditionalPass)), "conditional pass");
        assert_eq!(
            complaint(&judged(0.52, None, Some(0.5), Decision::Fail)),
            "hysteresis 520.0 mV is above 500 mV"
        );
        assert_eq!(
            complaint(&judged(0.29, Some(0.3), None, Decision::Fail)),
            "hysteresis 290.0 mV is below 300 mV"
        );
    }

    #[test]
    fn a_limit_that_holds_at_one_voltage_says_so() {
        let mut line = judged(0.4, Some(0.3), None, Decision::Pass);
        line.limit = line.limit.map(|limit| Limit { at: Some(Volts(5.8)), ..limit });
        assert_eq!(title(&line), "hysteresis at 5.800 V");
    }
}
