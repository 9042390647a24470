//! How a device measures: settings of its meters, integration in simulated time, and the search for a range.

use super::command::Probe;
use super::ratings::bounds_of;
use super::reply::INFINITY;
use super::{Device, SharedWorld};
use crate::sim::{Mark, World};
use crate::trace::Current;
use crate::units::{Amps, Volts};
use std::time::Duration;

/// One power line cycle at 50 Hz.
const LINE_CYCLE: Duration = Duration::from_millis(20);

/// A range reads up to this multiple of its full scale.
const OVER_RANGE: f64 = 1.2;

/// Below this share of full scale, a meter that looks for its range takes a smaller one.
const UNDER_RANGE: f64 = 0.1;

/// How one meter of a device is set.
#[derive(Clone, Copy, Debug)]
pub(super) struct MeterSettings {
    pub(super) auto_range: bool,
    pub(super) line_cycles: f64,
    /// Full scale of a voltmeter; an ammeter's stands in the world, where it is a resistor in the circuit.
    pub(super) volts_range: f64,
}

impl Device {
    pub(super) fn reset_meters(&mut self) {
        self.function = self.kind.probes().first().copied();
        self.last_reading = None;
        self.meters = self.kind.probes().iter().map(|probe| (*probe, self.default_settings())).collect();
    }

    fn default_settings(&self) -> MeterSettings {
        MeterSettings {
            auto_range: true,
            line_cycles: self.ratings.line_cycles.default,
            volts_range: bounds_of(&self.ratings.voltage_ranges).default,
        }
    }

    /// As [`Self::reset_meters`], for the one meter that is configured; a full scale fixes the range.
    pub(super) fn configure(&mut self, probe: Probe, full_scale: Option<f64>, world: &SharedWorld) {
        self.function = Some(probe);
        self.last_reading = None;
        self.meters.insert(probe, self.default_settings());
        if let Some(full_scale) = full_scale {
            self.fix_range(probe, full_scale, world);
        }
    }

    pub(super) fn fix_range(&mut self, probe: Probe, full_scale: f64, world: &SharedWorld) {
        self.settings(probe).auto_range = false;
        if probe == Probe::Current {
            world.with(|world| world.set_range(Amps(full_scale)));
        } else {
            let ranges = &self.ratings.voltage_ranges;
            let holds = ranges.iter().find(|range| **range * 1.000_001 >= full_scale).or(ranges.last());
            if let Some(range) = holds.copied() {
                self.settings(probe).volts_range = range;
            }
        }
    }

    pub(super) fn range(&mut self, probe: Probe, world: &SharedWorld) -> f64 {
        match probe {
            Probe::Current => world.with(|world| world.range()).0,
            _ => self.settings(probe).volts_range,
        }
    }

    pub(super) fn settings(&mut self, probe: Probe) -> &mut MeterSettings {
        let default = self.default_settings();
        self.meters.entry(probe).or_insert(default)
    }

    /// One reading, after the time it takes; an overload is the number that stands for infinity.
    pub(super) fn measure(&mut self, probe: Probe, world: &SharedWorld) -> f64 {
        let reading = match probe {
            Probe::OwnVolts => self.integrate(probe, world, |world, mark| world.read_supply(mark).0.0),
            Probe::OwnAmps => self.integrate(probe, world, |world, mark| world.read_supply(mark).1.0),
            Probe::Terminals => self.measure_volts(probe, world, World::read_sense),
            Probe::Load => self.measure_volts(probe, world, World::read_load),
            Probe::Current => self.measure_current(world),
        };
        self.last_reading = Some(reading);
        reading
    }

    fn measure_volts(
        &mut self,
        probe: Probe,
        world: &SharedWorld,
        read: impl Fn(&mut World, &Mark) -> Volts,
    ) -> f64 {
        let volts = self.integrate(probe, world, |world, mark| read(world, mark).0);
        let settings = self.settings(probe);
        if !settings.auto_range && volts.abs() > OVER_RANGE * settings.volts_range { INFINITY } else { volts }
    }

    /// The reading on the range set, or on the one that a search upwards and then downwards ends on.
    fn measure_current(&mut self, world: &SharedWorld) -> f64 {
        let read = |world: &mut World, mark: &Mark| world.read_current(mark);
        let mut reading = self.integrate(Probe::Current, world, read);
        if self.settings(Probe::Current).auto_range {
            let ranges = self.ratings.current_ranges.clone();
            for full_scale in &ranges {
                if reading.amps().is_none() && *full_scale > self.range(Probe::Current, world) {
                    world.with(|world| world.set_range(Amps(*full_scale)));
                    reading = self.integrate(Probe::Current, world, read);
                }
            }
            for full_scale in ranges.iter().rev() {
                let range = self.range(Probe::Current, world);
                if *full_scale < range
                    && reading.amps().is_some_and(|amps| amps.0.abs() < UNDER_RANGE * range)
                {
                    world.with(|world| world.set_range(Amps(*full_scale)));
                    reading = self.integrate(Probe::Current, world, read);
                }
            }
        }
        match reading {
            Current::Value(amps) => amps.0,
            Current::Overload(_) => INFINITY,
        }
    }

    fn integrate<T>(
        &mut self,
        probe: Probe,
        world: &SharedWorld,
        read: impl FnOnce(&mut World, &Mark) -> T,
    ) -> T {
        let mark = world.with(|world| world.mark());
        world.pass(LINE_CYCLE.mul_f64(self.settings(probe).line_cycles));
        world.with(|world| read(world, &mark))
    }
}
