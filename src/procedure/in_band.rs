//! Switched on between trip and re-enable, as when a half-empty battery is connected: which state does the board take?

use super::desk::Desk;
use super::pre_check::{DEAD, DRAIN_POLL};
use super::progress::{Stage, left};
use super::{Action, Plan};
use crate::trace::Stop;
use std::time::Duration;

/// Longest wait for the terminals to drain; a supply that cannot sink leaves them charged.
const LONGEST_DRAIN: Duration = Duration::from_secs(30);
/// Time without voltage, so that the board forgets what it was; shorter interruptions are no new start.
const PAUSE: Duration = Duration::from_millis(200);

/// Output off and dead, then on at the profile's voltage inside the band; the trace shows the state that came.
///
/// Where the terminals do not drain nothing more is tried: a board still alive would keep its state. Ends with the
/// output on.
pub(super) async fn switch_on_in_band(desk: &Desk, plan: &Plan) -> Result<(), Stop> {
    let Some(in_band) = plan.measure.in_band else { return Ok(()) };
    desk.enter(Stage::InBand, left(plan, Stage::InBand));
    for _ in 0..in_band.times {
        desk.order(Action::OutputOff).await?;
        if !drained(desk, plan).await? {
            return desk.order(Action::OutputOn).await;
        }
        desk.set(in_band.at).await?;
        desk.order(Action::OutputOn).await?;
        // The wait of an upward step: a board that turns on does so after its release delay.
        desk.wait(plan.settle + plan.up.dwell).await?;
        desk.read().await?;
        desk.read().await?;
    }
    Ok(())
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
    let once = PAUSE + plan.settle + plan.up.dwell + plan.read_time * 4;
    plan.measure.in_band.map_or(Duration::ZERO, |in_band| once * in_band.times)
}
