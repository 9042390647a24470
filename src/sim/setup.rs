//! A board and a bench drawn from a seed, around what a profile describes and a named condition.

use super::draw::{Concern, Draw};
use super::good_board::{good_board, window};
use super::{
    AmmeterModel, AmmeterRange, BoardModel, Condition, LoadWiring, Polarity, SupplyModel, Switch,
    VoltmeterModel, Wiring, class,
};
use crate::procedure::Ability;
use crate::profile::{Profile, QuantityName};
use crate::trace::{Claims, RangeAccuracy};
use crate::units::{Amps, Ohms, Volts};
use std::time::Duration;

/// Time constants until a small step has arrived.
const SETTLE_CONSTANTS: u32 = 5;

/// How close to its final value the output then is.
const SETTLED_WITHIN: Volts = Volts(2e-3);

/// The highest voltage a run is likely to use, as a multiple of the re-enable voltage.
const HIGHEST_OF_RE_ENABLE: f64 = 1.25;

/// Everything a [`World`](super::World) needs: plain parameters.
#[derive(Clone, Debug, PartialEq)]
pub struct Setup {
    /// The board.
    pub board: BoardModel,
    /// The supply.
    pub supply: SupplyModel,
    /// The ammeter in the supply line.
    pub ammeter: AmmeterModel,
    /// The voltmeter at the board's terminals.
    pub voltmeter: VoltmeterModel,
    /// The voltmeter at the load.
    pub load_voltmeter: VoltmeterModel,
    /// The leads and what is connected.
    pub wiring: Wiring,
    /// Seed of all noise.
    pub seed: u64,
}

impl Setup {
    /// Draws a board and a bench. The same seed gives the same board under every condition, but for what the
    /// condition changes.
    pub fn new(profile: &Profile, condition: Condition, seed: u64) -> Self {
        let mut draw = Draw::new(seed, Concern::Board);
        let board = good_board(profile, &mut draw);
        let (ammeter, voltmeter, load_voltmeter) = class::meters(seed);
        let wiring = Wiring {
            lead_resistance: Ohms(draw.between(0.04, 0.12)),
            load: LoadWiring::Connected,
            polarity: Polarity::Right,
        };
        let supply = class::supply(seed);
        let mut setup = Self { board, supply, ammeter, voltmeter, load_voltmeter, wiring, seed };
        setup.apply(condition, profile, &mut draw);
        setup
    }

    fn apply(&mut self, condition: Condition, profile: &Profile, draw: &mut Draw) {
        let limits = |name| window(profile, name);
        let board = &mut self.board;
        match condition {
            Condition::Good => {}
            Condition::NeverTrips => board.switch = Switch::StuckClosed,
            Condition::NeverOn => board.switch = Switch::StuckOpen,
            Condition::HighTrip => {
                let (min, max) = limits(QuantityName::Trip).unwrap_or((board.trip.0, board.trip.0 * 1.02));
                let trip = max + (max - min) * draw.between(0.4, 0.9);
                board.trip = Volts(trip).min(profile.supply.start - board.hysteresis * 1.1);
            }
            Condition::NarrowHysteresis => {
                let least = limits(QuantityName::Hysteresis).map_or(board.hysteresis.0, |(min, _)| min);
                board.hysteresis = Volts(least * draw.between(0.3, 0.7));
            }
            Condition::LeakingSwitch => {
                let most = limits(QuantityName::OffCurrent).map_or(10e-6, |(_, max)| max);
                board.leakage = Amps(most * draw.between(1.5, 5.0));
            }
            Condition::LowPullUp => board.pull_up = board.pull_up / 10.0,
            Condition::SlowDetector => {
                let slow = Duration::from_secs_f64(draw.between(0.06, 0.12));
                board.detect_delay = (profile.timing.detect_delay * 4).max(slow);
            }
            Condition::NoLoad => self.wiring.load = LoadWiring::Lifted,
            Condition::Reversed => self.wiring.polarity = Polarity::Reversed,
            Condition::Chatter => {
                let drop = board.hysteresis * draw.between(1.3, 1.6);
                self.wiring.lead_resistance = drop / (board.trip / board.load);
            }
            Condition::NoSink => {
                self.supply.sinks = false;
                self.supply.bleed = Amps(0.1e-3);
                self.supply.off_resistance = Ohms(10e3);
            }
        }
    }

    /// What this bench can do.
    pub fn ability(&self) -> Ability {
        let supply = &self.supply;
        let highest = self.highest_voltage().0;
        let sense = self.voltmeter.range_for(Volts(highest));
        let sense_limit = sense.map_or(0.0, |range| range.claim.limit(highest));
        Ability {
            voltmeter: true,
            load_voltmeter: true,
            ranges: self.ammeter.ranges.iter().map(|range| Amps(range.meter.full_scale)).collect(),
            range_settle: self.ammeter.range_settle,
            max_voltage: supply.max_voltage,
            max_current: supply.max_current,
            min_current: supply.min_current,
            set_step: supply.set_step,
            settle: supply.time_constant * SETTLE_CONSTANTS,
            read_time: self.ammeter.integration.max(self.voltmeter.integration),
            arrival_tolerance: SETTLED_WITHIN + Volts(supply.claim.limit(highest) + sense_limit),
            zero_uncertainties: self
                .ammeter
                .ranges
                .iter()
                .map(|range| Amps(range.meter.claim.standard_uncertainty(0.0)))
                .collect(),
        }
    }

    /// What the makers of the instruments claim.
    pub fn claims(&self) -> Claims {
        let line = |range: &AmmeterRange| RangeAccuracy {
            full_scale: Amps(range.meter.full_scale),
            accuracy: range.meter.claim,
        };
        Claims {
            set: Some(self.supply.claim),
            sense: self.voltmeter.range_for(self.highest_voltage()).map(|range| range.claim),
            current: self.ammeter.ranges.iter().map(line).collect(),
            lead_resistance: None,
            sense_resistance: self.voltmeter.input_resistance,
        }
    }

    fn highest_voltage(&self) -> Volts {
        self.board.re_enable() * HIGHEST_OF_RE_ENABLE
    }
}
