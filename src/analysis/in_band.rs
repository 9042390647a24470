//! The state a board took when it was switched on between trip and re-enable.
//!
//! There history decides, and a board without any may take either state: it is recorded, and judged only where the
//! profile wants one. In the trace such a start is a dead plateau, at zero, followed by the voltage inside the band.

use super::finding::{About, Finding, FindingCode};
use super::plateau::{Course, Plateau};
use crate::profile::WantedInBand;
use crate::trace::{Stop, SwitchState};
use crate::units::Volts;

/// Below this the terminals are dead.
const DEAD: Volts = Volts(0.1);
/// A supply sets its voltage this closely.
const SET_STEP: Volts = Volts(2e-3);

/// What came of switching on inside the band; `None` where the profile does not ask for it.
pub(super) fn in_band(course: &Course<'_>) -> Option<Finding> {
    let asked = course.profile.measure.in_band?;
    let dead = |plateau: &Plateau| {
        let last = &course.trace.samples[plateau.samples.end - 1];
        plateau.set.abs() < SET_STEP && course.terminals(last).abs() < DEAD
    };
    let states: Vec<SwitchState> = course
        .plateaus
        .windows(2)
        .filter(|pair| dead(&pair[0]) && (pair[1].set - asked.at).abs() < SET_STEP)
        .map(|pair| pair[1].settled)
        .collect();
    if states.is_empty() {
        return (course.trace.ending.stop == Stop::Completed).then(|| Finding {
            code: FindingCode::InBandNotTried,
            about: About::Bench,
            text: format!(
                "the board was never switched on at {} from dead terminals. Look first whether they drain: fit a bleed \
                 resistor across the supply.",
                asked.at
            ),
        });
    }
    let count = |state| states.iter().filter(|seen| **seen == state).count();
    let (on, off, neither) = (count(SwitchState::On), count(SwitchState::Off), count(SwitchState::Neither));
    let mut text = format!(
        "switched on at {}, between trip and re-enable, the board came on {on} times of {} and stayed off {off} times",
        asked.at,
        states.len()
    );
    if neither > 0 {
        text += &format!(", and was neither {neither} times");
    }
    let unwanted = match asked.wanted {
        None => 0,
        Some(WantedInBand::On) => states.len() - on,
        Some(WantedInBand::Off) => states.len() - off,
    };
    let code = if unwanted > 0 { FindingCode::UnwantedInBand } else { FindingCode::InBand };
    text += match (unwanted > 0, asked.wanted) {
        (true, Some(WantedInBand::On)) => {
            "; wanted on. Look first at what holds the detector's output while the supply rises."
        }
        (true, _) => "; wanted off. Look first at what holds the switch's gate while the supply rises.",
        (false, Some(_)) => ", as wanted.",
        (false, None) => ". Either is right.",
    };
    Some(Finding { code, about: About::Board, text })
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::profile::InBand;

    fn told(wanted: Option<WantedInBand>, starts: &[(f64, f64)]) -> Option<Finding> {
        let mut profile = profile();
        profile.measure.in_band = Some(InBand { at: Volts(6.18), times: 3, wanted });
        let mut readings = vec![(0.3, 0.0), on(7.6), off(5.9), on(7.6)];
        for start in starts {
            readings.extend([(0.0, 0.0), (start.0, start.1), *start]);
        }
        in_band(&Course::new(&staircase(&readings), &profile))
    }

    #[test]
    fn either_state_is_right_unless_the_profile_wants_one() {
        let mixed = [on(6.18), off(6.18), off(6.18)];
        let finding = told(None, &mixed).expect("asked for");
        assert_eq!(finding.code, FindingCode::InBand);
        assert!(finding.text.contains("on 1 times of 3 and stayed off 2 times"), "{}", finding.text);
        let code = |wanted, starts: &[(f64, f64)]| told(Some(wanted), starts).expect("asked for").code;
        assert_eq!(code(WantedInBand::Off, &mixed), FindingCode::UnwantedInBand);
        assert_eq!(code(WantedInBand::On, &mixed), FindingCode::UnwantedInBand);
        assert_eq!(code(WantedInBand::Off, &[off(6.18)]), FindingCode::InBand);
        assert_eq!(code(WantedInBand::On, &[on(6.18)]), FindingCode::InBand);
    }

    #[test]
    fn a_board_that_was_never_dead_was_not_tried() {
        assert_eq!(told(None, &[]).expect("asked for").code, FindingCode::InBandNotTried);
        assert_eq!(in_band(&Course::new(&staircase(&[on(7.6)]), &profile())), None);
    }
}
