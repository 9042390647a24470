//! What makes two uncertainties move together.

use crate::profile::QuantityName;
use crate::units::Amps;
use serde::{Deserialize, Serialize};

/// One thing that is off by the same amount wherever it acts in a run.
///
/// Quantities that share a cause are correlated (JCGM 100:2008, 5.2): fully in that part, with the product of their
/// signed sensitivities. What has no cause is independent of all else.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Cause {
    /// Gain of the voltmeter at the terminals.
    VoltmeterGain,
    /// Offset of the voltmeter at the terminals.
    VoltmeterOffset,
    /// Input resistance of the voltmeter at the terminals.
    VoltmeterInput,
    /// Gain of the voltmeter at the load.
    LoadVoltmeterGain,
    /// Offset of the voltmeter at the load.
    LoadVoltmeterOffset,
    /// Gain of the supply's set-point.
    SetPointGain,
    /// Offset of the supply's set-point.
    SetPointOffset,
    /// Resistance of the leads, on a bench that does not measure behind them.
    LeadResistance,
    /// Gain of the ammeter on the range with this full scale; `None` where the range is not known.
    AmmeterGain(Option<Amps>),
    /// Offset of the ammeter on that range.
    AmmeterOffset(Option<Amps>),
    /// A delay longer than the steps, which moves the trip down and the re-enable up.
    Delay,
    /// Noise at the detector's input, which moves both thresholds inwards.
    DetectorNoise,
    /// Scatter of the line whose slope is this quantity; what is read off the line far from its middle moves along.
    Slope(QuantityName),
}
