//! What the course of the state says about the board: never on, never trips, never comes back, cannot rest.

use super::edges::{Direction, Edge, Edges};
use super::finding::{About, Finding, FindingCode};
use super::plateau::{Course, Plateau, REACHED, pulled_down};
use super::restless::chatter;
use super::stuck_on::never_trips;
use crate::trace::{Sample, Stop, SwitchState};
use crate::units::{Amps, Ohms, Volts};

/// Share of the terminal voltage above which the load voltmeter shows a closed switch.
const LOAD_LIVE: f64 = 0.5;

/// Diagnoses of the switch. At most one of them explains a missing threshold.
pub(super) fn diagnose(course: &Course<'_>, found: &Edges) -> Option<Finding> {
    if !found.reversals.is_empty() {
        return Some(chatter(course, found));
    }
    let ever_on = course.in_scope().any(|plateau| plateau.settled == SwitchState::On);
    let ever = |direction| found.edges.iter().any(|edge| edge.direction == direction);
    if !ever_on {
        return never_on(course).or_else(|| neither(course)).or_else(|| nothing(course));
    }
    if !ever(Direction::Down) {
        return never_trips(course).or_else(|| neither(course));
    }
    if course.profile.latched {
        return latched(course, found).or_else(|| neither(course));
    }
    if !ever(Direction::Up) {
        return never_re_enables(course, found).or_else(|| neither(course));
    }
    neither(course)
}

/// Source and leads: a board's own current moves its terminals by more than half the hysteresis.
pub(super) fn source_resistance(resistance: Ohms, current: Amps, hysteresis: Volts) -> Option<Finding> {
    let swing = current * resistance;
    let restless = swing.0 > 0.5 * hysteresis.0 && hysteresis.0 > 0.0;
    restless.then(|| {
        bench(
            FindingCode::SourceResistance,
            format!(
                "source and leads of {resistance} move the terminals by {swing} when a board switches {current}; a board of {hysteresis} hysteresis rests \
                 only while that is less than half of it, so this bench cannot judge it. Shorten the leads, clean the contacts, or \
                 sense at the board."
            ),
        )
    })
}

/// The supply limited the current while the board was not off.
pub(super) fn current_limit(course: &Course<'_>) -> Option<Finding> {
    let samples = &course.trace.samples;
    let limited = |at: usize| samples[at].limited == Some(true) && course.states[at] != SwitchState::Off;
    let (first, count) = course.lasting(limited)?;
    Some(bench(
        FindingCode::CurrentLimit,
        format!(
            "the supply limited the current in {count} readings, first at {}. Raise the current limit (set: {}) or look for a \
             load too small.",
            first.set, course.profile.supply.current_limit
        ),
    ))
}

fn never_on(course: &Course<'_>) -> Option<Finding> {
    let start = course.profile.supply.start;
    let at_start =
        |plateau: &&Plateau| plateau.settled == SwitchState::Off && plateau.set >= start * (1.0 - REACHED);
    let sample = course
        .in_scope()
        .filter(at_start)
        .last()
        .map(|plateau| &course.trace.samples[plateau.samples.end - 1])
        .or_else(|| match course.trace.ending.stop {
            Stop::NotOn { .. } => course.trace.samples.last(),
            _ => None,
        })?;
    let at = course.terminals(sample);
    let current = sample.current.amps().map_or_else(|| "overload".to_owned(), |amps| amps.to_string());
    let load = course.profile.load.resistance;
    Some(match sample.load {
        Some(volts) if volts > at * LOAD_LIVE => bench(
            FindingCode::NoLoad,
            format!(
                "{volts} stands at the load's terminals but only {current} flows: the switch is closed and the load of {load} is not \
                 connected. Connect the load and test again."
            ),
        ),
        Some(volts) => board(
            FindingCode::NeverOn,
            format!(
                "with {at} at the board only {volts} reaches the load and {current} flows: the switch stays open. Look first at \
                 the switch, its gate drive and the detector's output."
            ),
        ),
        None => bench(
            FindingCode::NoCurrent,
            format!(
                "only {current} flows at {at}, where the load of {load} would draw {}. Without a voltmeter at the load an open switch \
                 looks like a missing load: look first whether the load is connected and the ammeter's fuse is whole.",
                at / load
            ),
        ),
    })
}

/// The voltage at the start set-point at which a board that has tripped was still off.
fn off_at_the_start(course: &Course<'_>, found: &Edges) -> Option<Volts> {
    let tripped = found.edges.iter().find(|edge| edge.direction == Direction::Down)?.plateau;
    let start = course.profile.supply.start;
    let off_again = course.plateaus[tripped..]
        .iter()
        .find(|plateau| plateau.settled == SwitchState::Off && plateau.set >= start * (1.0 - REACHED))?;
    Some(course.terminals(last_sample(course, off_again)))
}

/// A board that is to stay off once tripped: did it come back, or was it not tried?
fn latched(course: &Course<'_>, found: &Edges) -> Option<Finding> {
    // A board whose supply a small range of the ammeter took away may have forgotten that it tripped.
    let gone = |sample: &Sample| pulled_down(sample, &course.trace.claims, course.profile);
    let kept_its_supply = |edge: &&Edge| !course.trace.samples[..edge.seen].iter().any(gone);
    let mut backs = found.edges.iter().filter(|edge| edge.direction == Direction::Up);
    if let Some(back) = backs.find(kept_its_supply) {
        let at = course.terminals(&course.trace.samples[back.seen]);
        return Some(board(
            FindingCode::NotLatched,
            format!(
                "the board tripped and came back by {at}, where the profile wants it to stay off until its supply has gone. Look \
                 first at the parts that hold the gate off."
            ),
        ));
    }
    off_at_the_start(course, found).is_none().then(|| {
        bench(
            FindingCode::LatchNotTried,
            format!(
                "the board tripped, but no reading at {} or above shows that it stays off.",
                course.profile.supply.start
            ),
        )
    })
}

