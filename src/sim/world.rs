//! The board on its bench, moving in simulated time: a supply's front panel, meters, and a clock.

use super::draw::{Concern, Draw};
use super::motion::{Motion, Sums};
use super::{Setup, Truth};
use crate::trace::Current;
use crate::units::{Amps, Celsius, Volts};
use std::time::Duration;

/// A board on its bench.
#[derive(Clone, Debug)]
pub struct World {
    setup: Setup,
    now: Duration,
    motion: Motion,
    noise: Draw,
    set: Volts,
    current_limit: Amps,
    over_voltage: Volts,
    range: usize,
    range_changed: Duration,
}

/// A moment from which meters average.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Mark {
    at: Duration,
    sums: Sums,
}

/// Means between a mark and the present.
struct Means {
    terminals: f64,
    current: f64,
    load: f64,
    aperture: Duration,
}

impl World {
    /// A bench just switched on: output off and at zero volts, ammeter on its largest range.
    pub fn new(setup: &Setup) -> Self {
        let range = setup.ammeter.largest();
        let mut world = Self {
            motion: Motion::new(setup, setup.ammeter.burden(range)),
            setup: setup.clone(),
            now: Duration::ZERO,
            noise: Draw::new(setup.seed, Concern::MeterNoise),
            set: Volts::ZERO,
            current_limit: Amps::ZERO,
            over_voltage: Volts::ZERO,
            range,
            range_changed: Duration::ZERO,
        };
        world.restart_supply();
        if let Some(found) = setup.left_on {
            world.set_volts(found.volts);
            world.set_output(true);
            world.motion.left_as(setup, found.board_on);
        }
        world
    }

    /// Time since the bench was switched on.
    pub fn now(&self) -> Duration {
        self.now
    }

    /// Lets time pass until `until`; does nothing when that is in the past.
    pub fn advance_to(&mut self, until: Duration) {
        if until > self.now {
            if self.setup.supply.drift != 0.0 {
                self.head_for_set();
            }
            self.motion.advance_to(&self.setup, until.as_secs_f64());
            self.now = until;
        }
    }

    /// Sets the voltage, clipped to the supply's range and rounded to its step.
    pub fn set_volts(&mut self, volts: Volts) {
        self.set = self.setup.supply.kept(volts);
        self.head_for_set();
    }

    /// Sends the output to where the supply takes the set-point to be at this moment.
    fn head_for_set(&mut self) {
        let supply = &self.setup.supply;
        let goal = (supply.true_output(self.set) + supply.drift_at(self.now)).max(0.0);
        self.motion.head_for(&self.setup, goal);
    }

    /// The voltage as the supply keeps it.
    pub fn volts(&self) -> Volts {
        self.set
    }

    /// Sets the current limit, clipped to the supply's range.
    pub fn set_current_limit(&mut self, limit: Amps) {
        self.current_limit = self.setup.supply.kept_limit(limit);
        self.motion.limit_current(&self.setup, self.setup.supply.true_limit(self.current_limit));
    }

    /// The current limit as the supply keeps it.
    pub fn current_limit(&self) -> Amps {
        self.current_limit
    }

    /// Sets the level at which the supply switches its output off by itself.
    pub fn set_over_voltage(&mut self, level: Volts) {
        self.over_voltage = self.setup.supply.kept_over_voltage(level);
        self.motion.protect(&self.setup, self.over_voltage.0);
    }

    /// The over-voltage level as the supply keeps it.
    pub fn over_voltage(&self) -> Volts {
        self.over_voltage
    }

    /// True after over-voltage protection has switched the output off, until it is switched on again.
    pub fn over_voltage_tripped(&self) -> bool {
        self.motion.over_voltage_tripped()
    }

    /// Switches the output.
    pub fn set_output(&mut self, on: bool) {
        self.motion.switch_output(&self.setup, on);
    }

    /// Whether the output is on.
    pub fn output(&self) -> bool {
        self.motion.output_on()
    }

    /// Whether the supply is limiting the current at this moment.
    pub fn limited(&self) -> bool {
        self.motion.limited()
    }

    /// Whether the supply has limited the current since this was last asked, however briefly.
    pub fn take_was_limited(&mut self) -> bool {
        self.motion.take_was_limited()
    }

