//! The class of instruments on the simulated bench, each drawn inside what such an instrument's maker claims.
//!
//! A mid-range programmable supply, a six-and-a-half-digit ammeter and voltmeters of the same class; the figures are
//! common practice for such instruments, a year after calibration.

use super::draw::{Concern, Draw};
use super::{AmmeterModel, AmmeterRange, MeterRange, SupplyModel, VoltmeterModel};
use crate::trace::Accuracy;
use crate::units::{Amps, Farads, Ohms, Volts};
use std::time::Duration;

/// Averaging time of all meters: one period of 50 Hz mains.
const INTEGRATION: Duration = Duration::from_millis(20);

/// Full scale in A, claim in share of reading and share of range, last digit in A, burden in ohm.
const AMMETER_RANGES: [(f64, f64, f64, f64, f64); 6] = [
    (100e-6, 0.05e-2, 0.025e-2, 100e-12, 100.0),
    (1e-3, 0.05e-2, 0.006e-2, 1e-9, 100.0),
    (10e-3, 0.05e-2, 0.02e-2, 10e-9, 1.0),
    (100e-3, 0.05e-2, 0.005e-2, 100e-9, 1.0),
    (1.0, 0.1e-2, 0.01e-2, 1e-6, 0.1),
    (3.0, 0.12e-2, 0.02e-2, 10e-6, 0.1),
];

/// Full scale in V, claim in share of reading and share of range, last digit in V.
const VOLTMETER_RANGES: [(f64, f64, f64, f64); 2] =
    [(10.0, 0.0035e-2, 0.0005e-2, 10e-6), (100.0, 0.0045e-2, 0.0006e-2, 100e-6)];

/// Input resistance of a voltmeter, and the share its maker allows it to be off.
const INPUT_RESISTANCE: (Ohms, f64) = (Ohms(10e6), 1e-2);

/// Noise of an ammeter's reading, as a share of its range.
const AMMETER_NOISE: f64 = 5e-6;

/// Noise of a voltmeter's reading, as a share of its range: 3 µV on 10 V.
const VOLTMETER_NOISE: f64 = 0.3e-6;

/// Draws a supply of 32 V and 3 A that arrives within 1 mV about 15 ms after a small step.
pub(super) fn supply(seed: u64) -> SupplyModel {
    let mut draw = Draw::new(seed, Concern::Supply);
    let claim = Accuracy { relative: 0.05e-2, absolute: 5e-3, resolution: 1e-3 };
    SupplyModel {
        max_voltage: Volts(32.0),
        max_over_voltage: Volts(35.0),
        max_current: Amps(3.0),
        min_current: Amps(1e-3),
        gives_way: Amps(f64::INFINITY),
        set_step: Volts(1e-3),
        claim,
        gain_error: draw.within(claim.relative),
        offset_error: Volts(draw.within(claim.absolute)),
        drift: 0.0,
        drifted: Volts::ZERO,
        read_back_voltage_error: Volts(draw.within(5e-3)),
        read_back_current_error: Amps(draw.within(10e-3)),
        time_constant: Duration::from_millis(3),
        slew: 2000.0,
        overshoot: 0.0,
        sinks: true,
        output_capacitance: Farads(470e-6),
        bleed: Amps(5e-3),
        off_resistance: Ohms(100.0),
    }
}

/// Draws an ammeter and two voltmeters, at the terminals and at the load.
pub(super) fn meters(seed: u64) -> (AmmeterModel, VoltmeterModel, VoltmeterModel) {
    let mut draw = Draw::new(seed, Concern::MeterErrors);
    let mut range = |full_scale: f64, relative: f64, of_range: f64, resolution: f64, noise: f64| {
        let claim = Accuracy { relative, absolute: of_range * full_scale, resolution };
        MeterRange {
            full_scale,
            claim,
            gain_error: draw.within(claim.relative),
            offset_error: draw.within(claim.absolute),
            noise: noise * full_scale,
        }
    };
    let ranges = AMMETER_RANGES.map(|(scale, relative, of_range, digit, burden)| AmmeterRange {
        meter: range(scale, relative, of_range, digit, AMMETER_NOISE),
        burden: Ohms(burden),
    });
    let mut inputs = Draw::new(seed, Concern::MeterInputs);
    let mut voltmeter = || VoltmeterModel {
        ranges: VOLTMETER_RANGES
            .map(|(scale, relative, of_range, digit)| {
                range(scale, relative, of_range, digit, VOLTMETER_NOISE)
            })
            .to_vec(),
        integration: INTEGRATION,
        input_resistance: Some(INPUT_RESISTANCE.0),
        input_error: inputs.within(INPUT_RESISTANCE.1),
    };
    let ammeter = AmmeterModel {
        ranges: ranges.to_vec(),
        integration: INTEGRATION,
        range_settle: Duration::from_millis(60),
        reversed: false,
        fuse_blown: false,
        stuck_on: None,
    };
    (ammeter, voltmeter(), voltmeter())
}
