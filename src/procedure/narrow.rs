//! Carries a search out: each step it asks for on the bench, what the board did back to it.

use super::Plan;
use super::confirm::{Confirmed, hold};
use super::descent::descend_to_floor;
use super::desk::Desk;
use super::off_current::measure_off_current;
use super::plan::Pace;
use super::probe::{probe, state};
use super::progress::{Stage, left};
use super::search::{Found, Search, SearchPlan, Step};
use super::walk::Edge;
use crate::trace::{Sample, Stop, SwitchState};
use crate::units::{Ohms, Volts};
use std::time::Duration;

/// What came of a search.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Narrowed {
    /// Each threshold is confirmed within a cell.
    Both {
        /// The cell's borders.
        trip: Edge,
        /// The same of the re-enable voltage.
        re_enable: Edge,
        /// On the way there it did what it had been seen not to do.
        contradicted: bool,
    },
    /// The board never trips, or never comes back.
    OneMissing,
    /// What the board did does not fit together.
    Odd,
}

/// Contradictions after which a board is odd.
const MOST_CONTRADICTIONS: u32 = 6;
/// Steps after which it is odd, too: twice as many as the widest range of the smallest cells can need.
const MOST_STEPS: u32 = 150;

/// Narrows both windows until each threshold is known to a cell, and looks below the trip, or finds that the board is
/// odd. The board is on at the start, as `armed` shows.
pub(super) async fn narrow(
    desk: &Desk,
    plan: &Plan,
    search_plan: &SearchPlan,
    armed: Sample,
) -> Result<Narrowed, Stop> {
    let mut hunt = Hunt {
        desk,
        plan,
        search_plan,
        search: Search::new(search_plan, &armed),
        down: plan.down,
        up: plan.up,
        at: plan.start,
        seen_off: false,
        been_below: false,
        load: armed.current.amps().map_or(plan.load.resistance, |current| armed.terminals() / current),
    };
    for _ in 0..MOST_STEPS {
        let step = hunt.search.next();
        hunt.tell_progress(step);
        let known = match step {
            Step::Probe(set_point) => hunt.probe(set_point).await?,
            Step::Hold(set_point) => hunt.hold(set_point).await?,
            Step::Done(found) => {
                hunt.finish(found).await?;
                return Ok(hunt.narrowed(found));
            }
        };
        if !known || hunt.search.contradictions() > MOST_CONTRADICTIONS {
            break;
        }
    }
    Ok(Narrowed::Odd)
}

/// A search under way on a bench.
struct Hunt<'r> {
    desk: &'r Desk,
    plan: &'r Plan,
    search_plan: &'r SearchPlan,
    search: Search,
    /// Longer waits than the plan's once the board proved slow.
    down: Pace,
    up: Pace,
    /// The present set-point.
    at: Volts,
    /// A reading with the board off has told how set-points and terminals go together there.
    seen_off: bool,
    /// The board has been taken down to the floor, and its off current read.
    been_below: bool,
    /// What draws the current of a board that is on, as seen when it was armed.
    load: Ohms,
}

