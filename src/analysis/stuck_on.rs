//! A board that never trips: a shorted switch conducts at any voltage, one whose gate is not pulled off needs the
//! gate's.

use super::diagnosis::{board, last_sample};
use super::finding::{Finding, FindingCode};
use super::plateau::{Course, Plateau, REACHED};
use crate::trace::{Sample, SwitchState};
use crate::units::Volts;

/// A board that is still on at the end of the ramp; `None` for one that is not, or was not brought there.
pub(super) fn never_trips(course: &Course<'_>) -> Option<Finding> {
    let floor = course.profile.supply.floor;
    let lowest = lowest_on(course).filter(|plateau| plateau.set <= floor * (1.0 + REACHED))?;
    let sample = last_sample(course, lowest);
    let at = course.terminals(sample);
    let load = course.profile.load.resistance;
    let current = sample.current.amps().map_or_else(|| "an overload".to_owned(), |amps| amps.to_string());
    let seen = format!(
        "the board is still on at {at}, the end of the ramp: {current} flows, the load alone draws {}.",
        at / load
    );
    Some(match Gate::of(course) {
        Some(Gate { dead: Some(dead), alive }) => board(
            FindingCode::DetectorStuckOn,
            format!(
                "{seen} But at {dead}, where the load would draw {}, next to nothing flows, and from {alive} \
                 on its current does: the switch is whole and opens where its gate has too little, so nothing \
                 pulls the gate off. Look first at the detector's output: stuck, not soldered, or bridged to \
                 the gate's supply.",
                dead / load
            ),
        ),
        Some(Gate { dead: None, alive }) => board(
            FindingCode::NeverTrips,
            format!(
                "{seen} It conducts at {alive}, too, where no gate turns a switch on: look first for a \
                 shorted switch or a bridge across it."
            ),
        ),
        None => board(
            FindingCode::NeverTrips,
            format!(
                "{seen} Look first for a shorted switch, then at its gate drive and the detector's part number."
            ),
        ),
    })
}

/// Whether a switch that is always on is so without a gate's voltage.
struct Gate {
    /// The highest voltage at which nothing flowed, where there was one.
    dead: Option<Volts>,
    /// The lowest at which the load's current did.
    alive: Volts,
}

impl Gate {
    /// From readings below any detector's and most gates' working voltage, as in a pre-check; `None` where there
    /// are none.
    fn of(course: &Course<'_>) -> Option<Self> {
        let samples = || {
            let all = course.trace.samples.iter().zip(&course.states);
            all.filter(|(sample, _)| sample.set > Volts::ZERO).map(|(sample, state)| (sample, *state))
        };
        let alive = samples()
            .filter(|(_, state)| *state == SwitchState::On)
            .map(|(sample, _)| course.terminals(sample))
            .min_by(|a, b| a.0.total_cmp(&b.0))?;
        let dead = samples()
            .filter(|(sample, state)| *state == SwitchState::Off && course.terminals(sample) < alive)
            .filter(|(sample, _)| would_show(course, sample))
            .map(|(sample, _)| course.terminals(sample))
            .max_by(|a, b| a.0.total_cmp(&b.0));
        (dead.is_some() || alive <= NO_GATE).then_some(Self { dead, alive })
    }
}

/// True where the load's current would be told from none.
fn would_show(course: &Course<'_>, sample: &Sample) -> bool {
    let load = course.terminals(sample) / course.profile.load.resistance;
    course.current_uncertainty(sample.range, load) * SHOWS < load
}

/// Standard uncertainties of a current that are surely seen.
const SHOWS: f64 = 20.0;

/// No switch's gate is turned on by as little; 0.45 V to 1.2 V is the range of logic-level transistors (data sheets).
const NO_GATE: Volts = Volts(0.4);

fn lowest_on<'c>(course: &'c Course<'_>) -> Option<&'c Plateau> {
    course
        .in_scope()
        .filter(|plateau| plateau.settled == SwitchState::On)
        .min_by(|a, b| a.set.0.total_cmp(&b.set.0))
}

#[cfg(test)]
mod tests {
    use super::super::analyse;
    use super::super::fixture::{on, profile, staircase};
    use super::*;
    use crate::trace::{Accuracy, RangeAccuracy};
    use crate::units::Amps;

    /// What is said of a board that stays on, after a pre-check of these readings.
    fn told(pre_check: &[(f64, f64)]) -> (FindingCode, String) {
        let mut trace = staircase(&[pre_check, &[on(7.6), on(6.0), on(5.2)]].concat());
        let accuracy = Accuracy { relative: 1e-3, absolute: 1e-4, resolution: 0.0 };
        trace.claims.current = vec![RangeAccuracy { full_scale: Amps(1.0), accuracy }];
        let finding = analyse(&trace, &profile()).findings.into_iter().next().expect("a finding");
        (finding.code, finding.text)
    }

    #[test]
    fn the_pre_check_tells_a_short_from_a_gate_that_is_not_pulled_off() {
        let (code, text) = told(&[(0.3, 0.0), on(1.0)]);
        assert_eq!(code, FindingCode::DetectorStuckOn);
        assert!(text.contains("at 300.0 mV, where the load would draw 5.455 mA"), "{text}");
        assert!(text.contains("from 1.000 V on"), "{text}");
        let (code, text) = told(&[on(0.3), on(1.0)]);
        assert_eq!(code, FindingCode::NeverTrips);
        assert!(text.contains("conducts at 300.0 mV, too"), "{text}");
    }

    #[test]
    fn without_a_pre_check_or_where_the_meter_sees_too_little_nothing_is_told() {
        for readings in [&[][..], &[(0.02, 0.0)]] {
            let (code, text) = told(readings);
            assert_eq!(code, FindingCode::NeverTrips);
            assert!(text.contains("then at its gate drive"), "{text}");
        }
    }
}
