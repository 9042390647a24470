//! The thresholds as quantities, and the hysteresis between them.
//!
//! One instrument reads both thresholds, so what it errs in common cancels in their difference: the causes in the budgets
//! of the two see to it (correlated inputs, JCGM 100:2008, 5.2.2).

use super::accuracy;
use super::plateau::Course;
use super::quantity::{Quantity, Term};
use super::threshold::Threshold;
use crate::profile::QuantityName;

/// One threshold with the accuracy of the instrument that read it.
pub(super) fn threshold_quantity(course: &Course<'_>, name: QuantityName, threshold: &Threshold) -> Quantity {
    let mut lines = threshold.contributions.clone();
    lines.extend(accuracy::of_voltage(course, threshold.value));
    Quantity::new(name, threshold.value.0, lines)
}

/// Re-enable less trip.
pub(super) fn hysteresis(trip: &Quantity, re_enable: &Quantity) -> Quantity {
    let re_enable = Term { factor: 1.0, title: "re-enable", quantity: re_enable };
    let trip = Term { factor: -1.0, title: "trip", quantity: trip };
    Quantity::sum(QuantityName::Hysteresis, &[re_enable, trip])
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
    fn the_voltmeters_gain_counts_for_the_hysteresis_only_and_its_offset_cancels() {
        let claim = Accuracy { relative: 0.01, absolute: 0.002, resolution: 0.0 };
        let meter = |name, source| {
            let parts = quantity(name, claim).contributions;
            parts.iter().find(|part| part.source == source).expect("a claim").standard_uncertainty
        };
        // 1 % of 6 V and of 400 mV; the allowance for noise moves the thresholds by less than a millivolt.
        let near = |found: f64, half_width: f64| (found - half_width / 3.0_f64.sqrt()).abs() < 1e-5;
        assert!(near(meter(QuantityName::Trip, "voltmeter gain"), 0.06));
        assert!(near(meter(QuantityName::Hysteresis, "voltmeter gain"), 0.004));
        assert!((meter(QuantityName::Trip, "voltmeter offset") - 0.002 / 3.0_f64.sqrt()).abs() < 1e-9);
        assert!(meter(QuantityName::Hysteresis, "voltmeter offset") < 1e-15);
    }

    #[test]
    fn both_brackets_count_in_the_hysteresis() {
        let none = Accuracy { relative: 0.0, absolute: 0.0, resolution: 0.0 };
        let hysteresis = quantity(QuantityName::Hysteresis, none);
        assert!((hysteresis.value - 0.4).abs() < 1e-3, "noise may move it by less than a millivolt");
        // Two rectangles of 20 mV.
        assert!(
            (hysteresis.standard_uncertainty / (0.02 * (2.0 / 12.0_f64).sqrt()) - 1.0).abs() < 0.03,
            "{hysteresis:?}"
        );
    }
}
