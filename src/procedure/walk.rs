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

impl Staircase {
    /// Set-point `index`; the last one is exactly `to`. Multiples of the step, so that no error adds up.
    fn set_point(&self, index: u32) -> Option<Volts> {
        let volts = self.from + self.step * f64::from(index);
        let beyond = (volts - self.to).0 * self.step.0 > 0.0;
        let previous_short = ((volts - self.step) - self.to).0 * self.step.0 < -1e-9;
        if !beyond {
            Some(volts)
        } else if previous_short || index == 0 {
            Some(self.to)
        } else {
            None
        }
    }
}

async fn walk(
    desk: &Desk,
    plan: &Plan,
    staircase: Staircase,
    pace: Pace,
    until: SwitchState,
) -> Result<Option<Edge>, Stop> {
    let mut unchanged = staircase.from - staircase.step;
    for index in 0.. {
        let Some(volts) = staircase.set_point(index) else { break };
        let sample = probe(desk, plan, volts, pace).await?;
        if changed(desk, plan, sample, until).await? {
            return Ok(Some(Edge { unchanged, changed: volts }));
        }
        unchanged = volts;
    }
    Ok(None)
}

/// A change counts when the next reading at the same set-point says so too.
async fn changed(desk: &Desk, plan: &Plan, first: Sample, until: SwitchState) -> Result<bool, Stop> {
    let mut current = state(plan, &first);
    for _ in 0..2 {
        let other = matches!(
            (current, until),
            (SwitchState::On, SwitchState::Off) | (SwitchState::Off, SwitchState::On)
        );
        if other {
            return Ok(false);
        }
        let next = state(plan, &desk.read().await?);
        if next == until && current == until {
            return Ok(true);
        }
        current = next;
    }
    Ok(false)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_staircase_ends_exactly_at_its_end() {
        let points = |from, to, step| {
            let staircase = Staircase { from: Volts(from), to: Volts(to), step: Volts(step) };
            (0..)
                .map_while(|index| staircase.set_point(index))
                .map(|volts| (volts.0 * 1e6).round() / 1e6)
                .collect::<Vec<_>>()
        };
        assert_eq!(points(6.0, 5.0, -0.4), [6.0, 5.6, 5.2, 5.0]);
        assert_eq!(points(6.0, 5.2, -0.4), [6.0, 5.6, 5.2]);
        assert_eq!(points(5.0, 5.3, 0.1), [5.0, 5.1, 5.2, 5.3]);
        assert_eq!(points(5.0, 5.0, 0.1), [5.0]);
    }
}
