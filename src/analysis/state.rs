//! On, off or neither: told by the current the load would draw at the voltage that stands at the terminals.

use crate::profile::Load;
use crate::trace::Current;
use crate::units::{Amps, Volts};

/// The state of the switch as a reading shows it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum State {
    /// Closed: more than half the load's current flows.
    On,
    /// Open: next to none of the load's current flows.
    Off,
    /// In between, overloaded on a range that could not carry the load, or flowing backwards.
    Neither,
}

/// Share of the load's current above which the board is on.
const ON_SHARE: f64 = 0.5;
/// Share of the load's current below which the board is off.
const OFF_SHARE: f64 = 0.01;
/// A current within this many standard uncertainties of zero may be zero.
const OFF_UNCERTAINTIES: f64 = 5.0;

impl State {
    /// Judges `current`, read with standard `uncertainty` on `range`, against what `load` draws at `terminals`.
    ///
    /// An overload is on where the range could have shown an open switch and a leak beside; on a range smaller than
    /// that it says nothing about the load and is neither.
    pub fn of(
        current: Current,
        range: Option<Amps>,
        uncertainty: Amps,
        terminals: Volts,
        load: &Load,
    ) -> Self {
        let full = terminals / load.resistance;
        let on_above = full * ON_SHARE;
        let off_below = (full * OFF_SHARE).max(uncertainty * OFF_UNCERTAINTIES).min(on_above);
        match current.amps() {
            Some(amps) if amps > on_above => State::On,
            Some(amps) if amps.abs() < off_below => State::Off,
            None if range.is_none_or(|range| range >= off_below) => State::On,
            Some(_) | None => State::Neither,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units::{Ohms, Watts};

    const LOAD: Load = Load { resistance: Ohms(60.0), tolerance: 0.01, rating: Watts(3.0) };

    fn state(amps: f64) -> State {
        State::of(Current::Value(Amps(amps)), None, Amps::ZERO, Volts(6.0), &LOAD)
    }

    #[test]
    fn the_load_current_at_the_terminals_decides() {
        assert_eq!(state(0.1), State::On);
        assert_eq!(state(0.051), State::On);
        assert_eq!(state(0.049), State::Neither);
        assert_eq!(state(0.0011), State::Neither);
        assert_eq!(state(0.0009), State::Off);
        assert_eq!(state(-1e-6), State::Off);
    }

    #[test]
    fn current_out_of_the_board_and_no_number_are_neither() {
        assert_eq!(state(-0.1), State::Neither);
        assert_eq!(state(f64::NAN), State::Neither);
    }

    #[test]
    fn a_coarse_meter_widens_off_but_never_into_on() {
        let coarse = |amps, u| State::of(Current::Value(Amps(amps)), None, Amps(u), Volts(6.0), &LOAD);
        assert_eq!(coarse(0.02, 0.006), State::Off);
        assert_eq!(coarse(0.06, 0.1), State::On);
        assert_eq!(coarse(0.04, 0.1), State::Off);
    }

    #[test]
    fn an_overload_is_on_unless_the_range_is_too_small_to_tell() {
        let overload = |range| State::of(Current::OVERLOAD, range, Amps::ZERO, Volts(6.0), &LOAD);
        assert_eq!(overload(Some(Amps(0.05))), State::On);
        assert_eq!(overload(None), State::On);
        assert_eq!(overload(Some(Amps(1e-4))), State::Neither);
    }
}
