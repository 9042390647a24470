//! The supply taken away and given back: a board starts anew, and one that has latched forgets it.

use super::desk::Desk;
use super::pre_check::{DEAD, DRAIN_POLL};
use super::{Action, Plan};
use crate::trace::Stop;
use crate::units::Volts;
use std::time::Duration;

/// Longest wait for the terminals to drain; a supply that cannot sink leaves them charged.
const LONGEST_DRAIN: Duration = Duration::from_secs(30);
/// Time without voltage, so that the board forgets what it was; shorter interruptions are no new start.
const PAUSE: Duration = Duration::from_millis(200);

/// Output off until the terminals are dead, then on at `volts`, with the wait of an upward step: a board that turns on does
/// so after its release delay. False where the terminals do not drain; the output is on all the same.
pub(super) async fn power_cycle(desk: &Desk, plan: &Plan, volts: Volts) -> Result<bool, Stop> {
    desk.order(Action::OutputOff).await?;
    if !drained(desk, plan).await? {
        desk.order(Action::OutputOn).await?;
        return Ok(false);
    }
    desk.set(volts).await?;
    desk.order(Action::OutputOn).await?;
    desk.settle(plan, plan.up.dwell).await?;
    Ok(true)
}

/// True once the terminals are dead and have been for a while.
async fn drained(desk: &Desk, plan: &Plan) -> Result<bool, Stop> {
    let patience = desk.now() + LONGEST_DRAIN;
    while plan.voltmeter && desk.read().await?.terminals().abs() >= DEAD {
        if desk.now() >= patience {
            return Ok(false);
        }
        desk.wait(DRAIN_POLL).await?;
    }
    desk.wait(PAUSE).await?;
    desk.read().await?;
    Ok(true)
}

/// Time this takes on a supply that drains at once.
pub(super) fn expected(plan: &Plan) -> Duration {
    PAUSE + plan.settle + plan.up.dwell + plan.read_time * 2
}
