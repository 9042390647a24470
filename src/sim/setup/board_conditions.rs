//! What a condition changes about the board.

use super::Setup;
use crate::profile::{Profile, QuantityName};
use crate::sim::board::State;
use crate::sim::draw::Draw;
use crate::sim::good_board::window;
use crate::sim::{Condition, DeepConduction, Switch};
use crate::units::{Amps, Celsius, Farads, Siemens, Volts};
use std::time::Duration;

/// Gate capacitance of a power transistor; common practice for the size.
const GATE: Farads = Farads(1e-9);

/// A detector without a delay capacitor lets go this soon; typical of the class.
const UNDELAYED: Duration = Duration::from_micros(300);

/// Thresholds of the next lower voltage option, as a share of the right one's.
const NEXT_OPTION: f64 = 0.9;

/// Where and how much a switch conducts that is left alone by its detector.
const DEEP: DeepConduction = DeepConduction { from: Volts(0.55), to: Volts(0.85), peak: Amps(20e-3) };

/// Share of a limit's width by which thresholds that lie too close together are inside it.
const BARELY: f64 = 0.1;

/// Share of what is left below the limit of the off current that a film of flux takes.
const FILM: f64 = 0.65;

/// A board straight from the oven or left in the sun.
const HOT: Celsius = Celsius(60.0);

/// How much more than the current limit can deliver in the detect delay a large capacitor takes.
const TOO_LARGE: f64 = 2.3;

/// Changes the board of `setup`; conditions of the bench leave it alone.
pub(super) fn apply(condition: Condition, setup: &mut Setup, profile: &Profile, draw: &mut Draw) {
    let limits = |name| window(profile, name);
    let board = &mut setup.board;
    match condition {
        Condition::NeverTrips => board.switch = Switch::StuckClosed,
        Condition::NeverOn => board.switch = Switch::StuckOpen,
        Condition::DetectorStuckOn => board.switch = Switch::GateTied,
        Condition::HighTrip => {
            let (min, max) = limits(QuantityName::Trip).unwrap_or((board.trip.0, board.trip.0 * 1.02));
            let trip = max + (max - min) * draw.between(0.4, 0.9);
            board.trip = Volts(trip).min(profile.supply.start - board.hysteresis * 1.1);
        }
        Condition::NarrowHysteresis => {
            let least = limits(QuantityName::Hysteresis).map_or(board.hysteresis.0, |(min, _)| min);
            board.hysteresis = Volts(least * draw.between(0.3, 0.7));
        }
        Condition::WrongDetector => {
            board.trip = board.trip * NEXT_OPTION;
            board.hysteresis = board.hysteresis * NEXT_OPTION;
        }
        Condition::OverlappingThresholds => {
            let trip =
                limits(QuantityName::Trip).map_or(board.trip.0, |(min, max)| max - (max - min) * BARELY);
            let lowest = board.trip.0 + board.hysteresis.0 * 0.5;
            let re_enable =
                limits(QuantityName::ReEnable).map_or(lowest, |(min, max)| min + (max - min) * BARELY);
            board.trip = Volts(trip);
            board.hysteresis = Volts(re_enable - trip);
        }
        Condition::LeakingSwitch => {
            let most = limits(QuantityName::OffCurrent).map_or(10e-6, |(_, max)| max);
            board.leakage = Amps(most * draw.between(1.5, 5.0));
        }
        Condition::FluxFilm => {
            let at = profile.limits.get(&QuantityName::OffCurrent).and_then(|limit| limit.at);
            let at = at.map_or(board.trip.0, |volts| volts.0);
            let flows = board.branches(&setup.wiring, State { on: false, load_runs: true }, 0.0, at);
            let flows = flows.beside + flows.load_current;
            let most = limits(QuantityName::OffCurrent).map_or(2.0 * flows, |(_, max)| max);
            board.leakage_conductance += Siemens((most - flows).max(0.0) * FILM / at);
        }
        Condition::LowPullUp => board.pull_up = board.pull_up / 10.0,
        Condition::HighPullUp => {
            board.pull_up = board.pull_up * 10.0;
            board.gate_capacitance = GATE;
        }
        Condition::SlowDetector => {
            let slow = Duration::from_secs_f64(draw.between(0.06, 0.12));
            board.detect_delay = (profile.timing.detect_delay * 4).max(slow);
        }
        Condition::NoDelayCapacitor => board.release_delay = board.release_delay.min(UNDELAYED),
        Condition::SlowRelease => {
            board.release_delay = profile.timing.release_delay.mul_f64(draw.between(3.0, 6.0));
        }
        Condition::DeepConduction => {
            board.deep_conduction = Some(DEEP);
            board.minimum_operating = board.minimum_operating.max(DEEP.to);
        }
        Condition::Latched => board.latches = true,
        Condition::HotBoard => {
            *board = board.at(HOT);
            setup.temperature = HOT;
        }
        Condition::LargeLoadCapacitor => {
            let charge = profile.supply.current_limit.0 * board.detect_delay.as_secs_f64();
            board.load_capacitance = Farads(TOO_LARGE * charge / board.re_enable().0);
        }
        _ => {}
    }
}
