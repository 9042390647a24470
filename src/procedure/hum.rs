//! Is there hum on the supply, or a contact that opens for moments? Readings over whole mains periods cannot show it;
//! short ones can.

use super::Plan;
use super::desk::Desk;
use crate::trace::Stop;
use std::time::Duration;

/// One burst of short readings of the voltage at the board, where the voltmeter can take them. The board is on, so that
/// the hum is seen with the load's current.
pub(super) async fn listen_for_hum(desk: &Desk, plan: &Plan) -> Result<(), Stop> {
    if plan.short_readings.is_none() {
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
    if plan.short_readings.is_none() {
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

/// Time this takes.
pub(super) fn expected(plan: &Plan) -> Duration {
    plan.short_readings.map_or(Duration::ZERO, |burst| burst + plan.read_time)
}

#[cfg(test)]
mod tests {
    use super::super::progress::{Stage, left};
    use super::super::tests::plan;
    use super::*;
    use crate::profile::Ramp;
    use crate::units::Volts;

    #[test]
    fn the_time_left_counts_the_burst() {
        let ramp = Ramp::Search { resolution: Volts(2e-3) };
        let burst = Duration::from_millis(176);
        let (deaf, hears) = (plan(ramp), Plan { short_readings: Some(burst), ..plan(ramp) });
        for stage in [Stage::PreCheck, Stage::Arm] {
            assert_eq!(left(&hears, stage) - left(&deaf, stage), burst + deaf.read_time, "{stage:?}");
        }
        assert_eq!(left(&hears, Stage::Search), left(&deaf, Stage::Search));
    }
}
