//! A board as its profile describes it: parameters drawn from a seed, well inside the limits.

use super::draw::Draw;
use super::{BoardModel, PullUp, Switch};
use crate::profile::{Conducts, Draws, OffPath, Profile, QuantityName, noise_rate};
use crate::units::{Amps, Farads, Ohms, Siemens, Volts};

/// Share of a limit's width in which good boards lie, around its middle.
const CENTRAL: f64 = 0.7;

/// Shares of the longest delay between which good boards lie.
const DELAY: (f64, f64) = (0.2, 0.8);

/// Share of the detect delay that charging the load's capacitor against the current limit may take.
const CHARGE: f64 = 0.2;

/// Off current, and the voltage it is measured at as a share of the trip, where the profile says nothing.
const OFF_CURRENT: f64 = 2.5e-6;
const OFF_AT: f64 = 0.95;

/// Hysteresis as a share of the trip, where the profile says nothing; the usual share of plain detectors.
const HYSTERESIS: f64 = 0.05;

/// A range of values, low and high.
pub(super) type Window = (f64, f64);

/// The limits of a quantity as a window, a missing side put where the quantity would still be likely.
pub(super) fn window(profile: &Profile, name: QuantityName) -> Option<Window> {
    let limit = profile.limits.get(&name)?;
    match (limit.min, limit.max) {
        (Some(min), Some(max)) => Some((min, max)),
        (Some(min), None) => Some((min, min * 1.5)),
        (None, Some(max)) => Some((max * 0.5, max)),
        (None, None) => None,
    }
}

fn central((low, high): Window) -> Window {
    let (middle, half_width) = ((low + high) / 2.0, (high - low) / 2.0 * CENTRAL);
    (middle - half_width, middle + half_width)
}

/// Draws a good board.
pub(super) fn good_board(profile: &Profile, draw: &mut Draw) -> BoardModel {
    let supply = &profile.supply;
    let likely_trip = supply.floor.0 + (supply.start - supply.floor).0 / 3.0;
    let trip_window = window(profile, QuantityName::Trip).unwrap_or((likely_trip * 0.98, likely_trip * 1.02));
    let trip = draw.in_window(central(trip_window));
    let hysteresis = draw.in_window(hysteresis_window(profile, trip));
    let detect_delay = profile.timing.detect_delay.mul_f64(draw.in_window(DELAY));
    let release_delay = profile.timing.release_delay.mul_f64(draw.in_window(DELAY));
    let off_current =
        window(profile, QuantityName::OffCurrent).map_or(OFF_CURRENT, |w| draw.in_window(central(w)));
    let off_at = profile.limits.get(&QuantityName::OffCurrent).and_then(|limit| limit.at);
    let off_at = off_at.map_or(OFF_AT * trip, |volts| volts.0);
    let detector_current = off_current * draw.between(0.22, 0.28);
    let leakage = off_current * draw.between(0.0, 0.02);
    let chargeable = CHARGE * detect_delay.as_secs_f64() * supply.current_limit.0 / supply.start.0;
    BoardModel {
        trip: Volts(trip),
        hysteresis: Volts(hysteresis),
        detect_delay,
        release_delay,
        noise: Volts(0.0),
        noise_rate: noise_rate(detect_delay.min(release_delay)),
        minimum_operating: Volts(draw.between(0.7, 1.0)),
        pull_up: Ohms(off_at / (off_current - detector_current - 2.0 * leakage)),
        pull_up_conducts: PullUp::WhenOff,
        divider: Siemens::ZERO,
        detector_current: Amps(detector_current),
        leakage: Amps(leakage),
        leakage_conductance: Siemens(leakage / off_at),
        input_capacitance: Farads(1e-6),
        load: profile.load.resistance * (1.0 + draw.within(profile.load.tolerance * CENTRAL)),
        load_capacitance: profile.load.capacitance.unwrap_or(Farads(chargeable.min(10e-6))),
        gate_capacitance: Farads(0.0),
        latches: false,
        switch: Switch::Working,
        on_resistance: Ohms(draw.between(0.04, 0.08)),
        deep_conduction: None,
    }
}

/// Puts parts inside the tolerances of the profile's off-state budget in place of what was drawn from the limit of the
/// off current: what conducts in one state only is the pull-up, what always does the divider, a current the detector.
pub(super) fn fit_off_paths(board: &mut BoardModel, paths: &[OffPath], draw: &mut Draw) {
    let off = || paths.iter().filter(|path| path.conducts != Conducts::On);
    if off().next().is_none() {
        return;
    }
    let (mut pull_up, mut divider, mut current) = (0.0, 0.0, 0.0);
    for path in off() {
        let error = draw.within(path.tolerance * CENTRAL);
        match (path.draws, path.conducts) {
            (Draws::Resistance(ohms), Conducts::Always) => divider += 1.0 / (ohms.0 * (1.0 + error)),
            (Draws::Resistance(ohms), _) => pull_up += 1.0 / (ohms.0 * (1.0 + error)),
            (Draws::Current(amps), _) => current += amps.0 * (1.0 + error),
        }
    }
    board.pull_up = Ohms(1.0 / f64::max(pull_up, NO_PULL_UP));
    board.divider = Siemens(divider);
    board.detector_current = Amps(current);
    board.leakage = Amps(current * SMALL_LEAK);
    board.leakage_conductance = Siemens(0.0);
}

/// Conductance of a pull-up that is as good as none, S.
const NO_PULL_UP: f64 = 1e-12;

/// Draws the noise at the detector's input from what the profile states, or from what is usual: boards differ.
pub(super) fn noise(profile: &Profile, trip: Volts, draw: &mut Draw) -> Volts {
    profile.detector_noise(trip).above(draw.normal())
}

/// What a good switch leaks, as a share of the detector's current.
const SMALL_LEAK: f64 = 0.01;

/// Where hysteresis and re-enable are both well inside their limits; the hysteresis' own middle where they cannot be.
fn hysteresis_window(profile: &Profile, trip: f64) -> Window {
    let re_enable = window(profile, QuantityName::ReEnable).map(central);
    let from_re_enable = re_enable.map(|(low, high)| (low - trip, high - trip));
    let own = window(profile, QuantityName::Hysteresis).map(central);
    match (own, from_re_enable) {
        (Some(own), Some(other)) => {
            let both = (own.0.max(other.0), own.1.min(other.1));
            let middle = (own.0 + own.1) / 2.0;
            if both.0 <= both.1 { both } else { (middle, middle) }
        }
        (Some(only), None) | (None, Some(only)) => only,
        (None, None) => (HYSTERESIS * trip * 0.9, HYSTERESIS * trip * 1.1),
    }
}
