//! A board and a bench drawn from a seed, around what a profile describes and a named condition.

use super::draw::{Concern, Draw};
use super::*;
use crate::procedure::Ability;
use crate::profile::{Profile, QuantityName};
use crate::trace::{Accuracy, Claims, RangeAccuracy};
use crate::units::{Amps, Farads, Ohms, Siemens, Volts};
use std::time::Duration;

/// Everything a [`World`] needs: plain parameters.
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
    /// Draws a board and a bench.
    pub fn new(profile: &Profile, condition: Condition, seed: u64) -> Self {
        let _ = condition;
        let middle = |name: QuantityName| {
            let limit = profile.limits.get(&name)?;
            Some((limit.min? + limit.max?) / 2.0)
        };
        let mut draw = Draw::new(seed, Concern::Board);
        let trip = Volts(middle(QuantityName::Trip).unwrap_or(6.0) + draw.within(0.02));
        let board = BoardModel {
            trip,
            hysteresis: Volts(middle(QuantityName::Hysteresis).unwrap_or(0.4)),
            detect_delay: profile.timing.detect_delay / 2,
            release_delay: profile.timing.release_delay / 2,
            noise: Volts(100e-6),
            noise_rate: 100.0,
            minimum_operating: Volts(0.8),
            pull_up: Ohms(3.3e6),
            pull_up_conducts: PullUp::WhenOff,
            detector_current: Amps(0.6e-6),
            leakage: Amps(20e-9),
            leakage_conductance: Siemens(5e-9),
            input_capacitance: Farads(1e-6),
            load: profile.load.resistance,
            load_capacitance: Farads(10e-6),
            switch: Switch::Working,
            on_resistance: Ohms(0.06),
            deep_conduction: None,
        };
        Self {
            board,
            supply: SupplyModel {
                max_voltage: Volts(32.0),
                max_current: Amps(3.0),
                min_current: Amps(1e-3),
                set_step: Volts(1e-3),
                claim: Accuracy { relative: 0.0005, absolute: 0.005, resolution: 0.001 },
                gain_error: 0.0,
                offset_error: Volts::ZERO,
                read_back_voltage_error: Volts::ZERO,
                read_back_current_error: Amps::ZERO,
                time_constant: Duration::from_millis(3),
                slew: 2000.0,
                overshoot: 0.0,
                sinks: true,
                output_capacitance: Farads(470e-6),
                bleed: Amps(1e-3),
                off_resistance: Ohms(100.0),
            },
            ammeter: AmmeterModel {
                ranges: [(100e-6, 100.0), (1e-3, 100.0), (0.01, 1.0), (0.1, 1.0), (1.0, 0.1), (3.0, 0.1)]
                    .map(|(full_scale, burden)| AmmeterRange {
                        meter: MeterRange {
                            full_scale,
                            claim: Accuracy {
                                relative: 0.0005,
                                absolute: full_scale * 2.5e-4,
                                resolution: 0.0,
                            },
                            gain_error: 0.0,
                            offset_error: 0.0,
                            noise: 0.0,
                        },
                        burden: Ohms(burden),
                    })
                    .to_vec(),
                integration: Duration::from_millis(20),
                range_settle: Duration::from_millis(50),
            },
            voltmeter: voltmeter(),
            load_voltmeter: voltmeter(),
            wiring: Wiring {
                lead_resistance: Ohms(0.05),
                load: LoadWiring::Connected,
                polarity: Polarity::Right,
            },
            seed,
        }
    }

    /// What this bench can do.
    pub fn ability(&self) -> Ability {
        Ability {
            voltmeter: true,
            load_voltmeter: true,
            ranges: self.ammeter.ranges.iter().map(|range| Amps(range.meter.full_scale)).collect(),
            range_settle: self.ammeter.range_settle,
            max_voltage: self.supply.max_voltage,
            max_current: self.supply.max_current,
            min_current: self.supply.min_current,
            set_step: self.supply.set_step,
            settle: self.supply.time_constant * 5,
            read_time: self.ammeter.integration.max(self.voltmeter.integration),
            arrival_tolerance: Volts(0.01),
            off_current_uncertainty: Amps(20e-9),
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
            sense: self.voltmeter.ranges.first().map(|range| range.claim),
            current: self.ammeter.ranges.iter().map(line).collect(),
            lead_resistance: None,
        }
    }
}

fn voltmeter() -> VoltmeterModel {
    VoltmeterModel {
        ranges: vec![MeterRange {
            full_scale: 10.0,
            claim: Accuracy { relative: 3.5e-5, absolute: 5e-5, resolution: 1e-5 },
            gain_error: 0.0,
            offset_error: 0.0,
            noise: 3e-6,
        }],
        integration: Duration::from_millis(20),
        input_resistance: Ohms(10e9),
    }
}