fn never_re_enables(course: &Course<'_>, found: &Edges) -> Option<Finding> {
    let at = off_at_the_start(course, found)?;
    Some(board(
        FindingCode::NeverReEnables,
        format!(
            "the board tripped and is still off at {at}, where it was on before. Look first at the detector's hysteresis \
             parts and at a latching gate."
        ),
    ))
}

fn neither(course: &Course<'_>) -> Option<Finding> {
    let (sample, count) = course.lasting(|at| course.is_between(at))?;
    let at = course.terminals(sample);
    let current = sample.current.amps()?;
    Some(bench(
        FindingCode::NeitherOnNorOff,
        format!(
            "in {count} readings the current was neither the load's nor that of an open switch, first {current} at {at} where the \
             load draws {}. Look first at contacts and the load, then for a switch driven half on.",
            at / course.profile.load.resistance
        ),
    ))
}

fn nothing(course: &Course<'_>) -> Option<Finding> {
    // A run that stopped early says why by its ending.
    matches!(course.trace.ending.stop, Stop::Completed).then(|| {
        bench(
            FindingCode::NothingToSee,
            format!(
                "the trace shows no board that was on: {} readings, none at {} or above with the load's current.",
                course.trace.samples.len(),
                course.profile.supply.floor
            ),
        )
    })
}

pub(super) fn last_sample<'t>(course: &Course<'t>, plateau: &Plateau) -> &'t Sample {
    &course.trace.samples[plateau.samples.end - 1]
}

pub(super) fn board(code: FindingCode, text: String) -> Finding {
    Finding { code, about: About::Board, text }
}

fn bench(code: FindingCode, text: String) -> Finding {
    Finding { code, about: About::Bench, text }
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::trace::Trace;

    fn code(trace: &Trace) -> Option<FindingCode> {
        let profile = profile();
        let course = Course::new(trace, &profile);
        diagnose(&course, &Edges::find(&course)).map(|finding| finding.code)
    }

    fn of(readings: &[(f64, f64)]) -> Option<FindingCode> {
        code(&staircase(readings))
    }

    #[test]
    fn a_good_staircase_has_no_diagnosis() {
        assert_eq!(of(&[on(7.6), on(6.1), off(5.9), off(5.2), off(6.3), on(6.4), on(7.6)]), None);
    }

    #[test]
    fn on_at_the_floor_never_trips_but_an_early_end_says_nothing() {
        assert_eq!(of(&[on(7.6), on(6.0), on(5.2)]), Some(FindingCode::NeverTrips));
        assert_eq!(of(&[on(7.6), on(6.0)]), None);
    }

    #[test]
    fn off_at_the_start_after_a_trip_never_re_enables() {
        assert_eq!(of(&[on(7.6), off(5.9), off(6.5), off(7.6)]), Some(FindingCode::NeverReEnables));
        assert_eq!(of(&[on(7.6), off(5.9), off(6.5)]), None);
    }

    #[test]
    fn a_board_that_latches_is_off_at_the_start_and_nothing_is_said() {
        let mut profile = profile();
        profile.latched = true;
        let told = |readings: &[(f64, f64)]| {
            let trace = staircase(readings);
            let course = Course::new(&trace, &profile);
            diagnose(&course, &Edges::find(&course)).map(|finding| finding.code)
        };
        assert_eq!(told(&[on(7.6), off(5.9), off(6.5), off(7.6)]), None);
        assert_eq!(told(&[on(7.6), off(5.9), off(6.5)]), Some(FindingCode::LatchNotTried));
        assert_eq!(told(&[on(7.6), off(5.9), off(6.5), on(6.6)]), Some(FindingCode::NotLatched));
    }

    #[test]
    fn the_load_voltmeter_tells_an_open_switch_from_a_missing_load() {
        let with_load = |volts: Option<f64>| {
            let mut trace = staircase(&[(0.3, 0.0), off(7.6), off(7.6)]);
            for sample in &mut trace.samples {
                sample.load = volts.map(Volts);
            }
            code(&trace)
        };
        assert_eq!(with_load(Some(0.01)), Some(FindingCode::NeverOn));
        assert_eq!(with_load(Some(7.59)), Some(FindingCode::NoLoad));
        assert_eq!(with_load(None), Some(FindingCode::NoCurrent));
    }

    #[test]
    fn switching_by_itself_comes_before_all_else() {
        assert_eq!(of(&[on(7.6), off(6.0), on(5.9), on(5.2)]), Some(FindingCode::Chatter));
    }

    #[test]
    fn half_the_current_is_neither() {
        assert_eq!(
            of(&[on(7.6), (6.1, 0.03), (6.0, 0.03), off(5.9), on(6.5)]),
            Some(FindingCode::NeitherOnNorOff)
        );
        assert_eq!(
            of(&[on(7.6), (6.1, 0.03), off(5.9), on(6.5)]),
            None,
            "one reading may have caught the change"
        );
    }

    #[test]
    fn a_swing_of_more_than_half_the_hysteresis_is_the_source() {
        let found = |ohms| source_resistance(Ohms(ohms), Amps(0.1), Volts(0.4)).is_some();
        assert!(found(2.1) && !found(1.9));
    }
}
