//! The thresholds as quantities, and the hysteresis between them.
//!
//! One voltmeter reads both thresholds, so what it errs in common cancels in their difference: of its claim only what
//! applies to a voltage as small as the hysteresis is counted there (correlated inputs, JCGM 100:2008, 5.2.2).

use super::plateau::Course;
use super::quantity::{Contribution, Quantity};
use super::threshold::Threshold;
use crate::profile::QuantityName;
use crate::trace::Accuracy;

/// One threshold with the claim of the instrument that read it.
pub(super) fn threshold_quantity(course: &Course<'_>, name: QuantityName, threshold: &Threshold) -> Quantity {
    let mut parts = threshold.contributions.clone();
    if let Some((source, accuracy)) = voltage_claim(course) {
        parts.push(Contribution::normal(source, accuracy.standard_uncertainty(threshold.value.0)));
    }
    Quantity::new(name, threshold.value.0, parts)
}

/// Re-enable less trip.
pub(super) fn hysteresis(course: &Course<'_>, trip: &Threshold, re_enable: &Threshold) -> Quantity {
    let value = (re_enable.value - trip.value).0;
    let mut parts = Vec::new();
    for (name, threshold) in [("trip", trip), ("re-enable", re_enable)] {
        parts.extend(threshold.contributions.iter().map(|part| {
            Contribution::normal(&format!("{name}: {}", part.source), part.standard_uncertainty)
        }));
    }
    if trip.smear.is_some() && re_enable.smear.is_some() {
        // A delay longer than the steps moves both edges outwards together, so their brackets add up in full:
        // (a + b)^2 = a^2 + b^2 + 2ab.
        let shared = (2.0 * trip.bracket_uncertainty() * re_enable.bracket_uncertainty()).sqrt();
        parts.push(Contribution::normal("delay common to both edges", shared));
    }
    if let Some((source, accuracy)) = voltage_claim(course) {
        parts.push(Contribution::normal(source, accuracy.standard_uncertainty(value)));
    }
    Quantity::new(QuantityName::Hysteresis, value, parts)
}

/// The claim that stands behind the voltages, and whose it is.
pub(super) fn voltage_claim<'c>(course: &'c Course<'_>) -> Option<(&'static str, &'c Accuracy)> {
    let claims = &course.trace.claims;
    if course.has_voltmeter() {
        claims.sense.as_ref().map(|accuracy| ("voltmeter", accuracy))
    } else {
        claims.set.as_ref().map(|accuracy| ("set-point of the supply", accuracy))
    }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use crate::analysis::{Quantity, analyse};
    use crate::profile::QuantityName;
    use crate::trace::Accuracy;

    fn quantity(name: QuantityName, claim: Accuracy) -> Quantity {
        let mut trace = staircase(&[on(7.6), on(6.01), off(5.99), off(5.2), off(6.39), on(6.41), on(7.6)]);
        trace.claims.sense = Some(claim);
        let analysis = analyse(&trace, &profile());
        analysis.quantities.into_iter().find(|quantity| quantity.name == name).expect("found")
    }

    #[test]
    fn the_voltmeters_gain_counts_for_the_hysteresis_only_and_not_for_its_ends() {
        let claim = Accuracy { relative: 0.01, absolute: 0.0, resolution: 0.0 };
        let meter = |name| {
            let parts = quantity(name, claim).contributions;
            parts.iter().find(|part| part.source == "voltmeter").expect("a claim").standard_uncertainty
        };
        assert!((meter(QuantityName::Trip) - 0.06 / 3.0_f64.sqrt()).abs() < 1e-9);
        assert!((meter(QuantityName::Hysteresis) - 0.004 / 3.0_f64.sqrt()).abs() < 1e-9);
    }

    #[test]
    fn both_brackets_count_in_the_hysteresis() {
        let none = Accuracy { relative: 0.0, absolute: 0.0, resolution: 0.0 };
        let hysteresis = quantity(QuantityName::Hysteresis, none);
        assert!((hysteresis.value - 0.4).abs() < 1e-9);
        // Two rectangles of 20 mV.
        assert!(
            (hysteresis.standard_uncertainty - 0.02 * (2.0 / 12.0_f64).sqrt()).abs() < 1e-6,
            "{hysteresis:?}"
        );
    }
}
