//! Which set-point to probe next, when both thresholds are looked for together.
//!
//! A threshold with hysteresis cannot be bisected: once tripped, the board stays off until it has been brought past the
//! other threshold. But the way back is itself a probe of the other one. So both windows are narrowed in turn: each
//! probe goes where the cost of all that is still to come is expected to be least, by [`table`]. When a window is down to
//! one cell, the board is held at the cell's border where it did not change, on the next way past it; and it must trip
//! a second time where it tripped. Only then is the cell believed.

mod grid;
mod prior;
mod side;
mod table;
mod window;

pub(super) use grid::Grid;
pub(super) use prior::{Belief, Reference};
pub use prior::{Prior, Spread};
use side::{Border, Side};
pub(super) use table::{Costs, Table};
use window::Window;

use crate::trace::Sample;
use crate::units::Volts;
use std::sync::Arc;

/// What a search must know, worked out once for a run.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct SearchPlan {
    pub(super) grid: Grid,
    pub(super) table: Arc<Table>,
    pub(super) trip: Belief,
    pub(super) re_enable: Belief,
    /// How far terminals and set-point may differ, drop in the leads aside.
    pub(super) tolerance: Volts,
    /// Share of an upward step by which the supply may overshoot.
    pub(super) overshoot: f64,
}

impl SearchPlan {
    pub(super) fn table(costs: Costs) -> Arc<Table> {
        Arc::new(Table::new(costs, table::LARGEST))
    }

    /// Expected cost of a search in windows as wide as the limits, in the unit of the costs.
    pub(super) fn expected(&self) -> f64 {
        let cells = |belief: &Belief| {
            let width = belief.window.map(|(low, high)| (high - low) / self.grid.cell());
            width.unwrap_or(self.grid.cells() as f64).max(1.0)
        };
        self.table.on(cells(&self.trip), cells(&self.re_enable))
    }
}

/// What to do next. Set-points are indices of the [`Grid`].
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Step {
    /// Set this and see what the board does.
    Probe(usize),
    /// Hold this, where the board did not change, and see that nothing moves.
    Hold(usize),
    /// There is nothing left to ask.
    Done(Found),
}

/// What a search has found.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Found {
    /// Both thresholds.
    Both,
    /// On even at the floor.
    NeverTrips,
    /// Off even at the start.
    NeverReEnables,
}

/// Two windows that are narrowed together, and where the board stands.
#[derive(Clone, Debug)]
pub(super) struct Search {
    grid: Grid,
    table: Arc<Table>,
    on: bool,
    trip: Side,
    re_enable: Side,
    contradictions: u32,
}

impl Search {
    /// A search for a board that was `armed` on at the start.
    pub(super) fn new(plan: &SearchPlan, armed: &Sample) -> Self {
        let (grid, last) = (plan.grid, plan.grid.last());
        let on = plan.reference(armed);
        let off = Reference { ratio: 1.0, seen_at: None, tolerance: plan.tolerance };
        Self {
            grid,
            table: Arc::clone(&plan.table),
            on: true,
            trip: Side::new(plan.trip.weights(&grid, &on), 0, last + 1, TRIPS),
            re_enable: Side::new(plan.re_enable.weights(&grid, &off), 1, last + 2, RETURNS),
            contradictions: 0,
        }
    }

    /// What a reading with the board off says about set-points and terminals in that state.
    pub(super) fn seen_off(&mut self, plan: &SearchPlan, sample: &Sample) {
        let (low, high) = (self.re_enable.low(), self.re_enable.high());
        self.re_enable.window = Window::new(plan.re_enable.weights(&self.grid, &plan.reference(sample)));
        self.re_enable.window.narrow(low, high);
    }

    /// Whether the board is on.
    pub(super) fn is_on(&self) -> bool {
        self.on
    }

    /// Whether each threshold is down to one cell, confirmed or not.
    pub(super) fn is_narrow(&self) -> bool {
        self.trip.window.is_single() && self.re_enable.window.is_single()
    }

    /// Whether the trip is known to a cell and the border above it has been held.
    pub(super) fn trip_is_held(&self) -> bool {
        self.trip.is_held()
    }

    /// Whether there is nothing left to ask of the trip.
    pub(super) fn trip_is_settled(&self) -> bool {
        self.trip.is_settled()
    }

    /// How often the board did what it had been seen not to do.
    pub(super) fn contradictions(&self) -> u32 {
        self.contradictions
    }

    /// The set-point at which the board is known to trip; `None` when it never did.
    pub(super) fn trips_at(&self) -> Option<usize> {
        self.trip.low().checked_sub(1)
    }

    /// The last set-point at which the board stayed on, and the first at which it trips.
    pub(super) fn trip_edge(&self) -> Option<(usize, usize)> {
        Some((self.trip.high() - 1, self.trips_at()?))
    }

    /// The last set-point at which the board stayed off, and the first at which it comes back.
    pub(super) fn re_enable_edge(&self) -> Option<(usize, usize)> {
        Some((self.re_enable.low() - 1, self.comes_back_at()?))
    }

    /// The set-point at which it is known to come back; `None` when it never did.
    fn comes_back_at(&self) -> Option<usize> {
        let set_point = self.re_enable.high() - 1;
        (set_point <= self.grid.last()).then_some(set_point)
    }

    /// Expected cost from here to the end, the confirmation aside, in the unit of the costs.
    pub(super) fn expected(&self) -> f64 {
        let (f, r) = (self.trip.window.size(), self.re_enable.window.size());
        if self.on { self.table.on(f, r) } else { self.table.off(f, r) }
    }

