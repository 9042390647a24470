//! A board and a bench: drawn from a seed around what a profile describes, or given, and under named conditions.

mod bench_conditions;
mod board_conditions;

use super::draw::{Concern, Draw};
use super::good_board::{fit_off_paths, good_board, noise};
use super::link_faults::LinkFault;
use super::temperature::ROOM;
use super::{
    AmmeterModel, AmmeterRange, BoardModel, Condition, Ripple, SupplyModel, VoltmeterModel, Wiring, class,
};
use crate::procedure::Ability;
use crate::profile::Profile;
use crate::trace::{Burst, Claims, RangeAccuracy, Slew, Times};
use crate::units::{Amps, Celsius, Ohms, Volts};
use std::time::Duration;

/// Time constants until a small step has arrived.
const SETTLE_CONSTANTS: u32 = 5;

/// A slew of less for each volt is hidden in the time to settle.
const LEAST_STATED: Duration = Duration::from_millis(1);

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
    /// Hum of the mains at the board, where there is any.
    pub ripple: Option<Ripple>,
    /// Temperature of the board; its parameters are those at this temperature.
    pub temperature: Celsius,
    /// How somebody left the bench, where it was not left off.
    pub left_on: Option<LeftOn>,
    /// What will go wrong between the program and the instruments.
    pub link_faults: Vec<LinkFault>,
    /// Seed of all noise.
    pub seed: u64,
}

/// How the voltmeter of a simulated bench reads in quick succession: six periods of 50 Hz mains.
#[derive(Clone, Copy, Debug)]
pub struct ShortReadings;

impl ShortReadings {
    /// Time over which one is averaged.
    pub const APERTURE: Duration = Duration::from_millis(1);
    /// Pause between two.
    pub const PAUSE: Duration = Duration::from_millis(2);

    /// Time of a burst.
    pub fn time() -> Duration {
        (Self::APERTURE + Self::PAUSE) * Burst::LENGTH
    }
}

/// A bench that somebody left with its output on.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct LeftOn {
    /// The voltage it was left at.
    pub volts: Volts,
    /// Whether the board was on; both may be so between its thresholds.
    pub board_on: bool,
}

impl Setup {
    /// Draws a board and a bench under one condition, as [`Setup::with`] does.
    pub fn new(profile: &Profile, condition: Condition, seed: u64) -> Self {
        Self::with(profile, &[condition], seed)
    }

    /// Draws a board and a bench. The same seed gives the same board under every condition, but for what the
    /// conditions change, and each changes as much as it does alone.
    pub fn with(profile: &Profile, conditions: &[Condition], seed: u64) -> Self {
        let mut draw = Draw::new(seed, Concern::Board);
        let mut board = good_board(profile, &mut draw);
        board.noise = noise(profile, board.trip, &mut Draw::new(seed, Concern::NoiseLevel));
        fit_off_paths(&mut board, &profile.off_paths, &mut Draw::new(seed, Concern::OffPaths));
        let wiring = Wiring::plain(Ohms(draw.between(0.04, 0.12)));
        let mut setup = Self::of(board, wiring, seed);
        setup.put_under(conditions, profile, &draw);
        setup
    }

    /// This very board, wired like this, on a bench drawn from a seed.
    pub fn of(board: BoardModel, wiring: Wiring, seed: u64) -> Self {
        let (ammeter, voltmeter, load_voltmeter) = class::meters(seed);
        Self {
            board,
            supply: class::supply(seed),
            ammeter,
            voltmeter,
            load_voltmeter,
            wiring,
            ripple: None,
            temperature: ROOM,
            left_on: None,
            link_faults: Vec::new(),
            seed,
        }
    }

    /// The same under conditions; how much they change is measured by the profile's limits and drawn from the seed.
    #[must_use]
    pub fn under(mut self, conditions: &[Condition], profile: &Profile) -> Self {
        self.put_under(conditions, profile, &Draw::new(self.seed, Concern::Conditions));
        self
    }

    /// The same board, drawn for a room, at another temperature.
    #[must_use]
    pub fn at(mut self, temperature: Celsius) -> Self {
        self.board = self.board.at(temperature);
        self.temperature = temperature;
        self
    }

    fn put_under(&mut self, conditions: &[Condition], profile: &Profile, draw: &Draw) {
        for condition in conditions {
            board_conditions::apply(*condition, self, profile, &mut draw.clone());
            bench_conditions::apply(*condition, self, &mut draw.clone());
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
            short_readings: Some(ShortReadings::time()),
            ranges: self.ammeter.ranges.iter().map(|range| Amps(range.meter.full_scale)).collect(),
            range_settle: self.ammeter.range_settle,
            max_voltage: supply.max_voltage,
            max_current: supply.max_current,
            min_current: supply.min_current,
            set_step: supply.set_step,
            settle: supply.time_constant * SETTLE_CONSTANTS,
            slew: self.slew(),
            overshoot: supply.overshoot,
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

    /// What a maker of the supply would state of far steps: where it slews so slowly that it takes longer than the digits
    /// of a definition show.
    fn slew(&self) -> Slew {
        let per_volt = Duration::from_secs_f64((1.0 / self.supply.slew).clamp(0.0, 10.0));
        let per_volt = if per_volt < LEAST_STATED { Duration::ZERO } else { per_volt };
        Slew { up: per_volt, down: per_volt }
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
            load: self.load_voltmeter.range_for(self.highest_voltage()).map(|range| range.claim),
            current: self.ammeter.ranges.iter().map(line).collect(),
            lead_resistance: None,
            sense_resistance: self.voltmeter.input_resistance,
            slew: self.slew(),
            fixture: Some(self.temperature),
            times: Some(Times {
                integration: self.ammeter.integration,
                settle: self.supply.time_constant * SETTLE_CONSTANTS,
            }),
            ..Claims::default()
        }
    }

    fn highest_voltage(&self) -> Volts {
        self.board.re_enable() * HIGHEST_OF_RE_ENABLE
    }
}
