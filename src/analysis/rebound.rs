//! Whether the battery's rise after the cut-off switches the board on again.
//!
//! The margin is worked out from the hysteresis, whose two thresholds were read by one voltmeter, and not from the
//! re-enable voltage and the trip apart: what the voltmeter errs in common has cancelled there. Resistance and recovery
//! are the profile's: with a tolerance of theirs they count as rectangles, without one as exact, as the most the design
//! allows for. Where the rise was tried out, a board that came back is told with the moment and the voltage.

use super::edges::{Direction, Edges};
use super::finding::{About, Finding, FindingCode};
use super::plateau::Course;
use super::quantity::{Contribution, Quantity, Term};
use super::threshold::Threshold;
use crate::profile::{QuantityName, Rebound};
use crate::trace::SwitchState;
use crate::units::{Amps, Unit, Volts, prefixed};

/// A set-point this much beside trip and rise, and beside what the trip's bracket leaves open, still counts as the rise.
const NEAR: Volts = Volts(5e-3);

/// Re-enable less what the terminals rise to: `hysteresis - on current x resistance - recovery`.
pub(super) fn rebound_margin(hysteresis: &Quantity, on_current: &Quantity, rebound: &Rebound) -> Quantity {
    let band = Term { factor: 1.0, title: "hysteresis", quantity: hysteresis };
    let rise = Term { factor: -rebound.resistance.0, title: "on current", quantity: on_current };
    let mut parts = Quantity::sum(QuantityName::ReboundMargin, &[band, rise]).contributions;
    if rebound.tolerance > 0.0 {
        parts.extend(as_stated(Amps(on_current.value), rebound));
    }
    let value = hysteresis.value - rebound.rise(Amps(on_current.value)).0;
    Quantity::new(QuantityName::ReboundMargin, value, parts)
}

/// The profile's own figures: of each ohm the margin loses the on current, of each volt of recovery a volt.
fn as_stated(on_current: Amps, rebound: &Rebound) -> [Contribution; 2] {
    let (resistance, recovery) = (rebound.resistance.0, rebound.recovery.0);
    [
        Contribution::rectangular("resistance of the pack, as stated", rebound.tolerance * resistance)
            .through(-on_current.0, Unit::Ohm)
            .estimated(resistance),
        Contribution::rectangular("recovery of the pack, as stated", rebound.tolerance * recovery)
            .through(-1.0, Unit::Volt)
            .estimated(recovery),
    ]
}

/// What a margin below zero means.
pub(super) fn negative_margin(
    margin: &Quantity,
    on_current: &Quantity,
    rebound: &Rebound,
) -> Option<Finding> {
    let rise = rebound.rise(Amps(on_current.value));
    (margin.value < 0.0).then(|| {
        board(
            FindingCode::Rebound,
            format!(
                "once the load is gone the battery rises by {rise}, {} more than the hysteresis: the board restarts by itself, \
                 trips again, and goes on until the battery is empty. Look first at the hysteresis parts; widen the \
                 hysteresis or latch the cut-off.",
                Volts(-margin.value)
            ),
        )
    })
}

/// A board that came back when it was lifted by the battery's rise right after a trip. Only where the profile asks for the
/// trial: other steps that lead up from a trip are no rise of a battery.
pub(super) fn restart(
    course: &Course<'_>,
    found: &Edges,
    trip: &Threshold,
    on_current: &Quantity,
    rebound: &Rebound,
) -> Option<Finding> {
    let hold = rebound.hold?;
    let risen = trip.value + rebound.rise(Amps(on_current.value));
    let risen = risen.min(course.profile.supply.maximum);
    let near = NEAR + Volts(12.0_f64.sqrt() * trip.bracket_uncertainty());
    let lifted = found.edges.iter().filter(|edge| edge.direction == Direction::Down).filter_map(|edge| {
        let (before, after) = (&course.plateaus[edge.plateau], course.plateaus.get(edge.plateau + 1)?);
        (after.set > before.set && (after.set - risen).abs() <= near).then_some(after)
    });
    lifted.into_iter().find_map(|plateau| {
        let on = plateau.samples.clone().find(|at| course.states[*at] == SwitchState::On)?;
        let after = course.trace.samples[on].at.saturating_sub(plateau.began);
        let hold = prefixed(hold.as_secs_f64(), Unit::Second);
        Some(board(
            FindingCode::RestartsAfterRebound,
            format!(
                "lifted to {} after its trip, as its battery would rise, the board was on again within {}; it must stay off for {hold}. It restarts by itself \
                 until the battery is empty. Look first at the hysteresis parts.",
                plateau.set,
                prefixed(after.as_secs_f64(), Unit::Second)
            ),
        ))
    })
}

