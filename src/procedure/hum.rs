//! Is there hum on the supply? Readings over whole mains periods cannot show it; short ones can.

use super::Plan;
use super::desk::Desk;
use crate::trace::Stop;

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