    /// What a power cut leaves: output off, everything set forgotten. The capacitors keep their charge.
    pub fn restart_supply(&mut self) {
        self.set_output(false);
        self.set_volts(Volts::ZERO);
        self.set_current_limit(self.setup.supply.max_current);
        self.set_over_voltage(self.setup.supply.max_over_voltage);
    }

    /// Puts the ammeter on its smallest range that holds `current`, or its largest; returns the full scale.
    pub fn set_range(&mut self, current: Amps) -> Amps {
        self.use_range(self.setup.ammeter.range_for(current));
        self.range()
    }

    /// Full scale of the range that the ammeter says it is on.
    pub fn range(&self) -> Amps {
        Amps(self.setup.ammeter.ranges[self.range].meter.full_scale)
    }

    /// Puts the ammeter on its largest range, as when it is switched on.
    pub fn reset_meter_range(&mut self) {
        self.use_range(self.setup.ammeter.largest());
    }

    fn use_range(&mut self, range: usize) {
        if range != self.range {
            self.range = range;
            self.range_changed = self.now;
            self.motion.put_in_line(&self.setup, self.setup.ammeter.burden(range));
        }
    }

    /// The present moment, to average readings from.
    pub fn mark(&self) -> Mark {
        Mark { at: self.now, sums: self.motion.sums() }
    }

    /// Reads the voltmeter at the board's terminals, averaged since the mark.
    pub fn read_sense(&mut self, since: &Mark) -> Volts {
        let means = self.means(since);
        self.setup.voltmeter.read(means.terminals, means.aperture, &mut self.noise)
    }

    /// Reads the voltmeter at the load, averaged since the mark.
    pub fn read_load(&mut self, since: &Mark) -> Volts {
        let means = self.means(since);
        self.setup.load_voltmeter.read(means.load, means.aperture, &mut self.noise)
    }

    /// Reads the ammeter on its present range, averaged since the mark.
    pub fn read_current(&mut self, since: &Mark) -> Current {
        let means = self.means(since);
        let settled = (self.now - means.aperture / 2).saturating_sub(self.range_changed);
        self.setup.ammeter.read(self.range, means.current, means.aperture, settled, &mut self.noise)
    }

    /// The supply's own reading of its output, averaged since the mark.
    pub fn read_supply(&mut self, since: &Mark) -> (Volts, Amps) {
        let means = self.means(since);
        let volts = means.terminals + means.current * self.motion.series_resistance();
        self.setup.supply.read_back(volts - self.setup.supply.drift_at(self.now), means.current)
    }

    /// What the board really is.
    pub fn truth(&self) -> Truth {
        Truth::of(&self.setup)
    }

    /// Temperature of the board, as a thermometer in the fixture would show it.
    pub fn temperature(&self) -> Celsius {
        self.setup.temperature
    }

    /// Whether the board's detector says at this moment that the board is on.
    pub fn board_on(&self) -> bool {
        self.motion.board_on()
    }

    /// Means since the mark; the present values when no time has passed.
    fn means(&self, since: &Mark) -> Means {
        let aperture = self.now.saturating_sub(since.at);
        if aperture.is_zero() {
            let now = self.motion.instant(&self.setup);
            return self.with_hum(
                since,
                Means { terminals: now.terminals, current: now.current, load: now.load, aperture },
            );
        }
        let (from, to, time) = (since.sums, self.motion.sums(), aperture.as_secs_f64());
        let means = Means {
            terminals: (to.terminals - from.terminals) / time,
            current: (to.current - from.current) / time,
            load: (to.load - from.load) / time,
            aperture,
        };
        self.with_hum(since, means)
    }

    /// Adds what the averaging leaves of the mains hum; everything at the board follows it in proportion.
    fn with_hum(&self, since: &Mark, means: Means) -> Means {
        let Some(ripple) = self.setup.ripple.filter(|_| means.terminals > 0.0) else { return means };
        let share = 1.0 + ripple.mean(since.at, self.now) / means.terminals;
        Means {
            terminals: means.terminals * share,
            current: means.current * share,
            load: means.load * share,
            ..means
        }
    }
}
