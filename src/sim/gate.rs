//! The gate of the switch: charged through the pull-up, and what becomes of it when the detector's output is stuck.

use crate::units::{Farads, Ohms, Volts};
use std::time::Duration;

/// Gate voltage at which the switch conducts, V; 0.45 V to 1.2 V is the range of the logic-level class.
pub(super) const THRESHOLD: f64 = 0.8;

/// Gate voltage beyond the threshold at which it conducts fully, V. A switch of 60 mΩ at 3 V has, by the square law of
/// a transistor, 60 mΩ x 2.2 V / 0.1 V = 1.3 Ω there, little beside a load.
const FULL: f64 = 0.1;

/// Time until a gate that charges through `pull_up` towards `supply` reaches the threshold:
/// `t = -R C ln(1 - threshold / supply)`.
pub(super) fn charge_time(supply: Volts, pull_up: Ohms, gate: Farads) -> Duration {
    if gate.0 <= 0.0 || supply.0 <= THRESHOLD {
        return Duration::ZERO;
    }
    Duration::from_secs_f64(-pull_up.0 * gate.0 * (1.0 - THRESHOLD / supply.0).ln())
}

/// Voltages between which a gate tied to the supply takes the switch from open to closed.
pub(super) const TIED: [f64; 2] = [THRESHOLD, THRESHOLD + FULL];

/// Share of the load's current that a switch with its gate tied to a supply of `volts` lets through: a straight line
/// in place of the transistor's parabola.
pub(super) fn share(volts: f64) -> f64 {
    ((volts - THRESHOLD) / FULL).clamp(0.0, 1.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// A capacitor charged through a resistor has come to 1 - 1/e of its supply after one time constant (any handbook
    /// of electrical engineering).
    #[test]
    fn a_gate_takes_one_time_constant_to_63_per_cent_of_its_supply() {
        let supply = Volts(THRESHOLD / (1.0 - (-1.0_f64).exp()));
        let time = charge_time(supply, Ohms(10e6), Farads(1e-9));
        assert!((time.as_secs_f64() - 10e-3).abs() < 1e-9, "{time:?}");
        assert_eq!(charge_time(supply, Ohms(10e6), Farads(0.0)), Duration::ZERO);
    }
}
