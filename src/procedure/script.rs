//! A run from beginning to end, as a technician would tell it.

use super::approach::Approach;
use super::confirm::{Confirmed, confirm_re_enable, confirm_trip};
use super::deep::sweep_deep;
use super::delay::measure_delays;
use super::descent::descend_to_floor;
use super::desk::Desk;
use super::hum::{listen_for_contact, listen_for_hum};
use super::in_band::switch_on_in_band;
use super::narrow::{Narrowed, narrow};
use super::off_current::measure_off_current;
use super::pre_check::pre_check;
use super::probe::{arm_off, arm_on};
use super::progress::{Stage, left};
use super::ramps::play_ramps;
use super::rebound::try_rebound;
use super::switch_off::switch_off;
use super::walk::{Edge, walk_down, walk_up};
use super::{Action, Plan};
use crate::trace::{Ending, Stop};
use std::rc::Rc;

/// The whole run. Whatever ends the measuring, the output is switched off.
pub(super) async fn run(desk: Rc<Desk>, plan: Plan) -> Ending {
    desk.begin().await;
    let stop = match measure(&desk, &plan).await {
        Ok(()) => Stop::Completed,
        Err(stop) => stop,
    };
    switch_off(&desk, &plan, stop).await
}

async fn measure(desk: &Desk, plan: &Plan) -> Result<(), Stop> {
    let enter = |stage| desk.enter(stage, left(plan, stage));

    enter(Stage::PreCheck);
    pre_check(desk, plan).await?;

    enter(Stage::Arm);
    desk.order(Action::LimitCurrent(plan.current_limit)).await?;
    let armed = arm_on(desk, plan).await?;
    listen_for_hum(desk, plan).await?;

    if let Some(search) = &plan.search {
        match narrow(desk, plan, search, armed).await? {
            Narrowed::Both { trip, re_enable, contradicted } => {
                if contradicted {
                    arm_on(desk, plan).await?;
                    listen_for_contact(desk, plan).await?;
                }
                return measure_more(desk, plan, trip, Some(re_enable)).await;
            }
            Narrowed::OneMissing => return Ok(()),
            // Every step of the whole range shows what the board does.
            Narrowed::Odd => {
                arm_on(desk, plan).await?;
                listen_for_contact(desk, plan).await?;
            }
        };
    }
    staircase(desk, plan).await
}

/// One threshold after the other, the board being on.
async fn staircase(desk: &Desk, plan: &Plan) -> Result<(), Stop> {
    let enter = |stage| desk.enter(stage, left(plan, stage));

    enter(Stage::SurveyDown);
    let Some(trip) = walk_down(desk, plan, plan.start, plan.floor, plan.survey_step, plan.down).await? else {
        return Ok(());
    };
    descend_to_floor(desk, plan, trip.changed).await?;
    measure_off_current(desk, plan).await?;

    enter(Stage::SurveyUp);
    let low = plan.off_points.last().copied().unwrap_or(plan.floor);
    let re_enable = walk_up(desk, plan, low, plan.start, plan.survey_step, plan.up).await?;
    // One that should latch and came back has failed; one that should come back and does not has as well.
    if plan.latched == re_enable.is_some() {
        return Ok(());
    }
    let mut odd = false;
    let trip = narrow_trip(desk, plan, trip, &mut odd).await?;
    let re_enable = match re_enable {
        Some(survey) => Some(narrow_re_enable(desk, plan, trip, survey, &mut odd).await?),
        None => None,
    };
    if odd {
        arm_on(desk, plan).await?;
        listen_for_contact(desk, plan).await?;
    }
    measure_more(desk, plan, trip, re_enable).await
}

/// What the profile asks for beyond thresholds and off current. A board that latches has no re-enable.
async fn measure_more(desk: &Desk, plan: &Plan, trip: Edge, re_enable: Option<Edge>) -> Result<(), Stop> {
    try_rebound(desk, plan, trip).await?;
    measure_delays(desk, plan, trip, re_enable).await?;
    play_ramps(desk, plan, trip, re_enable).await?;
    switch_on_in_band(desk, plan).await?;
    sweep_deep(desk, plan, trip).await
}

/// Small steps through the bracket, then a hold just above it; a board that trips there is slow and gets more time. Sets `odd`
/// where the board did not do again what it had done.
async fn narrow_trip(desk: &Desk, plan: &Plan, survey: Edge, odd: &mut bool) -> Result<Edge, Stop> {
    let step = plan.fine_step.unwrap_or(plan.survey_step);
    let mut pace = plan.down;
    let mut edge = survey;
    let mut known = plan.fine_step.is_none();
    let mut approach = Approach::new(plan, survey, plan.start);
    let mut from = approach.first();
    for _ in 0..ATTEMPTS {
        if !known {
            desk.enter(Stage::NarrowDown, left(plan, Stage::NarrowDown));
            arm_on(desk, plan).await?;
            let to = (survey.changed - plan.survey_step).max(plan.floor);
            match walk_down(desk, plan, from, to, step, pace).await? {
                Some(found) => edge = found,
                None => {
                    *odd = true;
                    return Ok(edge);
                }
            }
        }
        desk.enter(Stage::ConfirmTrip, left(plan, Stage::ConfirmTrip));
        match confirm_trip(desk, plan, edge, pace).await? {
            Confirmed::Stands => break,
            Confirmed::Moved { after } => {
                *odd = true;
                from = approach.after_move(plan, edge, pace, after);
                (known, pace) = (false, pace.slower(after));
            }
        }
    }
    Ok(edge)
}

/// The mirror image of [`narrow_trip`]; the board is brought below its trip before each attempt.
async fn narrow_re_enable(
    desk: &Desk,
    plan: &Plan,
    trip: Edge,
    survey: Edge,
    odd: &mut bool,
) -> Result<Edge, Stop> {
    let step = plan.fine_step.unwrap_or(plan.survey_step);
    let below_trip = (trip.changed - plan.survey_step).max(plan.floor);
    let mut pace = plan.up;
    let mut edge = survey;
    let mut known = plan.fine_step.is_none();
    let mut approach = Approach::new(plan, survey, below_trip);
    let mut from = approach.first();
    for _ in 0..ATTEMPTS {
        if !known {
            desk.enter(Stage::NarrowUp, left(plan, Stage::NarrowUp));
            arm_off(desk, plan, below_trip).await?;
            let to = (survey.changed + plan.survey_step).min(plan.start);
            match walk_up(desk, plan, from, to, step, pace).await? {
                Some(found) => edge = found,
                None => {
                    *odd = true;
                    return Ok(edge);
                }
            }
        }
        desk.enter(Stage::ConfirmReEnable, left(plan, Stage::ConfirmReEnable));
        match confirm_re_enable(desk, plan, edge, below_trip, pace).await? {
            Confirmed::Stands => break,
            Confirmed::Moved { after } => {
                *odd = true;
                from = approach.after_move(plan, edge, pace, after);
                (known, pace) = (false, pace.slower(after));
            }
        }
    }
    Ok(edge)
}

/// How often a bracket is looked for before the last one has to do.
const ATTEMPTS: usize = 3;
