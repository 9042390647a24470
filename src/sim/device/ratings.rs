//! What the instruments of a setup can be set to.

use super::Kind;
use super::datum::Bounds;
use crate::sim::Setup;

/// Limits of the numbers a device takes.
#[derive(Clone, Debug)]
pub(super) struct Ratings {
    pub(super) volts: Bounds,
    pub(super) current_limit: Bounds,
    pub(super) over_voltage: Bounds,
    pub(super) line_cycles: Bounds,
    /// Full scales of the ammeter, A, smallest first.
    pub(super) current_ranges: Vec<f64>,
    /// Full scales of its voltmeter, V, smallest first.
    pub(super) voltage_ranges: Vec<f64>,
}

impl Ratings {
    pub(super) fn of(kind: Kind, setup: &Setup) -> Self {
        let supply = &setup.supply;
        let voltmeter = match kind {
            Kind::LoadVoltmeter => &setup.load_voltmeter,
            _ => &setup.voltmeter,
        };
        // Protection must be able to stand above every set-point.
        let over_voltage = supply.max_voltage.0 * 1.1;
        Self {
            volts: Bounds { least: 0.0, most: supply.max_voltage.0, default: 0.0 },
            current_limit: Bounds {
                least: supply.min_current.0,
                most: supply.max_current.0,
                default: supply.max_current.0,
            },
            over_voltage: Bounds { least: 0.0, most: over_voltage, default: over_voltage },
            line_cycles: Bounds { least: 0.02, most: 100.0, default: 1.0 },
            current_ranges: setup.ammeter.ranges.iter().map(|range| range.meter.full_scale).collect(),
            voltage_ranges: voltmeter.ranges.iter().map(|range| range.full_scale).collect(),
        }
    }
}

/// The full scales as bounds: anything up to the largest is taken, by the smallest range that holds it.
pub(super) fn bounds_of(ranges: &[f64]) -> Bounds {
    let largest = ranges.last().copied().unwrap_or_default();
    Bounds { least: 0.0, most: largest * 1.000_001, default: largest }
}
