//! Looking at a bench itself: meters at rest, the supply against the voltmeter, and the ammeter's small
//! ranges with an empty fixture or a known resistor.
//!
//! No board is tested. The same desk, the same actions and the same way out as for a run: whatever happens, the output
//! goes off and is read back.

use super::desk::Desk;
use super::plan::on_zero;
use super::pre_check::wait_until_dead;
use super::switch_off::output_off;
use super::{Ability, Action};
use crate::trace::{Ending, Sample, Stop};
use crate::units::{Amps, Volts};
use std::rc::Rc;
use std::time::Duration;

/// What is looked at, and the limits within which that is done.
#[derive(Clone, Debug, PartialEq)]
pub struct BenchWork {
    /// No set-point is ever higher.
    pub maximum: Volts,
    /// Over-voltage protection set in the supply.
    pub over_voltage: Volts,
    /// Current limit set in the supply.
    pub current_limit: Amps,
    /// Ammeter range that holds the current limit, and what an output capacitor may give besides.
    pub large_range: Amps,
    /// Current that a reading of zero on that range may show.
    pub large_zero: Amps,
    /// Ranges for small currents, smallest first.
    pub small_ranges: Vec<Amps>,
    /// Settling time of the supply after a step.
    pub settle: Duration,
    /// Settling time after a change of the ammeter's range.
    pub range_settle: Duration,
    /// How far the terminals may lie from the set-point.
    pub arrival_tolerance: Volts,
    /// Whether arrival can be measured.
    pub voltmeter: bool,
    /// Readings for each mean.
    pub readings: usize,
    /// What is done.
    pub task: Task,
}

/// What is done with a bench.
#[derive(Clone, Debug, PartialEq)]
pub enum Task {
    /// With the output off: every meter, the ammeter on its largest and its smallest range.
    Rest,
    /// With the output on at each of these voltages, from low to high: every meter, the ammeter on its large range.
    Steps(Vec<Volts>),
    /// With nothing in the fixture, or a known resistor that draws next to nothing, at each of these voltages: the
    /// ammeter on each small range.
    SmallRanges(Vec<Volts>),
}

/// Readings after a change of range that are not counted: the first may hold what went before.
const DISCARDED: usize = 2;

/// The large range carries at least this, whatever the current limit: capacitors at a supply's output do not know it.
const CARRIED: Amps = Amps(0.1);

/// Over-voltage protection above the highest voltage used, so that an error of the set-point does not trigger it.
const OVER_VOLTAGE: f64 = 1.05;

/// Ranges up to this full scale are for small currents, as those of a board that is off.
const SMALL: Amps = Amps(1e-3);

/// How long the terminals may take to arrive. A supply that cannot sink falls slowly, but here voltages only rise.
const ARRIVAL: Duration = Duration::from_secs(5);

/// Pause between looks at terminals that have not arrived.
const ARRIVAL_POLL: Duration = Duration::from_millis(50);

impl BenchWork {
    /// Work on a bench of this ability, with up to `highest` volts and `current_limit` or as little as it can.
    pub fn new(ability: &Ability, highest: Volts, current_limit: Amps, readings: usize, task: Task) -> Self {
        let current_limit = current_limit.max(ability.min_current);
        let largest = ability.ranges.last().copied().unwrap_or(current_limit);
        let carried = current_limit.max(CARRIED);
        let large_range = ability.ranges.iter().copied().find(|range| *range >= carried).unwrap_or(largest);
        let mut small_ranges: Vec<Amps> =
            ability.ranges.iter().copied().filter(|range| *range <= SMALL && *range < large_range).collect();
        if small_ranges.is_empty() {
            small_ranges.extend(ability.ranges.first());
        }
        Self {
            maximum: highest,
            over_voltage: (highest * OVER_VOLTAGE).max(LEAST_OVER_VOLTAGE).min(ability.max_voltage),
            current_limit,
            large_range,
            large_zero: on_zero(ability, large_range),
            small_ranges,
            settle: ability.settle,
            range_settle: ability.range_settle,
            arrival_tolerance: ability.arrival_tolerance,
            voltmeter: ability.voltmeter,
            readings,
            task,
        }
    }
}

/// Supplies have a least level of over-voltage protection, commonly 1 V; this is well above it.
const LEAST_OVER_VOLTAGE: Volts = Volts(2.0);

