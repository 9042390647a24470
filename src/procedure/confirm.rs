//! After a bracket is found: back into the known state, to the voltage that did not change it, and wait.
//!
//! A threshold read with too short a dwell lies beyond the true one. Beside a true bracket nothing moves however long
//! one waits; beside a false one a slow board changes its state.

use super::Plan;
use super::desk::Desk;
use super::plan::Pace;
use super::probe::{arm_off, arm_on, probe, state};
use super::walk::Edge;
use crate::trace::{Sample, Stop, SwitchState};
use crate::units::Volts;
use std::time::Duration;

/// Whether a bracket holds against a long wait.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Confirmed {
    /// Nothing moved.
    Stands,
    /// The board changed its state where it had not before, within this time of being brought there.
    Moved {
        /// From the set-point's settling to the reading that showed the change.
        after: Duration,
    },
}

/// Holds the last voltage at which the board stayed on.
pub(super) async fn confirm_trip(
    desk: &Desk,
    plan: &Plan,
    edge: Edge,
    pace: Pace,
) -> Result<Confirmed, Stop> {
    arm_on(desk, plan).await?;
    let first = probe(desk, plan, edge.unchanged.min(plan.start), pace).await?;
    hold(desk, plan, first, SwitchState::On, pace).await
}

/// Holds the last voltage at which the board stayed off.
pub(super) async fn confirm_re_enable(
    desk: &Desk,
    plan: &Plan,
    edge: Edge,
    below_trip: Volts,
    pace: Pace,
) -> Result<Confirmed, Stop> {
    arm_off(desk, plan, below_trip).await?;
    let first = probe(desk, plan, edge.unchanged.max(below_trip), pace).await?;
    hold(desk, plan, first, SwitchState::Off, pace).await
}

/// Looks for as long as the pace says whether the board stays in its `expected` state.
pub(super) async fn hold(
    desk: &Desk,
    plan: &Plan,
    first: Sample,
    expected: SwitchState,
    pace: Pace,
) -> Result<Confirmed, Stop> {
    let begun = desk.now();
    let mut sample = first;
    loop {
        if state(plan, &sample) != expected {
            // Once more, so that the trace shows where it came to rest and not only that it moved.
            desk.read().await?;
            return Ok(Confirmed::Moved { after: pace.dwell + (desk.now() - begun) });
        }
        if desk.now() >= begun + pace.hold {
            return Ok(Confirmed::Stands);
        }
        desk.wait(HOLD_POLL).await?;
        sample = desk.read().await?;
    }
}

/// Pause between looks during a hold; short enough to tell how long a slow board took.
const HOLD_POLL: Duration = Duration::from_millis(10);