    /// What to do next.
    pub(super) fn next(&self) -> Step {
        let side = if self.on { &self.trip } else { &self.re_enable };
        if !side.window.is_single() {
            return Step::Probe(self.best());
        }
        let (unchanged, changed) = if self.on {
            (self.trip.high() - 1, self.trips_at())
        } else {
            (self.re_enable.low() - 1, self.comes_back_at())
        };
        match changed {
            _ if !side.held => Step::Hold(unchanged),
            None if self.on => Step::Done(Found::NeverTrips),
            None => Step::Done(Found::NeverReEnables),
            Some(_) if self.trip.is_settled() && self.re_enable.is_settled() => Step::Done(Found::Both),
            Some(changed) => Step::Probe(changed),
        }
    }

    /// The cheapest probe: inside the window of this state, or straight through to the other state and inside that one's.
    fn best(&self) -> usize {
        let (down, up) = (self.best_split_down(), self.best_split_up());
        let (own, other, through, cost) = if self.on {
            (down, up, self.trips_at(), self.table.costs.down)
        } else {
            (up, down, self.comes_back_at(), self.table.costs.up)
        };
        match through {
            Some(through) if cost + other.1 < own.1 => through,
            _ => own.0,
        }
    }

    fn best_split_down(&self) -> (usize, f64) {
        let (trip, r) = (&self.trip.window, self.re_enable.window.size());
        best(trip, |split, below| {
            let on = self.table.on(trip.size_below(split), r);
            let off = self.table.off(trip.size_above(split), r);
            self.table.costs.down + below * on + (1.0 - below) * off
        })
    }

    fn best_split_up(&self) -> (usize, f64) {
        let (re_enable, f) = (&self.re_enable.window, self.trip.window.size());
        best(re_enable, |split, below| {
            let on = self.table.on(f, re_enable.size_below(split));
            let off = self.table.off(f, re_enable.size_above(split));
            self.table.costs.up + below * on + (1.0 - below) * off
        })
    }

    /// True for a set-point at which the board in its present state has been seen to change, when such a one has proved
    /// false before.
    pub(super) fn contradicts_again(&self, set_point: usize) -> bool {
        let split = set_point + 1;
        if self.on {
            split <= self.trip.low() && self.trip.contradicted > 0
        } else {
            split >= self.re_enable.high() && self.re_enable.contradicted > 0
        }
    }

    /// The board is on, or off, at `set_point`.
    pub(super) fn note(&mut self, set_point: usize, on: bool) {
        let split = set_point + 1;
        let changed = self.on != on;
        let (stays, passes) = if on {
            // On, a board is above its trip; one that was off before has passed its re-enable voltage.
            let stays = self.trip.below(split, Border::Unchanged);
            (stays, changed && self.re_enable.below(split, Border::Changed))
        } else {
            let stays = self.re_enable.above(split, Border::Unchanged);
            (stays, changed && self.trip.above(split, Border::Changed))
        };
        self.contradictions += u32::from(stays || passes);
        self.on = on;
    }

    /// Nothing moved while the board was held.
    pub(super) fn stood(&mut self) {
        self.own().held = true;
    }

    /// The board changed while it was held at `set_point`. The first time noise may have done that, and the threshold
    /// lies in the next cell; after that the board is slow, and all the cells beyond are open again. True when it is slow.
    pub(super) fn moved(&mut self, set_point: usize) -> bool {
        let (was_on, split) = (self.on, set_point + 1);
        let side = self.own();
        side.moved += 1;
        let slow = side.moved > 1;
        let (low, high) = match (was_on, slow) {
            (true, false) => (split, split + 1),
            (true, true) => (split, side.widest.1),
            (false, false) => (set_point, split),
            (false, true) => (side.widest.0, split),
        };
        side.reopen(low, high);
        side.pass();
        let odd = side.moved > MOST_MOVES;
        self.contradictions += u32::from(odd);
        self.note(set_point, !was_on);
        slow
    }

    /// The threshold that is next in this state.
    fn own(&mut self) -> &mut Side {
        if self.on { &mut self.trip } else { &mut self.re_enable }
    }
}

/// A contact that opens for a moment looks like a trip, so one is believed when it was seen twice.
const TRIPS: u32 = 2;
/// No contact closes a switch, and no overshoot was let near: coming back is believed at once.
const RETURNS: u32 = 1;

/// Changes at rest after which a board is odd, and not only slow.
const MOST_MOVES: u32 = 3;

/// The cheapest split of a window, as the set-point below it, and its cost; infinite for a window of one cell.
fn best(window: &Window, cost: impl Fn(usize, f64) -> f64) -> (usize, f64) {
    let mut best = (window.low(), f64::INFINITY);
    let (first, end) = window.splits();
    for split in first..end {
        let cost = cost(split, window.share_below(split));
        if cost < best.1 {
            best = (split - 1, cost);
        }
    }
    best
}

impl SearchPlan {
    /// How set-points and terminals go together at a reading; one that cannot be is not used.
    fn reference(&self, sample: &Sample) -> Reference {
        let ratio = sample.sense.map_or(f64::NAN, |sense| sense / sample.set);
        if (LEAST_RATIO..=MOST_RATIO).contains(&ratio) {
            return Reference { ratio, seen_at: Some(sample.set), tolerance: self.tolerance };
        }
        Reference { ratio: 1.0, seen_at: None, tolerance: self.tolerance }
    }
}

/// Terminals lie below the set-point by the drop in the leads, of which no bench has more than this...
const LEAST_RATIO: f64 = 0.8;
/// ... and above it by the supply's error, or while they have not come down.
const MOST_RATIO: f64 = 1.02;

#[cfg(test)]
mod tests;
