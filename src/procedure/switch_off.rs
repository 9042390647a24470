//! The only way out of a run: output off, read back, board discharged.

use super::desk::Desk;
use super::pre_check::{DEAD, DRAIN_POLL};
use super::progress::{Stage, left};
use super::{Action, Event, Plan};
use crate::trace::{Ending, OutputState, Stop};
use std::time::Duration;

/// Switches off, up to three times, and waits for the board to discharge. The operator's stop does not
/// interrupt it.
pub(super) async fn switch_off(desk: &Desk, plan: &Plan, stop: Stop) -> Ending {
    desk.enter(Stage::SwitchOff, left(plan, Stage::SwitchOff));
    output_off(desk, plan.voltmeter, stop).await
}

/// The same without a plan; `voltmeter` says whether the discharge can be seen.
pub(super) async fn output_off(desk: &Desk, voltmeter: bool, stop: Stop) -> Ending {
    let mut output = OutputState::MayBeOn;
    for _ in 0..TRIES {
        if desk.perform(Action::OutputOff).await == Event::Done {
            output = OutputState::Off;
            break;
        }
    }
    if output == OutputState::Off && voltmeter {
        discharge(desk).await;
    }
    Ending { stop, output }
}

const TRIES: usize = 3;
/// How long the operator is kept waiting for a board to discharge; after that the trace says what is left on it.
const LONGEST_DISCHARGE: Duration = Duration::from_secs(3);

/// Readings that fail here do not change how the run ended: the output is off.
async fn discharge(desk: &Desk) {
    let end = desk.now() + LONGEST_DISCHARGE;
    while let Ok(sample) = desk.read().await {
        if sample.terminals() < DEAD || desk.now() >= end || desk.wait(DRAIN_POLL).await.is_err() {
            return;
        }
    }
}
