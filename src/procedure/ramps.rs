//! The delays from several rates: short ramps through each threshold, each half as fast as the one before.
//!
//! While the set-point moves on, a board changes the later along its way the faster the ramp. The ramp is a staircase; it
//! cannot show where within a step the threshold lies. So each rate is played several times, begun a part of a step
//! apart. Readings follow each other without a pause, as in the step test, so that each change is caught within one; the
//! last on each step is settled.

use super::Plan;
use super::desk::Desk;
use super::plan::Pace;
use super::probe::{arm_off, arm_on, arming, probe, state};
use super::walk::{Edge, band, set_points};
use crate::trace::{Stop, SwitchState};
use crate::units::Volts;
use std::time::Duration;

/// Ramps of each rate, each begun a further part of a step away.
const PHASES: u32 = 4;
/// The threshold, as far as it is known, lies in the middle between the set-points of all phases.
const HALF: f64 = 0.5;
/// Steps before the threshold is reached: enough to tell the rate.
const LEAD_IN: f64 = 3.0;
/// Height of the fastest ramp's steps, as a share of the hysteresis.
const HIGHEST: f64 = 1.0 / 12.0;
/// Readings after which a board that began to change must have changed.
const MOST_BETWEEN: usize = 6;
/// A board that has not changed after this, or ten times its longest delay, is left as it is.
const LONGEST: Duration = Duration::from_secs(2);

/// Ramps of all rates through the thresholds whose delays are asked for.
pub(super) async fn play_ramps(
    desk: &Desk,
    plan: &Plan,
    trip: Edge,
    re_enable: Option<Edge>,
) -> Result<(), Stop> {
    let below = (trip.changed - plan.survey_step).max(plan.floor);
    for height in heights(plan, trip, re_enable) {
        for phase in 0..PHASES {
            let shift = height * ((f64::from(phase) + HALF) / f64::from(PHASES));
            if plan.measure.detect_delay {
                arm_on(desk, plan).await?;
                let from = whole_digits(plan, trip.middle() + height * LEAD_IN + shift).min(plan.start);
                let down =
                    Ramp { from, to: plan.floor, height: -height, until: SwitchState::Off, pace: plan.down };
                down.play(desk, plan).await?;
            }
            if let Some(edge) = re_enable.filter(|_| plan.measure.release_delay) {
                arm_off(desk, plan, below).await?;
                let from = whole_digits(plan, edge.middle() - height * LEAD_IN - shift).max(below);
                let up = Ramp { from, to: plan.start, height, until: SwitchState::On, pace: plan.up };
                up.play(desk, plan).await?;
            }
        }
    }
    Ok(())
}

/// Heights of the steps, slowest ramp first, each twice the one before: whole digits of the supply, and as many of them as
/// there are phases where that is not too high.
fn heights(plan: &Plan, trip: Edge, re_enable: Option<Edge>) -> impl Iterator<Item = Volts> {
    let rates = plan.measure.ramp_rates.unwrap_or(0);
    let wanted = band(trip, re_enable) * HIGHEST / f64::from(1 << rates.saturating_sub(1));
    let parts = plan.set_step * f64::from(PHASES);
    let slowest = if wanted >= parts * MOST_OF_THEM {
        parts * (wanted / parts).round()
    } else {
        whole_digits(plan, wanted)
    };
    let slowest = slowest.max(plan.set_step);
    (0..rates).map(move |index| slowest * f64::from(1 << index))
}

/// Share of a digit for each phase from which on a step is rounded to whole ones for all.
const MOST_OF_THEM: f64 = 0.75;

fn whole_digits(plan: &Plan, volts: Volts) -> Volts {
    plan.set_step * (volts / plan.set_step).round()
}

/// One ramp through a threshold.
struct Ramp {
    from: Volts,
    to: Volts,
    height: Volts,
    until: SwitchState,
    pace: Pace,
}

