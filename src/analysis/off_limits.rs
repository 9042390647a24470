//! The off current against its limits: whether the range could tell, and which path a wrong current takes.

use super::finding::{About, Finding, FindingCode};
use super::off_current::point;
use super::quantity::Quantity;
use super::settled::Settled;
use crate::profile::Limit;
use crate::statistics::line::Line;
use crate::units::{Amps, Ohms, Volts};

/// The expanded uncertainty may fill this share of the limits' width: with more, their middle third is all that is certain.
const ADEQUATE: f64 = 1.0 / 3.0;
/// A range that hides the limits fails no board by the one error in twenty that U leaves out: the claims of an ammeter at
/// their worst are a fifth more than U of 95 %.
const CERTAINLY: f64 = 1.5;
/// The voltages must lie apart by this share before the path is guessed from them.
const APART: f64 = 0.02;

/// False when the `expanded` uncertainty hides the limits, unless the value lies outside them all the same.
pub(super) fn adequate(quantity: &Quantity, expanded: f64, limit: &Limit) -> bool {
    let width = match (limit.min, limit.max) {
        (Some(min), Some(max)) => max - min,
        (Some(only), None) | (None, Some(only)) => only.abs(),
        (None, None) => return true,
    };
    let farthest = CERTAINLY * expanded;
    expanded <= ADEQUATE * width
        || limit.max.is_some_and(|max| quantity.value - farthest > max)
        || limit.min.is_some_and(|min| quantity.value + farthest < min)
}

/// The range hides the limits.
pub(super) fn coarse_finding(quantity: &Quantity, expanded: f64, range: Option<Amps>) -> Finding {
    let range = range.map_or_else(|| "its range".to_owned(), |range| format!("the {range} range"));
    let expanded = Amps(expanded);
    Finding {
        code: FindingCode::RangeNotAdequate,
        about: About::Bench,
        text: format!(
            "on {range} the ammeter sees the off current only to ± {expanded}, too coarse for its limits (reading {}). \
             Use a smaller range or another meter.",
            Amps(quantity.value)
        ),
    }
}

/// Outside the limits: says so, with a hint at the path the current takes, from `readings`; `None` where the path has been
/// told already.
pub(super) fn outside_finding(
    quantity: &Quantity,
    limit: &Limit,
    at: Volts,
    readings: Option<&Vec<Settled>>,
) -> Option<Finding> {
    let value = Amps(quantity.value);
    let (code, text) = if let Some(max) = limit.max.filter(|max| quantity.value > *max) {
        let text = format!("off current {value} at {at}, limit {}", Amps(max));
        let hint = readings.map(|readings| path(readings, at));
        (FindingCode::OffCurrentHigh, hint.map_or(text.clone(), |hint| format!("{text}; {hint}")))
    } else {
        let min = limit.min.filter(|min| quantity.value < *min)?;
        let text = format!("off current {value} at {at}, at least {} wanted", Amps(min));
        let hint = "look first at the pull-up (open or too large) and at the ammeter's fuse";
        (FindingCode::OffCurrentLow, if readings.is_some() { format!("{text}; {hint}") } else { text })
    };
    Some(Finding { code, about: About::Board, text: format!("{text}.") })
}

/// Whether the current goes with the voltage, as through a resistance, or stays, as through a semiconductor.
fn path(readings: &[Settled], at: Volts) -> String {
    let widest = readings.iter().map(|settled| (settled.volts - at).abs().0).fold(0.0, f64::max);
    let fitted = (widest >= APART * at.0).then(|| Line::fit(readings.iter().map(point))).flatten();
    let Some(line) = fitted else {
        return "measured at one voltage only, so the path is not known: look first at pull-up and switch"
            .to_owned();
    };
    let share = line.slope * at.0 / line.at(at.0);
    if share > 0.5 {
        let resistance = Ohms(1.0 / line.slope);
        format!(
            "it follows the voltage, as through about {resistance}: look first for a pull-up of the wrong value, a leaking \
             switch or flux between them"
        )
    } else {
        "it hardly follows the voltage, as through a semiconductor: look first at the switch, the detector and \
         protection parts"
            .to_owned()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::profile::QuantityName;

    const AT: Volts = Volts(5.8);
    const LIMIT: Limit = Limit { at: Some(AT), min: Some(1e-6), max: Some(4e-6) };

    fn quantity(value: f64, standard_uncertainty: f64) -> Quantity {
        Quantity { name: QuantityName::OffCurrent, value, standard_uncertainty, contributions: Vec::new() }
    }

    fn hint(currents: &[(f64, f64)]) -> String {
        let settled = |&(volts, amps): &(f64, f64)| Settled {
            volts: Volts(volts),
            amps: Amps(amps),
            range: None,
            count: 1,
            squares: 0.0,
        };
        let readings: Vec<Settled> = currents.iter().map(settled).collect();
        outside_finding(&quantity(29e-6, 1e-8), &LIMIT, AT, Some(&readings)).expect("outside").text
    }

    #[test]
    fn a_resistive_path_is_told_from_a_leaking_semiconductor() {
        assert!(hint(&[(5.2, 26e-6), (5.8, 29e-6)]).contains("through about 200.0 kΩ"));
        assert!(hint(&[(5.2, 28.9e-6), (5.8, 29e-6)]).contains("semiconductor"));
        assert!(hint(&[(5.8, 29e-6)]).contains("one voltage only"));
    }

    #[test]
    fn inside_the_limits_nothing_is_said_and_below_them_the_pull_up_is_named() {
        assert_eq!(outside_finding(&quantity(2.5e-6, 1e-8), &LIMIT, AT, None), None);
        let low = outside_finding(&quantity(0.5e-6, 1e-8), &LIMIT, AT, Some(&Vec::new())).expect("below");
        assert_eq!(low.code, FindingCode::OffCurrentLow);
        assert!(low.text.contains("pull-up"));
    }

    #[test]
    fn a_range_is_adequate_when_the_limits_show_through_its_uncertainty() {
        assert!(adequate(&quantity(2.5e-6, 0.3e-6), 0.6e-6, &LIMIT));
        assert!(!adequate(&quantity(2.5e-6, 0.8e-6), 1.6e-6, &LIMIT));
        assert!(adequate(&quantity(9e-6, 0.8e-6), 1.6e-6, &LIMIT));
        assert!(adequate(&quantity(9e-6, 1.0), 2.0, &Limit::default()));
    }
}
