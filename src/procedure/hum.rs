//! Is there hum on the supply, or a contact that opens for moments? Readings over whole mains periods cannot show it;
//! short ones can.

use super::Plan;
use super::desk::Desk;
use crate::trace::Stop;
use std::time::Duration;

/// One burst of short readings of the voltage at the board, where the voltmeter can take them. The board is on, so that
/// the hum is seen with the load's current.
pub(super) async fn listen_for_hum(desk: &Desk, plan: &Plan) -> Result<(), Stop> {
    if !plan.short_readings {
        return Ok(());
    }
    desk.burst().await?;
    // A last reading here: the burst is no time that the next set-point stood.
    desk.read().await?;
    Ok(())
}

/// A board that contradicted itself may do so for a contact that opens for milliseconds, seldom enough that no reading
/// shows it. Bursts for a while at the start set-point, where no board switches by itself, tell the one from the other.
pub(super) async fn listen_for_contact(desk: &Desk, plan: &Plan) -> Result<(), Stop> {
    if !plan.short_readings {
        return Ok(());
    }
    let end = desk.now() + LISTEN;
    while desk.now() < end {
        desk.burst().await?;
        desk.read().await?;
    }
    Ok(())
}

/// A loose pin under vibration opens several times a second; common practice.
const LISTEN: Duration = Duration::from_millis(1500);