fn board(code: FindingCode, text: String) -> Finding {
    Finding { code, about: About::Board, text }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::analysis::{Analysis, analyse};
    use crate::profile::{Pack, Profile};
    use crate::trace::{Accuracy, Trace};
    use crate::units::Ohms;
    use std::time::Duration;

    /// Trip between 5.99 V and 6.01 V, re-enable between 6.39 V and 6.41 V: hysteresis 0.4 V.
    fn trace(lifted: &[(f64, f64)]) -> Trace {
        let cycle =
            [on(7.6), on(6.01), off(5.99), off(5.2), off(6.39), on(6.41), on(7.6), on(6.01), off(5.9)];
        staircase(&[&cycle[..], lifted].concat())
    }

    fn with(recovery: f64) -> Profile {
        let rebound = Rebound {
            resistance: Ohms(0.15),
            recovery: Volts(recovery),
            tolerance: 0.0,
            hold: Some(Duration::from_secs(2)),
        };
        Profile { pack: Pack { rebound: Some(rebound), storage: None }, ..profile() }
    }

    fn margin(analysis: &Analysis) -> &Quantity {
        let margin = |quantity: &&Quantity| quantity.name == QuantityName::ReboundMargin;
        analysis.quantities.iter().find(margin).expect("a margin")
    }

    fn codes(analysis: &Analysis) -> Vec<FindingCode> {
        let ours = [FindingCode::Rebound, FindingCode::RestartsAfterRebound];
        analysis.findings.iter().map(|finding| finding.code).filter(|code| ours.contains(code)).collect()
    }

    /// 0.4 V less 109.3 mA x 150 mohm less 0.2 V: 183.6 mV, by hand.
    #[test]
    fn the_margin_is_what_the_hysteresis_leaves_of_the_rise() {
        let analysis = analyse(&trace(&[]), &with(0.2));
        // The allowance for noise widens the hysteresis by less than a millivolt.
        assert!((margin(&analysis).value - (0.4 - 6.01 / 55.0 * 0.15 - 0.2)).abs() < 1e-3);
        assert_eq!(codes(&analysis), []);
    }

    /// By hand: 0.4 V less 0.1 A x 150 mohm less 0.2 V leave 185 mV. 30 % of 150 mohm are 45 mohm, over sqrt 3 25.981 mohm,
    /// times 0.1 A 2.5981 mV; 30 % of 0.2 V are 60 mV, over sqrt 3 34.641 mV; with 1 mV of the hysteresis and 2 mA of the
    /// on current times 150 mohm, 0.3 mV: together 34.754 mV.
    #[test]
    fn a_tolerance_of_resistance_and_recovery_counts_as_two_rectangles() {
        let quantity =
            |name, value, spread| Quantity::new(name, value, vec![Contribution::normal("by itself", spread)]);
        let hysteresis = quantity(QuantityName::Hysteresis, 0.4, 1e-3);
        let on_current = quantity(QuantityName::OnCurrent, 0.1, 2e-3);
        let exact = with(0.2).pack.rebound.expect("a rebound");
        let margin = rebound_margin(&hysteresis, &on_current, &Rebound { tolerance: 0.3, ..exact });
        assert!((margin.value - 0.185).abs() < 1e-12, "{margin:?}");
        let line = |word: &str| {
            margin.contributions.iter().find(|line| line.source.starts_with(word)).expect("a line")
        };
        for (word, sensitivity, spread, contribution) in
            [("resistance", -0.1, 25.981e-3, 2.5981e-3), ("recovery", -1.0, 34.641e-3, 34.641e-3)]
        {
            let line = line(word);
            assert!((line.sensitivity() - sensitivity).abs() < 1e-12, "{line:?}");
            assert!((line.input_uncertainty() - spread).abs() < 1e-6, "{line:?}");
            assert!((line.standard_uncertainty - contribution).abs() < 1e-6, "{line:?}");
        }
        assert!((margin.standard_uncertainty - 34.754e-3).abs() < 1e-6, "{margin:?}");

        let margin = rebound_margin(&hysteresis, &on_current, &exact);
        assert_eq!(margin.contributions.len(), 2, "exact figures have no line: {margin:?}");
        assert!((margin.standard_uncertainty - 1.0440e-3).abs() < 1e-7, "1 mV and 0.3 mV: {margin:?}");
    }

    /// A voltmeter off by 1 % moves both thresholds by 60 mV and the margin by 4 mV.
    #[test]
    fn what_the_voltmeter_errs_in_common_stays_cancelled() {
        let mut trace = trace(&[]);
        trace.claims.sense = Some(Accuracy { relative: 0.01, absolute: 0.0, resolution: 0.0 });
        let analysis = analyse(&trace, &with(0.2));
        let hysteresis = |quantity: &&Quantity| quantity.name == QuantityName::Hysteresis;
        let hysteresis = analysis.quantities.iter().find(hysteresis).expect("a hysteresis");
        // 0.1 V between reading and trip at 55 ohm through 150 mohm leave a microvolt.
        assert!((margin(&analysis).standard_uncertainty - hysteresis.standard_uncertainty).abs() < 1e-6);
    }

    #[test]
    fn a_rise_beyond_the_hysteresis_is_told() {
        let analysis = analyse(&trace(&[]), &with(0.45));
        assert!(margin(&analysis).value < 0.0);
        assert_eq!(codes(&analysis), [FindingCode::Rebound]);
        let text = &analysis.findings.iter().find(|f| f.code == FindingCode::Rebound).expect("told").text;
        // The allowance for noise is part of how much more it is: 66.4 mV by hand without it.
        let more = -margin(&analysis).value;
        assert!((more - 66.4e-3).abs() < 1e-3, "{more}");
        let more = prefixed(more, Unit::Volt);
        assert!(text.contains("466.4 mV") && text.contains(&format!("{more} more")), "{text}");
    }

    #[test]
    fn a_board_that_came_back_when_lifted_is_told_with_moment_and_voltage() {
        let lifted = [off(6.46), off(6.46), on(6.46), on(6.46)];
        let analysis = analyse(&trace(&lifted), &with(0.45));
        assert_eq!(codes(&analysis), [FindingCode::RestartsAfterRebound], "the calculation is in it");
        let finding = |code| analysis.findings.iter().find(|f| f.code == code).expect("told");
        let text = &finding(FindingCode::RestartsAfterRebound).text;
        assert!(text.contains("6.460 V") && text.contains("300.0 ms") && text.contains("2.000 s"), "{text}");
    }

    #[test]
    fn a_way_up_beyond_the_rise_is_no_trial() {
        let analysis = analyse(&trace(&[off(6.2), off(6.2), off(6.39), on(6.41)]), &with(0.2));
        assert_eq!(codes(&analysis), []);
    }
}