impl Ramp {
    async fn play(&self, desk: &Desk, plan: &Plan) -> Result<(), Stop> {
        let mut changed = state(plan, &probe(desk, plan, self.from, self.pace).await?) == self.until;
        let end = desk.now() + LONGEST.max(self.pace.hold);
        for volts in set_points(self.from + self.height, self.to, self.height) {
            if changed || desk.now() > end {
                break;
            }
            desk.set(volts).await?;
            changed = self.read(desk, plan).await?;
        }
        Ok(())
    }

    /// Reads until the step has settled; true when the board began to change, and then until it has.
    async fn read(&self, desk: &Desk, plan: &Plan) -> Result<bool, Stop> {
        for _ in 0..readings(plan) {
            let mut found = state(plan, &desk.read().await?);
            if found != self.until && found != SwitchState::Neither {
                continue;
            }
            for _ in 0..MOST_BETWEEN {
                // Once more in any case, so that the trace shows the whole of the state after.
                let last = std::mem::replace(&mut found, state(plan, &desk.read().await?));
                if last == self.until && found == self.until {
                    break;
                }
            }
            return Ok(true);
        }
        Ok(false)
    }
}

/// Readings of one step: the last begins when the step has settled.
fn readings(plan: &Plan) -> u32 {
    1 + (plan.settle.as_secs_f64() / plan.read_time.as_secs_f64().max(1e-6)).ceil().min(MOST_READINGS) as u32
}

const MOST_READINGS: f64 = 100.0;

/// Time the ramps take on a board of the longest delays.
pub(super) fn expected(plan: &Plan) -> Duration {
    let probe = |pace: Pace| plan.settle + pace.dwell + plan.read_time;
    let ramp = |asked: bool, pace: Pace| {
        let steps = plan.read_time * readings(plan) * (LEAD_IN as u32 + 2) + plan.read_time;
        if asked { arming(plan) + probe(pace) + steps + pace.dwell } else { Duration::ZERO }
    };
    let both = ramp(plan.measure.detect_delay, plan.down)
        + ramp(plan.measure.release_delay && !plan.latched, plan.up);
    both * PHASES * plan.measure.ramp_rates.unwrap_or(0)
}

#[cfg(test)]
mod tests {
    use super::super::tests::plan;
    use super::*;
    use crate::profile::Ramp as Mode;

    fn heights_of(digit: f64, rates: u32, hysteresis: f64) -> Vec<f64> {
        let mut plan = Plan { set_step: Volts(digit), ..plan(Mode::Search { resolution: Volts(2e-3) }) };
        plan.measure.ramp_rates = Some(rates);
        let edge = |unchanged| Edge { unchanged: Volts(unchanged), changed: Volts(unchanged) };
        let heights = heights(&plan, edge(6.0), Some(edge(6.0 + hysteresis)));
        heights.map(|height| (height.0 * 1e6).round() / 1e3).collect()
    }

    /// By hand: a twelfth of 400 mV is 33 mV, a quarter of that 8.3 mV, in fours of a digit 8 mV.
    #[test]
    fn steps_are_whole_digits_and_double_from_rate_to_rate() {
        assert_eq!(heights_of(1e-3, 3, 0.4), [8.0, 16.0, 32.0]);
        assert_eq!(heights_of(1e-3, 5, 0.4), [2.0, 4.0, 8.0, 16.0, 32.0]);
        assert_eq!(heights_of(1e-3, 3, 0.02), [1.0, 2.0, 4.0], "never less than a digit");
        assert_eq!(heights_of(10e-3, 3, 0.4), [10.0, 20.0, 40.0], "fours would be too high");
    }

    #[test]
    fn a_step_is_read_until_it_has_settled() {
        let plan = plan(Mode::Search { resolution: Volts(2e-3) });
        let with = |settle, read_time| {
            readings(&Plan {
                settle: Duration::from_millis(settle),
                read_time: Duration::from_millis(read_time),
                ..plan.clone()
            })
        };
        assert_eq!((with(15, 20), with(50, 20), with(0, 20)), (2, 4, 1));
    }
}