/// The whole of the work. Whatever ends it, the output is switched off.
pub(super) async fn run(desk: Rc<Desk>, work: BenchWork) -> Ending {
    desk.begin().await;
    let stop = match carry_out(&desk, &work).await {
        Ok(()) => Stop::Completed,
        Err(stop) => stop,
    };
    output_off(&desk, work.voltmeter, stop).await
}

async fn carry_out(desk: &Desk, work: &BenchWork) -> Result<(), Stop> {
    desk.order(Action::OutputOff).await?;
    change_range(desk, work, work.large_range).await?;
    wait_until_dead(desk, work.voltmeter).await?;
    match &work.task {
        Task::Rest => rest(desk, work).await,
        Task::Steps(volts) => {
            switch_on(desk, work).await?;
            for volts in volts {
                arrive(desk, work, *volts).await?;
                read(desk, work.readings).await?;
            }
            Ok(())
        }
        Task::SmallRanges(volts) => {
            switch_on(desk, work).await?;
            for volts in volts {
                let sample = arrive(desk, work, *volts).await?;
                if !is_nearly_nothing(work, &sample) {
                    // Something draws current: on a small range that would harm the meter's fuse.
                    return Ok(());
                }
                small_ranges(desk, work).await?;
            }
            Ok(())
        }
    }
}

/// With the output off nothing can flow that would harm a small range.
async fn rest(desk: &Desk, work: &BenchWork) -> Result<(), Stop> {
    read(desk, work.readings).await?;
    let smallest = work.small_ranges.first().copied().unwrap_or(work.large_range);
    if smallest < work.large_range {
        change_range(desk, work, smallest).await?;
        read(desk, DISCARDED + work.readings).await?;
        change_range(desk, work, work.large_range).await?;
    }
    Ok(())
}

/// From the largest of the small ranges down, which disturbs the path least, and back to the large one.
async fn small_ranges(desk: &Desk, work: &BenchWork) -> Result<(), Stop> {
    for range in work.small_ranges.iter().rev() {
        change_range(desk, work, *range).await?;
        read(desk, DISCARDED + work.readings).await?;
    }
    change_range(desk, work, work.large_range).await
}

/// Limits first, then 0 V, then the output.
async fn switch_on(desk: &Desk, work: &BenchWork) -> Result<(), Stop> {
    let (over_voltage, current_limit) = (work.over_voltage, work.current_limit);
    desk.order(Action::Protect { over_voltage, current_limit }).await?;
    desk.set(Volts::ZERO).await?;
    desk.order(Action::OutputOn).await
}

/// Sets a voltage and gives the terminals time to come there. What they do is for the analysis to say.
async fn arrive(desk: &Desk, work: &BenchWork, volts: Volts) -> Result<Sample, Stop> {
    desk.set(volts).await?;
    desk.wait(work.settle).await?;
    let patience = desk.now() + ARRIVAL;
    loop {
        let sample = desk.read().await?;
        let arrived = sample.sense.is_none_or(|sense| (sense - volts).abs() <= work.arrival_tolerance);
        // Terminals that a current limit holds down do not arrive, however long one waits.
        if arrived || sample.limited == Some(true) || desk.now() >= patience {
            return Ok(sample);
        }
        desk.wait(ARRIVAL_POLL).await?;
    }
}

fn is_nearly_nothing(work: &BenchWork, sample: &Sample) -> bool {
    sample.limited != Some(true)
        && sample.current.amps().is_some_and(|amps| amps.abs() <= work.large_zero + SMALL_CURRENT)
}

/// What a voltmeter, a clean fixture and a known resistor may draw together; the small ranges carry it.
pub const SMALL_CURRENT: Amps = Amps(10e-6);

async fn change_range(desk: &Desk, work: &BenchWork, range: Amps) -> Result<(), Stop> {
    desk.order(Action::Range(range)).await?;
    desk.wait(work.range_settle).await
}

