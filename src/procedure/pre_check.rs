//! Before any real voltage: is the board dead, not shorted, and the right way round?

use super::desk::Desk;
use super::plan::{PRE_CHECK_HIGH, PRE_CHECK_LOW};
use super::{Action, Plan};
use crate::trace::{Sample, Stop};
use crate::units::{Amps, Volts};
use std::time::Duration;

/// Output verified off, protections set in the supply, then 0.3 V and 1 V with little current.
///
/// At 0.3 V no semiconductor conducts: more current than the load draws is a short. At 1 V a detector does not work
/// yet and the switch is open: a current well below the load's, or well above it where there was no short, is a diode
/// in forward direction, so the board is probably reversed. A current like the load's is a closed switch, which the
/// ramp will judge, once a second look has shown that it is straight.
pub(super) async fn pre_check(desk: &Desk, plan: &Plan) -> Result<(), Stop> {
    desk.order(Action::OutputOff).await?;
    let current_limit = plan.pre_check_limit(PRE_CHECK_LOW);
    desk.order(Action::Protect { over_voltage: plan.over_voltage, current_limit }).await?;
    desk.order(Action::Range(plan.on_range)).await?;
    desk.wait(plan.range_settle).await?;
    wait_until_dead(desk, plan.voltmeter).await?;

    desk.set(PRE_CHECK_LOW).await?;
    desk.order(Action::OutputOn).await?;
    let low = settled(desk, plan).await?;
    if more_than_load(plan, &low) {
        return Err(Stop::ShortCircuit { at: low.terminals(), current: current(&low) });
    }

    let high = with_little_current(desk, plan, PRE_CHECK_HIGH).await?;
    let load = load_current(plan, high.set);
    if current(&high) <= (load * DIODE.0).max(plan.on_zero()) {
        return Ok(());
    }
    if more_than_load(plan, &high) || current(&high) < load * DIODE.1 {
        return Err(Stop::ConductsBackwards { at: high.terminals(), current: current(&high) });
    }
    // As much as the load: a closed switch, or a diode whose resistance happens to fit at this voltage.
    let higher = with_little_current(desk, plan, PRE_CHECK_HIGH * KNEE_STEP).await?;
    let straight = current(&high) * (higher.set / high.set);
    if more_than_load(plan, &higher) || current(&higher) > straight * KNEE + plan.on_zero() {
        return Err(Stop::ConductsBackwards { at: higher.terminals(), current: current(&higher) });
    }
    Ok(())
}

async fn with_little_current(desk: &Desk, plan: &Plan, volts: Volts) -> Result<Sample, Stop> {
    let volts = volts.min(plan.floor);
    desk.order(Action::LimitCurrent(plan.pre_check_limit(volts))).await?;
    desk.set(volts).await?;
    settled(desk, plan).await
}

/// Current above this multiple of the load's is a short.
const SHORT: f64 = 1.5;
/// Shares of the load's current between which something other than the load conducts.
const DIODE: (f64, f64) = (0.02, 0.7);
/// A second look that much higher: a resistance draws as much more, a diode of 0.6 to 0.8 V at least half as much again.
const KNEE_STEP: f64 = 1.25;
/// Current above a straight line by this factor bends like a diode's.
const KNEE: f64 = 1.15;

/// A closed switch draws the load's current and no more; the limit stands at twice that.
fn more_than_load(plan: &Plan, sample: &Sample) -> bool {
    let most = load_current(plan, sample.set) * SHORT + plan.on_zero();
    sample.limited == Some(true) || current(sample) > most
}

/// An overloaded meter on a range that holds the current limit means at least that.
fn current(sample: &Sample) -> Amps {
    sample.current.amps().or(sample.range).unwrap_or(Amps(f64::INFINITY))
}

fn load_current(plan: &Plan, volts: Volts) -> Amps {
    volts / plan.load.resistance
}

async fn settled(desk: &Desk, plan: &Plan) -> Result<Sample, Stop> {
    desk.settle(plan, Duration::ZERO).await?;
    desk.read().await
}

/// With the output off nothing may stand at the terminals; charge left from before gets time to drain.
pub(super) async fn wait_until_dead(desk: &Desk, voltmeter: bool) -> Result<(), Stop> {
    if !voltmeter {
        return Ok(());
    }
    let patience = desk.now() + DRAIN;
    loop {
        let at = desk.read().await?.terminals();
        if at.abs() < DEAD {
            return Ok(());
        }
        if desk.now() >= patience {
            return Err(Stop::LiveBoard { at });
        }
        desk.wait(DRAIN_POLL).await?;
    }
}

/// Below this a board counts as discharged.
pub(super) const DEAD: Volts = Volts(0.1);
const DRAIN: Duration = Duration::from_secs(5);
/// Pause between looks at a draining board.
pub(super) const DRAIN_POLL: Duration = Duration::from_millis(20);
