//! Detect and release delay outside their limits: which part fits.
//!
//! Whether the value is far enough outside to fail is the verdict's to say; here the value alone decides.

use super::finding::{About, Finding, FindingCode};
use super::quantity::Quantity;
use crate::profile::{Limit, Profile, QuantityName};
use crate::units::{Unit, prefixed};

/// A release delay below this share of its lower limit is that of the detector alone: capacitors are off by 20 %, a delay
/// pin by another 30 % (common practice).
const WITHOUT: f64 = 0.2;

/// A finding for each delay outside its limits.
pub(super) fn delay_limits(quantities: &[Quantity], profile: &Profile) -> Vec<Finding> {
    let names = [QuantityName::DetectDelay, QuantityName::ReleaseDelay];
    let outside = names.into_iter().filter_map(|name| {
        let delay = quantities.iter().find(|quantity| quantity.name == name)?;
        one(delay, profile.limits.get(&name)?)
    });
    outside.collect()
}

fn one(delay: &Quantity, limit: &Limit) -> Option<Finding> {
    let value = delay.value;
    let above = limit.max.filter(|max| value > *max);
    let end = above.or(limit.min.filter(|min| value < *min))?;
    let (code, look) = match (delay.name, above.is_some()) {
        (QuantityName::DetectDelay, true) => (
            FindingCode::DetectDelayLong,
            "It fits a capacitor or a resistor too large in the filter before the detector, a slower detector, or a \
             switch whose gate empties slowly. Look first at the capacitor of that filter, then at the resistor at \
             the gate."
                .to_owned(),
        ),
        (QuantityName::DetectDelay, false) => (
            FindingCode::DetectDelayShort,
            "It fits a filter before the detector whose capacitor is missing or too small, so that a short dip of \
             the battery trips the board. Look first at that capacitor."
                .to_owned(),
        ),
        (_, true) => (
            FindingCode::ReleaseDelayLong,
            format!(
                "The delay goes with its capacitor, so it fits one of at least {:.1} times the value wanted. Look \
                 first at the marking of the delay capacitor, then for a leak at its pin.",
                value / end
            ),
        ),
        (_, false) if value < WITHOUT * end => (
            FindingCode::ReleaseDelayShort,
            "That is what a detector takes by itself: the delay capacitor is missing or not soldered. Look there \
             first."
                .to_owned(),
        ),
        (_, false) => (
            FindingCode::ReleaseDelayShort,
            format!(
                "The delay goes with its capacitor, so it fits one of at most {:.2} times the value wanted. Look \
                 first at the marking of the delay capacitor.",
                value / end
            ),
        ),
    };
    let text = |seconds: f64| prefixed(seconds, Unit::Second);
    let side = if above.is_some() { "above" } else { "below" };
    Some(Finding {
        code,
        about: About::Board,
        text: format!(
            "the {} of {} is {} {side} its limit of {}. {look}",
            delay.name.title(),
            text(value),
            text((value - end).abs()),
            text(end)
        ),
    })
}

#[cfg(test)]
mod tests {
    use super::super::fixture::profile;
    use super::*;

    fn told(name: QuantityName, seconds: f64, limit: Limit) -> Vec<(FindingCode, String)> {
        let mut profile = profile();
        profile.limits.insert(name, limit);
        let delay = Quantity::new(name, seconds, Vec::new());
        delay_limits(&[delay], &profile).into_iter().map(|finding| (finding.code, finding.text)).collect()
    }

    const RELEASE: Limit = Limit { at: None, min: Some(85e-3), max: Some(150e-3) };

    #[test]
    fn a_delay_inside_its_limits_is_not_told() {
        assert_eq!(told(QuantityName::ReleaseDelay, 110e-3, RELEASE), []);
        assert_eq!(told(QuantityName::DetectDelay, 4e-3, Limit { max: Some(5e-3), ..Limit::default() }), []);
    }

    /// Data sheets give the delay in proportion to the capacitor (common practice): a tenth of it makes 11 ms of 110 ms.
    #[test]
    fn a_short_release_names_a_missing_capacitor_or_one_too_small() {
        let none = told(QuantityName::ReleaseDelay, 0.3e-3, RELEASE);
        assert_eq!(none[0].0, FindingCode::ReleaseDelayShort);
        assert!(none[0].1.contains("84.70 ms below its limit of 85.00 ms"), "{}", none[0].1);
        assert!(none[0].1.contains("missing or not soldered"), "{}", none[0].1);
        let small = told(QuantityName::ReleaseDelay, 51e-3, RELEASE);
        assert!(small[0].1.contains("at most 0.60 times"), "{}", small[0].1);
    }

    #[test]
    fn a_long_delay_names_filter_or_capacitor() {
        let release = told(QuantityName::ReleaseDelay, 0.3, RELEASE);
        assert_eq!(release[0].0, FindingCode::ReleaseDelayLong);
        assert!(release[0].1.contains("at least 2.0 times"), "{}", release[0].1);
        let limit = Limit { at: None, min: Some(1e-3), max: Some(5e-3) };
        let long = told(QuantityName::DetectDelay, 60e-3, limit);
        assert_eq!(long[0].0, FindingCode::DetectDelayLong);
        assert!(long[0].1.contains("filter before the detector"), "{}", long[0].1);
        assert_eq!(told(QuantityName::DetectDelay, 0.1e-3, limit)[0].0, FindingCode::DetectDelayShort);
    }
}
