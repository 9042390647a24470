//! Where the next cycle looks, from what the cycles before it found.

use super::{Cycle, Place};
use crate::procedure::Window;

/// Set-points at which this board changed so far at this place: the first to change in each direction, so that a slow
/// ramp is not begun where only a fast one has not changed yet. `None` before the first cycle that found both.
pub fn window(kept: &[Cycle], place: Place) -> Option<Window> {
    let here = kept.iter().filter(|cycle| cycle.order.place() == place);
    let found = here.filter_map(|cycle| Some((cycle.trip.as_ref()?.set, cycle.re_enable.as_ref()?.set)));
    found.fold(None, |window, (trip, re_enable)| {
        Some(match window {
            None => Window { trip, re_enable },
            Some(known) => Window { trip: known.trip.max(trip), re_enable: known.re_enable.min(re_enable) },
        })
    })
}
