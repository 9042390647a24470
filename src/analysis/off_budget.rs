//! The off current's line held against the design's off-state budget: which path draws too much, or too little.
//!
//! Two boards may draw the same at one voltage, one through a resistor a decade too small and one through a leaking
//! switch; slope and constant part tell them apart.

use super::finding::{About, Finding, FindingCode};
use super::off_fit::OffFit;
use super::residuals::Shape;
use crate::profile::{Conducts, Draws, OffBudget, OffPath, Profile};
use crate::units::{Amps, Ohms, Siemens, prefixed};

/// What is missing or too much fits a cause when it agrees with it to this share.
const FITS: f64 = 0.15;
/// A resistance beside the design's from here on may be dirt.
const DIRT: Ohms = Ohms(300e3);

/// What does not fit; nothing where the profile gives no budget, save a line that is not one.
pub(super) fn off_budget(fit: &OffFit, profile: &Profile) -> Vec<Finding> {
    if let Some(bend) = bend(fit) {
        return vec![bend];
    }
    let Some(budget) = profile.off_budget() else { return Vec::new() };
    resistive(fit, &budget, profile).into_iter().chain(constant(fit, &budget, profile)).collect()
}

/// A current that does not go with the voltage in a straight line.
fn bend(fit: &OffFit) -> Option<Finding> {
    let (low, high) = fit.span;
    let shape = match fit.shape {
        Shape::Straight => return None,
        Shape::BendsUp => {
            "grows faster the higher the voltage, as through a diode: look first for an indicator LED, a protection part and \
             a leaky gate"
        }
        Shape::BendsDown => {
            "grows ever more slowly with the voltage, as through a part that limits it or a capacitor that still charges: \
             look first at the input capacitor, and dwell longer"
        }
        Shape::Scattered => {
            "does not follow one line within its noise: look first for contacts, for a capacitor that still charges, and \
             for a path that comes and goes"
        }
    };
    Some(Finding {
        code: FindingCode::OffCurrentBends,
        about: About::Board,
        text: format!(
            "from {low} to {high} the off current {shape}. Conductance and constant part are rough."
        ),
    })
}

fn resistive(fit: &OffFit, budget: &OffBudget, profile: &Profile) -> Option<Finding> {
    let slope = fit.conductance.value;
    let expanded = fit.conductance.expanded_uncertainty(profile.decision.coverage);
    let allowed = budget.conductance;
    let beyond = Beyond::of(slope, expanded, (allowed.least.0, allowed.most.0))?;
    let excess = slope - allowed.nominal.0;
    let change = |siemens: f64| per_volt(Siemens(siemens));
    let cause = decade(excess, &profile.off_paths);
    let text = match beyond {
        Beyond::High => {
            let beside = Ohms(1.0 / excess);
            let found = if beside > DIRT { "flux residue or dirt" } else { "a wrong part" };
            let first = match cause {
                Some(cause) => format!("Look first at the {cause} Otherwise for"),
                None => format!("Look first at the {}, and for", resistors(&profile.off_paths)),
            };
            format!(
                "the off current changes by {}, the budget allows {}: {} in all, or {beside} beside the design's paths. {first} {found} \
                 across the switch or the fixture.",
                change(slope),
                change(allowed.most.0),
                Ohms(1.0 / slope),
            )
        }
        Beyond::Low => format!(
            "the off current changes by {}, the budget wants at least {}. Look first at the {}",
            change(slope),
            change(allowed.least.0),
            cause.unwrap_or_else(|| format!("{}: too large or open?", resistors(&profile.off_paths)))
        ),
    };
    Some(Finding { code: FindingCode::OffPathResistive, about: About::Board, text })
}

fn constant(fit: &OffFit, budget: &OffBudget, profile: &Profile) -> Option<Finding> {
    let (value, expanded) =
        (fit.constant.value, fit.constant.expanded_uncertainty(profile.decision.coverage));
    let allowed = budget.current;
    let (least, most) = (allowed.least, allowed.most);
    let value_text = Amps(value);
    let text = match Beyond::of(value, expanded, (least.0, most.0))? {
        Beyond::High => format!(
            "{value_text} of the off current do not depend on the voltage, the budget allows {most}: leakage through the switch, a \
             protection part or a capacitor. Lift the load: if it vanishes, it flows through the switch."
        ),
        Beyond::Low => format!(
            "{value_text} of the off current do not depend on the voltage, the budget wants at least {least}: a part draws too \
             little. Look first at the detector: the right one, and powered?"
        ),
    };
    Some(Finding { code: FindingCode::OffPathConstant, about: About::Board, text })
}

enum Beyond {
    High,
    Low,
}

impl Beyond {
    /// On which side of the budget a value lies by more than its uncertainty.
    fn of(value: f64, expanded: f64, (least, most): (f64, f64)) -> Option<Self> {
        if value - expanded > most {
            Some(Self::High)
        } else if value + expanded < least {
            Some(Self::Low)
        } else {
            None
        }
    }
}

