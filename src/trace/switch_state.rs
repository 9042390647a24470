//! Whether the switch was open or closed at a reading.

use super::Current;
use crate::units::{Amps, Ohms, Volts};

/// State of the switch as the current tells it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SwitchState {
    /// Closed: the load draws its current.
    On,
    /// Open: nothing but leakage flows.
    Off,
    /// In between; never rounded to either.
    Neither,
}

impl SwitchState {
    /// Tells the state from the current the load would draw at this voltage, not from one fixed number.
    ///
    /// On above half of `volts / load`; off below a hundredth of it, or below five standard uncertainties of the
    /// reading where that is more, either way: a large current out of the board is no open switch. An overloaded meter
    /// carries at least its range: on. A voltage of zero tells nothing.
    pub fn of(current: Current, volts: Volts, load: Ohms, uncertainty: Amps) -> Self {
        let Some(current) = current.amps() else { return Self::On };
        let full = volts / load;
        if volts > Volts::ZERO && current > full * ON_SHARE {
            Self::On
        } else if current.abs() < (full * OFF_SHARE).max(uncertainty * OFF_UNCERTAINTIES) {
            Self::Off
        } else {
            Self::Neither
        }
    }

    /// The same where a voltmeter reads the load, too: `load` behind the switch, `volts` before it.
    ///
    /// A load that has stopped by itself draws nothing, and the whole voltage stands at it behind a closed switch. Of a
    /// load that was never connected the same is true, so this is for boards that have been on before.
    #[must_use]
    pub fn with_load(self, load: Option<Volts>, volts: Volts) -> Self {
        match load {
            Some(load) if self == Self::Off && volts > LEAST && load > volts * WHOLE_SHARE => Self::On,
            _ => self,
        }
    }
}

const ON_SHARE: f64 = 0.5;
const OFF_SHARE: f64 = 0.01;
const OFF_UNCERTAINTIES: f64 = 5.0;
/// Share of the voltage that stands at a load without current behind a closed switch; the rest is error.
const WHOLE_SHARE: f64 = 0.9;
/// Below this the offsets of voltmeters count.
const LEAST: Volts = Volts(0.1);

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_load_decides_what_is_on() {
        let state = |amps| SwitchState::of(Current::Value(Amps(amps)), Volts(5.5), Ohms(55.0), Amps::ZERO);
        assert_eq!(state(0.1), SwitchState::On);
        assert_eq!(state(0.03), SwitchState::Neither);
        assert_eq!(state(2.4e-6), SwitchState::Off);
        assert_eq!(state(-0.1), SwitchState::Neither);
        assert_eq!(state(f64::NAN), SwitchState::Neither);
        assert_eq!(SwitchState::of(Current::OVERLOAD, Volts(5.5), Ohms(55.0), Amps::ZERO), SwitchState::On);
    }

    #[test]
    fn the_whole_voltage_at_a_load_without_current_is_a_closed_switch() {
        use SwitchState::{Neither, Off, On};
        let with = |state: SwitchState, load: Option<f64>| state.with_load(load.map(Volts), Volts(3.1));
        assert_eq!([with(Off, Some(3.1)), with(Off, Some(0.2)), with(Off, None)], [On, Off, Off]);
        assert_eq!([with(Neither, Some(3.1)), with(On, Some(0.0))], [Neither, On]);
        assert_eq!(Off.with_load(Some(Volts(0.01)), Volts(0.01)), Off, "a discharged board");
    }
}