async fn read(desk: &Desk, count: usize) -> Result<(), Stop> {
    for _ in 0..count {
        desk.read().await?;
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::super::{Event, Procedure};
    use super::*;
    use crate::trace::{BenchFault, Current, FaultKind, OutputState};

    fn ability() -> Ability {
        Ability {
            ranges: [1e-4, 1e-3, 1e-2, 1.0].map(Amps).to_vec(),
            zero_uncertainties: [2e-8, 1e-7, 1e-6, 6e-5].map(Amps).to_vec(),
            ..super::super::tests::ability()
        }
    }

    fn zeros_at(volts: &[f64]) -> BenchWork {
        let volts: Vec<Volts> = volts.iter().copied().map(Volts).collect();
        BenchWork::new(&ability(), Volts(5.8), Amps(5e-3), 3, Task::SmallRanges(volts))
    }

    /// All actions of the work on a bench where `current` flows, until the action with this number fails.
    fn actions(work: &BenchWork, current: f64, fails_at: usize) -> Vec<Action> {
        let mut procedure = Procedure::on_bench(work.clone());
        let (mut actions, mut set, mut range) = (Vec::new(), Volts::ZERO, None);
        let (mut now, mut event) = (Duration::ZERO, Event::Start);
        loop {
            now += Duration::from_millis(25);
            let action = procedure.handle(now, event);
            event = match &action {
                Action::SetVolts(volts) => {
                    set = *volts;
                    Event::Done
                }
                Action::OutputOff => {
                    set = Volts::ZERO;
                    Event::Done
                }
                Action::Range(full_scale) => {
                    range = Some(*full_scale);
                    Event::Done
                }
                Action::WaitUntil(until) => {
                    now = now.max(*until);
                    Event::Done
                }
                Action::Read => Event::Reading(Sample {
                    at: now,
                    set,
                    sense: Some(set),
                    current: Current::Value(Amps(current)),
                    load: None,
                    range,
                    limited: Some(false),
                    was_limited: None,
                }),
                _ => Event::Done,
            };
            if actions.len() == fails_at {
                let text = "on purpose".to_owned();
                event = Event::Failed(BenchFault { kind: FaultKind::NoReply, text });
            }
            actions.push(action);
            if let Some(Action::Finish(_)) = actions.last() {
                return actions;
            }
        }
    }

    fn place(actions: &[Action], wanted: &Action) -> usize {
        actions
            .iter()
            .position(|action| action == wanted)
            .unwrap_or_else(|| panic!("no {wanted:?} in {actions:?}"))
    }

    #[test]
    fn limits_and_no_voltage_come_before_the_output_and_each_small_range_is_read() {
        let actions = actions(&zeros_at(&[0.0, 5.8]), 0.6e-6, usize::MAX);
        let on = place(&actions, &Action::OutputOn);
        let protect = Action::Protect { over_voltage: Volts(5.8 * 1.05), current_limit: Amps(5e-3) };
        assert!(place(&actions, &protect) < on && place(&actions, &Action::SetVolts(Volts::ZERO)) < on);
        assert_eq!(place(&actions, &Action::OutputOff), 0);
        let ranges: Vec<f64> = actions
            .iter()
            .filter_map(|action| if let Action::Range(range) = action { Some(range.0) } else { None })
            .collect();
        assert_eq!(ranges, [1.0, 1e-3, 1e-4, 1.0, 1e-3, 1e-4, 1.0]);
        let Some(Action::Finish(ending)) = actions.last() else { panic!("{actions:?}") };
        assert_eq!((&ending.stop, ending.output), (&Stop::Completed, OutputState::Off));
    }

    #[test]
    fn what_draws_current_keeps_the_ammeter_off_its_small_ranges() {
        let actions = actions(&zeros_at(&[5.8]), 5e-3, usize::MAX);
        let small = |action: &&Action| matches!(action, Action::Range(range) if *range < Amps(1.0));
        assert_eq!(actions.iter().filter(small).count(), 0);
    }

    #[test]
    fn wherever_it_fails_the_last_order_is_to_switch_off() {
        for task in
            [Task::Rest, Task::Steps(vec![Volts(1.0)]), Task::SmallRanges(vec![Volts(0.0), Volts(5.8)])]
        {
            let work = BenchWork::new(&ability(), Volts(5.8), Amps(5e-3), 3, task);
            let whole = actions(&work, 0.0, usize::MAX).len();
            for fails_at in 0..whole {
                let actions = actions(&work, 0.0, fails_at);
                let orders = |action: &&Action| {
                    !matches!(action, Action::Read | Action::WaitUntil(_) | Action::Finish(_))
                };
                assert_eq!(actions.iter().rfind(orders), Some(&Action::OutputOff), "failed at {fails_at}");
            }
        }
    }

    #[test]
    fn a_voltage_above_the_maximum_is_never_set() {
        let work = BenchWork { maximum: Volts(5.0), ..zeros_at(&[5.8]) };
        let actions = actions(&work, 0.0, usize::MAX);
        assert!(!actions.contains(&Action::SetVolts(Volts(5.8))));
        let Some(Action::Finish(ending)) = actions.last() else { panic!("{actions:?}") };
        assert!(matches!(ending.stop, Stop::Fault(_)) && ending.output == OutputState::Off);
    }
}
