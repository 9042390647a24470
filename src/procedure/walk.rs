//! A staircase in one direction until the switch changes its state.

use super::Plan;
use super::desk::Desk;
use super::plan::Pace;
use super::probe::{probe, state};
use crate::trace::{Sample, Stop, SwitchState};
use crate::units::Volts;

/// The two set-points between which the switch changed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Edge {
    /// The last that did not change it.
    pub(super) unchanged: Volts,
    /// The first that did.
    pub(super) changed: Volts,
}

impl Edge {
    /// Halfway between the two.
    pub(super) fn middle(&self) -> Volts {
        (self.unchanged + self.changed) / 2.0
    }
}

/// How far apart the thresholds lie. A board that latches has no way back; then it is what a common detector would have.
pub(super) fn band(trip: Edge, re_enable: Option<Edge>) -> Volts {
    re_enable.map_or(trip.unchanged * COMMON_BAND, |edge| edge.unchanged - trip.unchanged)
}

/// Hysteresis of common detectors, as a share of their trip (common data sheets).
const COMMON_BAND: f64 = 0.05;

/// Steps down from `from` to `to`; `None` when the board is still on at the end.
pub(super) async fn walk_down(
    desk: &Desk,
    plan: &Plan,
    from: Volts,
    to: Volts,
    step: Volts,
    pace: Pace,
) -> Result<Option<Edge>, Stop> {
    walk(desk, plan, Staircase { from, to, step: -step }, pace, SwitchState::Off).await
}

/// Steps up from `from` to `to`; `None` when the board is still off at the end.
pub(super) async fn walk_up(
    desk: &Desk,
    plan: &Plan,
    from: Volts,
    to: Volts,
    step: Volts,
    pace: Pace,
) -> Result<Option<Edge>, Stop> {
    walk(desk, plan, Staircase { from, to, step }, pace, SwitchState::On).await
}

struct Staircase {
    from: Volts,
    to: Volts,
    step: Volts,
}

/// The set-points from `from` to `to`, the last one exactly `to`; none when `from` lies beyond `to`. Multiples of the
/// step, so that no error adds up.
pub(super) fn set_points(from: Volts, to: Volts, step: Volts) -> impl Iterator<Item = Volts> {
    let steps = (to - from) / step;
    let before = (steps - ROUNDING).ceil().max(0.0) as u32;
    (0..before).map(move |index| from + step * f64::from(index)).chain((steps > -ROUNDING).then_some(to))
}

/// Shares of a step that are rounding, not voltage.
const ROUNDING: f64 = 1e-6;

async fn walk(
    desk: &Desk,
    plan: &Plan,
    staircase: Staircase,
    pace: Pace,
    until: SwitchState,
) -> Result<Option<Edge>, Stop> {
    let mut unchanged = staircase.from - staircase.step;
    let mut undecided = 0;
    for volts in set_points(staircase.from, staircase.to, staircase.step) {
        let first = probe(desk, plan, volts, pace).await?;
        let (state, sample) = rest(desk, plan, first, until).await?;
        if state == until {
            return Ok(Some(Edge { unchanged, changed: volts }));
        }
        undecided = if state == SwitchState::Neither { undecided + 1 } else { 0 };
        if undecided >= MOST_UNDECIDED {
            let current = sample.current.amps().unwrap_or(plan.on_range);
            return Err(Stop::Undecided { at: sample.terminals(), current });
        }
        unchanged = volts;
    }
    Ok(None)
}

/// Set-points in a row at which a board may be neither on nor off before it is given up: it will not rest.
pub(super) const MOST_UNDECIDED: u32 = 10;

/// The state in which the board rests at a set-point. A change counts when the next reading says so too; a board that
/// says something else each time is in neither state.
async fn rest(
    desk: &Desk,
    plan: &Plan,
    first: Sample,
    until: SwitchState,
) -> Result<(SwitchState, Sample), Stop> {
    let mut sample = first;
    let mut before = state(plan, &sample);
    for _ in 0..2 {
        if before != until && before != SwitchState::Neither {
            return Ok((before, sample));
        }
        sample = desk.read().await?;
        let after = state(plan, &sample);
        if after == until && before == until {
            return Ok((until, sample));
        }
        before = after;
    }
    Ok((SwitchState::Neither, sample))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_staircase_ends_exactly_at_its_end() {
        let points = |from, to, step| {
            set_points(Volts(from), Volts(to), Volts(step))
                .map(|volts| (volts.0 * 1e6).round() / 1e6)
                .collect::<Vec<_>>()
        };
        assert_eq!(points(6.0, 5.0, -0.4), [6.0, 5.6, 5.2, 5.0]);
        assert_eq!(points(6.0, 5.2, -0.4), [6.0, 5.6, 5.2]);
        assert_eq!(points(5.0, 5.3, 0.1), [5.0, 5.1, 5.2, 5.3]);
        assert_eq!(points(5.0, 5.0, 0.1), [5.0]);
        assert_eq!(points(5.1, 5.2, -0.1), [0.0; 0]);
    }
}