impl Hunt<'_> {
    fn tell_progress(&self, step: Step) {
        let rest = |stage| left(self.plan, stage);
        let (stage, rest) = match step {
            Step::Done(_) => return,
            Step::Probe(set_point) if self.is_way_down(set_point) => (Stage::Descend, rest(Stage::Descend)),
            Step::Probe(_) if !self.search.is_narrow() => (Stage::Search, rest(Stage::ConfirmTrip)),
            _ if self.search.is_on() => (Stage::ConfirmTrip, rest(Stage::ConfirmTrip)),
            _ => (Stage::ConfirmReEnable, rest(Stage::ConfirmReEnable)),
        };
        self.desk.enter(stage, rest + Duration::from_secs_f64(self.search.expected()));
    }

    /// Probes a set-point; false when the board is neither on nor off there.
    async fn probe(&mut self, set_point: usize) -> Result<bool, Stop> {
        let was_on = self.search.is_on();
        let sample = self.approach(set_point).await?;
        let Some(on) = self.decided(sample).await? else { return Ok(false) };
        if on == was_on && self.search.contradicts_again(set_point) {
            // Once may be noise at a border. After that the board is slow, or a reading was wrong: that takes a wait to tell.
            self.watch(set_point, sample).await?;
            if self.search.is_on() != was_on {
                return Ok(true);
            }
        }
        self.search.note(set_point, on);
        if was_on && !self.search.is_on() && self.search.trip_is_settled() && !self.been_below {
            self.look_below().await?;
        }
        Ok(true)
    }

    /// True when all is known of the trip but that it is passed once more: that is on the way down to the floor.
    fn is_way_down(&self, set_point: usize) -> bool {
        let last = self.search.is_narrow() && self.search.trip_is_held() && !self.been_below;
        last && self.search.trips_at() == Some(set_point)
    }

    /// With the trip known and the board just below it: down to the floor, and the off current.
    async fn look_below(&mut self) -> Result<(), Stop> {
        self.been_below = true;
        self.desk.enter(Stage::Descend, left(self.plan, Stage::Descend));
        descend_to_floor(self.desk, self.plan, self.at).await?;
        measure_off_current(self.desk, self.plan).await?;
        self.at = self.plan.off_points.last().copied().unwrap_or(self.plan.floor);
        // A last reading here: the ammeter's change of range is no time that the next set-point stood.
        self.desk.read().await?;
        Ok(())
    }

    /// True for a reading with the whole of the load's current. One with a part of it may have caught a change.
    fn is_whole(&self, sample: &Sample) -> bool {
        let Some(current) = sample.current.amps() else { return true };
        current >= sample.terminals() / self.load * WHOLE
    }

    fn narrowed(&self, found: Found) -> Narrowed {
        let edge = |(unchanged, changed)| {
            let volts = |set_point| self.search_plan.grid.volts(set_point);
            Edge { unchanged: volts(unchanged), changed: volts(changed) }
        };
        let (trip, re_enable) = (self.search.trip_edge().map(edge), self.search.re_enable_edge().map(edge));
        match (found, trip, re_enable) {
            (Found::Both, Some(trip), Some(re_enable)) => {
                Narrowed::Both { trip, re_enable, contradicted: self.search.contradictions() > 0 }
            }
            _ => Narrowed::OneMissing,
        }
    }

    /// Looks below the trip, where that has not been done.
    async fn finish(&mut self, found: Found) -> Result<(), Stop> {
        let Some(trips_at) = self.search.trips_at() else { return Ok(()) };
        if self.been_below || found == Found::NeverTrips {
            return Ok(());
        }
        self.desk.enter(Stage::Descend, left(self.plan, Stage::Descend));
        self.at = self.search_plan.grid.volts(trips_at);
        probe(self.desk, self.plan, self.at, self.down).await?;
        self.look_below().await
    }

    /// Holds a set-point at which the board did not change; false when it is neither on nor off there.
    async fn hold(&mut self, set_point: usize) -> Result<bool, Stop> {
        let was_on = self.search.is_on();
        let sample = self.approach(set_point).await?;
        match self.decided(sample).await? {
            None => return Ok(false),
            Some(on) if on != was_on => self.search.note(set_point, on),
            Some(_) => {
                self.watch(set_point, sample).await?;
                if self.search.is_on() == was_on {
                    self.search.stood();
                }
            }
        }
        Ok(true)
    }

    /// Looks whether the board changes at rest, and notes it if it does.
    async fn watch(&mut self, set_point: usize, sample: Sample) -> Result<(), Stop> {
        let was_on = self.search.is_on();
        if let Confirmed::Moved { after } = self.wait(sample, was_on).await? {
            let slow = self.search.moved(set_point);
            self.look_longer(was_on, after);
            if slow {
                self.slow_down(was_on, after);
            }
        }
        Ok(())
    }

    async fn wait(&self, sample: Sample, on: bool) -> Result<Confirmed, Stop> {
        let expected = if on { SwitchState::On } else { SwitchState::Off };
        hold(self.desk, self.plan, sample, expected, self.pace(on)).await
    }

    /// The pace towards the threshold that comes next for a board that is on, or off.
    fn pace(&self, on: bool) -> Pace {
        if on { self.down } else { self.up }
    }

    fn slow_down(&mut self, on: bool, after: Duration) {
        let pace = if on { &mut self.down } else { &mut self.up };
        *pace = pace.slower(after);
    }

    /// The next hold outlasts the change that was seen, so that it can tell noise from a slow board.
    fn look_longer(&mut self, on: bool, after: Duration) {
        let pace = if on { &mut self.down } else { &mut self.up };
        pace.hold = pace.slower(after).hold;
    }

    /// Sets a set-point and reads there; where the board already stands it reads only.
    async fn approach(&mut self, set_point: usize) -> Result<Sample, Stop> {
        let target = self.search_plan.grid.volts(set_point);
        if target == self.at {
            return self.desk.read().await;
        }
        let on = self.search.is_on();
        if !on {
            self.come_near(target).await?;
        }
        self.at = target;
        probe(self.desk, self.plan, target, self.pace(on)).await
    }

    /// Goes up in steps so small that no overshoot passes `target` by a noticeable part of a cell: a board that
    /// came on by an overshoot would be taken for one that comes on at the set-point.
    async fn come_near(&mut self, target: Volts) -> Result<(), Stop> {
        let share = self.search_plan.overshoot;
        let noticeable = self.search_plan.grid.cell() * NOTICEABLE;
        while (target - self.at) * share > noticeable {
            // From here the overshoot peaks just at the target.
            let near = self.at + (target - self.at) / (1.0 + share);
            self.at = near;
            self.desk.set(near).await?;
            self.desk.settle(self.plan, Duration::ZERO).await?;
        }
        Ok(())
    }

    /// On or off, once the readings say so; `None` for a board that will not say.
    async fn decided(&mut self, first: Sample) -> Result<Option<bool>, Stop> {
        let mut sample = first;
        for look in 0..MOST_LOOKS {
            match state(self.plan, &sample) {
                SwitchState::On if look > 0 || self.is_whole(&sample) => return Ok(Some(true)),
                SwitchState::Off => {
                    if !self.seen_off {
                        self.seen_off = true;
                        self.search.seen_off(self.search_plan, &sample);
                    }
                    return Ok(Some(false));
                }
                SwitchState::On | SwitchState::Neither => sample = self.desk.read().await?,
            }
        }
        Ok(None)
    }
}

/// Share of a cell by which a voltage may be off without a word.
const NOTICEABLE: f64 = 0.1;
/// Share of the load's current above which it is whole.
const WHOLE: f64 = 0.99;
/// Readings after which a board that is neither on nor off is given up.
const MOST_LOOKS: usize = 4;
