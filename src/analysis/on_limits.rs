//! The resistance of the closed switch outside its limits: what fits, and what it costs the load.

use super::finding::{About, Finding, FindingCode};
use super::quantity::Quantity;
use crate::profile::{Profile, QuantityName};
use crate::units::{Amps, Ohms};

/// A finding where the on-resistance lies outside its limits.
pub(super) fn on_resistance(quantities: &[Quantity], profile: &Profile) -> Option<Finding> {
    let known = |name| quantities.iter().find(|quantity| quantity.name == name);
    let limit = profile.limits.get(&QuantityName::OnResistance)?;
    let value = known(QuantityName::OnResistance)?.value;
    let found = Ohms(value);
    if let Some(max) = limit.max.filter(|max| value > *max) {
        let current = known(QuantityName::OnCurrent).map(|current| Amps(current.value));
        let costs = current.map_or_else(String::new, |current| {
            let drop = current * found;
            format!(" At {current} it drops {drop} and heats the switch with {}.", drop * current)
        });
        return Some(Finding {
            code: FindingCode::OnResistanceHigh,
            about: About::Board,
            text: format!(
                "the on-resistance of {found} is {} above its limit of {}, {:.1} times.{costs} It fits a wrong or damaged \
                 switch, a gate driven too little at the trip, or a bad joint. Look first at the solder joints of the \
                 switch and at the clips, which count as the switch where they lie between pad and voltmeter; then at \
                 the marking of the switch and the voltage at its gate.",
                Ohms(value - max),
                Ohms(max),
                value / max
            ),
        });
    }
    let min = limit.min.filter(|min| value < *min)?;
    Some(Finding {
        code: FindingCode::OnResistanceLow,
        about: About::Board,
        text: format!(
            "the on-resistance of {found} is {} below its limit of {}: it fits another switch, or one bridged by solder. \
             Look first at whether both voltmeters are on the same side of the switch, then at its marking.",
            Ohms(min - value),
            Ohms(min)
        ),
    })
}

#[cfg(test)]
mod tests {
    use super::super::fixture::profile;
    use super::*;
    use crate::profile::Limit;

    fn told(ohms: f64) -> Option<(FindingCode, String)> {
        let mut profile = profile();
        let limit = Limit { at: None, min: Some(0.02), max: Some(0.1) };
        profile.limits.insert(QuantityName::OnResistance, limit);
        let quantities = [
            Quantity::new(QuantityName::OnResistance, ohms, Vec::new()),
            Quantity::new(QuantityName::OnCurrent, 0.1, Vec::new()),
        ];
        on_resistance(&quantities, &profile).map(|finding| (finding.code, finding.text))
    }

    /// Ohm's law: 100 mA through 150 mohm drop 15 mV and heat with 1.5 mW.
    #[test]
    fn a_worn_switch_is_named_with_what_it_costs() {
        assert_eq!(told(0.06), None);
        let (code, text) = told(0.15).expect("above");
        assert_eq!(code, FindingCode::OnResistanceHigh);
        for words in ["50.00 mΩ above its limit of 100.0 mΩ, 1.5 times", "drops 15.00 mV", "with 1.500 mW"]
        {
            assert!(text.contains(words), "{words}: {text}");
        }
    }

    #[test]
    fn a_bridged_switch_is_too_good() {
        let (code, text) = told(0.001).expect("below");
        assert_eq!(code, FindingCode::OnResistanceLow);
        assert!(text.contains("19.00 mΩ below its limit of 20.00 mΩ"), "{text}");
    }
}
