//! Below the trip: down to the floor, whatever the board does on the way.

use super::Plan;
use super::desk::Desk;
use super::probe::probe;
use super::walk;
use crate::trace::Stop;
use crate::units::Volts;

/// Goes on from a set-point below the trip to the floor: a board that conducts again there must be seen.
pub(super) async fn descend_to_floor(desk: &Desk, plan: &Plan, from: Volts) -> Result<(), Stop> {
    for volts in walk::set_points(from - plan.survey_step, plan.floor, -plan.survey_step) {
        probe(desk, plan, volts, plan.down).await?;
    }
    Ok(())
}
