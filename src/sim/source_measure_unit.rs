//! A source-measure unit in place of supply, ammeter and voltmeter: four quadrants, no burden, a small range for small
//! currents. Figures are common practice for the class of 20 V and 1 A, a year after calibration.

use super::draw::{Concern, Draw};
use super::{AmmeterModel, AmmeterRange, MeterRange, Setup, SupplyModel, VoltmeterModel};
use crate::trace::Accuracy;
use crate::units::{Amps, Farads, Ohms, Volts};
use std::time::Duration;

/// Averaging time of its readings: one period of 50 Hz mains.
const INTEGRATION: Duration = Duration::from_millis(20);

/// Full scale in A, claim in share of reading and in A, last digit in A.
const CURRENT_RANGES: [(f64, f64, f64, f64); 4] = [
    (10e-6, 0.03e-2, 2e-9, 10e-12),
    (100e-6, 0.03e-2, 20e-9, 100e-12),
    (10e-3, 0.03e-2, 2e-6, 10e-9),
    (1.0, 0.06e-2, 600e-6, 1e-6),
];

/// Full scale in V, claim in share of reading and in V, last digit in V.
const VOLTAGE_RANGE: (f64, f64, f64, f64) = (20.0, 0.015e-2, 1.5e-3, 10e-6);

/// Noise of a reading, as a share of its range.
const NOISE: f64 = 1e-6;

impl Setup {
    /// The same board and leads on a source-measure unit, drawn inside what its maker claims; the voltmeter at the load
    /// stays.
    pub fn with_source_measure_unit(&self) -> Self {
        let mut draw = Draw::new(self.seed, Concern::MeterErrors);
        let mut range = |(full_scale, relative, absolute, resolution): (f64, f64, f64, f64)| MeterRange {
            full_scale,
            claim: Accuracy { relative, absolute, resolution },
            gain_error: draw.within(relative),
            offset_error: draw.within(absolute),
            noise: NOISE * full_scale,
        };
        let ranges = CURRENT_RANGES.map(|line| AmmeterRange { meter: range(line), burden: Ohms::ZERO });
        let voltmeter = VoltmeterModel {
            ranges: vec![range(VOLTAGE_RANGE)],
            integration: INTEGRATION,
            input_resistance: None,
            input_error: 0.0,
        };
        Self {
            supply: supply(self.seed),
            ammeter: AmmeterModel {
                ranges: ranges.to_vec(),
                integration: INTEGRATION,
                range_settle: Duration::from_millis(20),
                reversed: false,
                fuse_blown: false,
                stuck_on: None,
            },
            voltmeter,
            ..self.clone()
        }
    }
}

fn supply(seed: u64) -> SupplyModel {
    let mut draw = Draw::new(seed, Concern::Supply);
    let claim = Accuracy { relative: 0.02e-2, absolute: 2.4e-3, resolution: 0.5e-3 };
    SupplyModel {
        max_voltage: Volts(20.0),
        max_over_voltage: Volts(22.0),
        max_current: Amps(1.0),
        min_current: Amps(1e-6),
        gives_way: Amps(f64::INFINITY),
        set_step: Volts(0.5e-3),
        claim,
        gain_error: draw.within(claim.relative),
        offset_error: Volts(draw.within(claim.absolute)),
        drift: 0.0,
        drifted: Volts::ZERO,
        read_back_voltage_error: Volts(draw.within(1.5e-3)),
        read_back_current_error: Amps(draw.within(600e-6)),
        time_constant: Duration::from_micros(200),
        slew: 2000.0,
        overshoot: 0.0,
        sinks: true,
        output_capacitance: Farads(1e-6),
        bleed: Amps::ZERO,
        off_resistance: Ohms(10e3),
    }
}

#[cfg(test)]
mod tests {
    #[test]
    fn every_error_drawn_lies_inside_its_claim() {
        for seed in 0..50 {
            let setup = crate::sim::device::tests::setup(seed).with_source_measure_unit();
            for range in setup.ammeter.ranges.iter().map(|range| range.meter).chain(setup.voltmeter.ranges) {
                assert!(range.gain_error.abs() <= range.claim.relative, "seed {seed}: {range:?}");
                assert!(range.offset_error.abs() <= range.claim.absolute, "seed {seed}: {range:?}");
            }
        }
    }
}
