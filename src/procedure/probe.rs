//! One set-point: set, settle, dwell, read; and the two known states of the board.

use super::Plan;
use super::desk::Desk;
use super::plan::Pace;
use super::power_cycle::{self, power_cycle};
use crate::trace::{Sample, Stop, SwitchState};
use crate::units::Volts;
use std::time::Duration;

/// Sets `volts` and returns the first reading that counts: arrived, and a dwell after arrival.
pub(super) async fn probe(desk: &Desk, plan: &Plan, volts: Volts, pace: Pace) -> Result<Sample, Stop> {
    desk.set(volts).await?;
    desk.settle(plan, pace.dwell).await?;
    let sample = desk.read().await?;
    if above_set_point(plan, &sample) {
        wait_for_arrival(desk, plan, sample).await?;
        desk.wait(pace.dwell).await?;
        return desk.read().await;
    }
    Ok(sample)
}

/// A supply that cannot sink leaves the terminals above the set-point until the board has drained them. A voltage
/// below the set-point is the drop in the leads, or a board that pulls the supply down: both belong in the trace.
pub(super) fn above_set_point(plan: &Plan, sample: &Sample) -> bool {
    plan.voltmeter && sample.terminals() > sample.set + plan.arrival_tolerance
}

async fn wait_for_arrival(desk: &Desk, plan: &Plan, first: Sample) -> Result<(), Stop> {
    let mut last = first;
    loop {
        desk.wait(ARRIVAL_POLL).await?;
        let sample = desk.read().await?;
        if !above_set_point(plan, &sample) {
            return Ok(());
        }
        let elapsed = (desk.now() - first.at).as_secs_f64();
        let since_last = sample.at.saturating_sub(last.at).as_secs_f64();
        let falling = (last.terminals() - sample.terminals()).0;
        if elapsed > LONGEST_ARRIVAL || falling < SLOWEST_FALL * since_last {
            return Err(Stop::NotArrived { set: sample.set, sense: sample.terminals() });
        }
        last = sample;
    }
}

const ARRIVAL_POLL: Duration = Duration::from_millis(250);
/// Longest wait for a voltage to arrive, in seconds.
const LONGEST_ARRIVAL: f64 = 120.0;
/// A voltage that falls more slowly than this will not arrive, in volts a second.
const SLOWEST_FALL: f64 = 2e-3;

/// The state of the switch at this reading, on a board that has been on.
pub(super) fn state(plan: &Plan, sample: &Sample) -> SwitchState {
    drawn(plan, sample).with_load(sample.load, sample.terminals())
}

/// The state as the current alone tells it: a load must have drawn before its voltage says anything.
fn drawn(plan: &Plan, sample: &Sample) -> SwitchState {
    SwitchState::of(sample.current, sample.terminals(), plan.load.resistance, plan.on_uncertainty)
}

/// Brings the board into its on state by the start voltage, whatever it did before, and returns a reading there. One that
/// latches has its supply taken away first, where it is off.
pub(super) async fn arm_on(desk: &Desk, plan: &Plan) -> Result<Sample, Stop> {
    let mut sample = probe(desk, plan, plan.start, plan.up).await?;
    if plan.latched && drawn(plan, &sample) == SwitchState::Off {
        power_cycle(desk, plan, plan.start).await?;
        sample = desk.read().await?;
    }
    let patience = desk.now() + PATIENCE + plan.up.hold;
    let armed = |sample: &Sample| drawn(plan, sample) == SwitchState::On && sample.limited != Some(true);
    while !armed(&sample) && desk.now() < patience {
        desk.wait(ARM_POLL).await?;
        sample = desk.read().await?;
    }
    let at = sample.terminals();
    let current = sample.current.amps().unwrap_or(plan.on_range);
    match drawn(plan, &sample) {
        _ if sample.limited == Some(true) => Err(Stop::CurrentLimited { at, current }),
        SwitchState::On => Ok(sample),
        // The supply has cut its own output, as by its over-voltage protection: no board does that.
        _ if at < plan.start * COLLAPSED => Err(Stop::NotArrived { set: sample.set, sense: at }),
        SwitchState::Off => Err(Stop::NotOn { at, current }),
        SwitchState::Neither => Err(Stop::Undecided { at, current }),
    }
}

/// Time of arming: up to the start voltage, or through nothing.
pub(super) fn arming(plan: &Plan) -> Duration {
    let cycle = if plan.latched { power_cycle::expected(plan) } else { Duration::ZERO };
    plan.settle + plan.up.dwell + plan.read_time + cycle
}

/// Brings the board into its off state by a voltage below its trip.
pub(super) async fn arm_off(desk: &Desk, plan: &Plan, below_trip: Volts) -> Result<(), Stop> {
    let mut sample = probe(desk, plan, below_trip, plan.down).await?;
    let patience = desk.now() + PATIENCE + plan.down.hold;
    while state(plan, &sample) != SwitchState::Off {
        if desk.now() >= patience {
            let current = sample.current.amps().unwrap_or(plan.on_range);
            return Err(Stop::Undecided { at: sample.terminals(), current });
        }
        desk.wait(ARM_POLL).await?;
        sample = desk.read().await?;
    }
    Ok(())
}

/// Share of the start voltage below which the supply is not supplying.
const COLLAPSED: f64 = 0.5;

const ARM_POLL: Duration = Duration::from_millis(20);
/// How long a board may take to reach a state it must reach.
const PATIENCE: Duration = Duration::from_secs(1);