/// The resistor that explains a conductance too large or too small by being a decade off, or open: in words.
fn decade(excess: f64, paths: &[OffPath]) -> Option<String> {
    let fits = |wanted: f64| (excess / wanted - 1.0).abs() <= FITS;
    paths.iter().filter(|path| path.conducts != Conducts::On).find_map(|path| {
        let Draws::Resistance(ohms) = path.draws else { return None };
        let (conductance, name) = (1.0 / ohms.0, &path.name);
        if fits(9.0 * conductance) {
            Some(format!("{name}: {} in place of {ohms}, a decade low?", ohms / 10.0))
        } else if fits(-conductance) || fits(-0.9 * conductance) {
            Some(format!("{name} of {ohms}: open, or a decade high?"))
        } else {
            None
        }
    })
}

fn resistors(paths: &[OffPath]) -> String {
    let off = paths.iter().filter(|path| path.conducts != Conducts::On);
    let names: Vec<&str> = off
        .filter(|path| matches!(path.draws, Draws::Resistance(_)))
        .map(|path| path.name.as_str())
        .collect();
    if names.is_empty() { "resistors".to_owned() } else { names.join(" and the ") }
}

fn per_volt(conductance: Siemens) -> String {
    format!("{}/V", prefixed(conductance.0, crate::units::Unit::Ampere))
}

#[cfg(test)]
mod tests {
    use super::super::quantity::Quantity;
    use super::*;
    use crate::profile::QuantityName;
    use crate::units::Volts;

    /// A one-cell board: 1 Mohm 5 % of pull-up, 1.05 uA 30 % of detector.
    fn profile() -> Profile {
        let mut profile = super::super::fixture::profile();
        let path = |name: &str, draws, tolerance| OffPath {
            name: name.into(),
            draws,
            tolerance,
            conducts: Conducts::Off,
        };
        profile.off_paths = vec![
            path("pull-up", Draws::Resistance(Ohms(1e6)), 0.05),
            path("detector", Draws::Current(Amps(1.05e-6)), 0.3),
        ];
        profile
    }

    fn told(conductance: f64, constant: f64, shape: Shape) -> Vec<(FindingCode, String)> {
        let quantity = |name, value, standard_uncertainty| Quantity {
            name,
            value,
            standard_uncertainty,
            contributions: Vec::new(),
        };
        let fit = OffFit {
            conductance: quantity(QuantityName::OffConductance, conductance, 15e-9),
            constant: quantity(QuantityName::OffConstantCurrent, constant, 30e-9),
            shape,
            span: (Volts(1.0), Volts(2.8)),
        };
        off_budget(&fit, &profile()).into_iter().map(|finding| (finding.code, finding.text)).collect()
    }

    fn only(conductance: f64, constant: f64, code: FindingCode, words: &[&str]) {
        let told = told(conductance, constant, Shape::Straight);
        assert!(matches!(&told[..], [(found, _)] if *found == code), "{told:?}");
        assert!(words.iter().all(|word| told[0].1.contains(word)), "{words:?} in {}", told[0].1);
    }

    #[test]
    fn a_good_board_fits_its_budget() {
        assert_eq!(told(1.0e-6, 1.05e-6, Shape::Straight), []);
        assert_eq!(told(1.06e-6, 1.39e-6, Shape::Straight), [], "in doubt it fits");
    }

    /// 100 kohm and 40 uA draw nearly alike at 2.8 V: 29 uA and 44 uA. Ohm's law for the slopes.
    #[test]
    fn a_pull_up_a_decade_low_and_a_leaking_switch_are_told_apart() {
        only(
            10e-6,
            1.05e-6,
            FindingCode::OffPathResistive,
            &["10.00 µA/V", "100.0 kΩ in all", "pull-up: 100.0 kΩ in place of 1.000 MΩ, a decade low?"],
        );
        only(1.0e-6, 41.05e-6, FindingCode::OffPathConstant, &["41.05 µA", "Lift the load"]);
    }

    /// 2 Mohm of flux residue across the switch: 0.5 uA/V more.
    #[test]
    fn a_film_of_flux_is_a_resistance_beside_the_designs() {
        only(1.5e-6, 1.05e-6, FindingCode::OffPathResistive, &["2.000 MΩ beside", "flux residue"]);
    }

    #[test]
    fn too_little_is_told_as_well() {
        only(
            0.1e-6,
            1.05e-6,
            FindingCode::OffPathResistive,
            &["pull-up of 1.000 MΩ: open, or a decade high"],
        );
        only(0.5e-6, 1.05e-6, FindingCode::OffPathResistive, &["pull-up: too large or open"]);
        only(1.0e-6, 0.05e-6, FindingCode::OffPathConstant, &["detector"]);
    }

    #[test]
    fn of_a_line_that_bends_nothing_else_is_said() {
        let told = told(10e-6, 41e-6, Shape::BendsUp);
        assert!(
            matches!(&told[..], [(FindingCode::OffCurrentBends, text)] if text.contains("LED")),
            "{told:?}"
        );
    }
}
