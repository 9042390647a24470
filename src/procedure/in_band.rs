//! Switched on between trip and re-enable, as when a half-empty battery is connected: which state does the board take?

use super::Plan;
use super::desk::Desk;
use super::power_cycle::{self, power_cycle};
use super::progress::{Stage, left};
use crate::trace::Stop;
use std::time::Duration;

/// Output off and dead, then on at the profile's voltage inside the band; the trace shows the state that came.
///
/// Where the terminals do not drain nothing more is tried: a board still alive would keep its state. Ends with the
/// output on.
pub(super) async fn switch_on_in_band(desk: &Desk, plan: &Plan) -> Result<(), Stop> {
    let Some(in_band) = plan.measure.in_band else { return Ok(()) };
    desk.enter(Stage::InBand, left(plan, Stage::InBand));
    for _ in 0..in_band.times {
        if !power_cycle(desk, plan, in_band.at).await? {
            break;
        }
        desk.read().await?;
        desk.read().await?;
    }
    Ok(())
}

/// Time this takes on a supply that drains at once.
pub(super) fn expected(plan: &Plan) -> Duration {
    let once = power_cycle::expected(plan) + plan.read_time * 2;
    plan.measure.in_band.map_or(Duration::ZERO, |in_band| once * in_band.times)
}
