//! Names of quantities, and the limits a profile sets on them.

use crate::units::{Unit, Volts};
use serde::{Deserialize, Serialize};

/// A quantity the program can find in a run. The order is the order of every table and file.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum QuantityName {
    /// Voltage below which the switch opens.
    Trip,
    /// Voltage above which the switch closes again.
    ReEnable,
    /// Re-enable less trip.
    Hysteresis,
    /// Current just above the trip, board on.
    OnCurrent,
    /// Current with the switch open.
    OffCurrent,
    /// Slope of the off current against voltage.
    OffConductance,
    /// Part of the off current that does not depend on voltage.
    OffConstantCurrent,
    /// From crossing the trip voltage to the open switch.
    DetectDelay,
    /// From crossing the re-enable voltage to the closed switch.
    ReleaseDelay,
    /// Most current below the trip down to the deep floor.
    DeepCurrent,
    /// Re-enable less the voltage a resting battery recovers to.
    ReboundMargin,
    /// Resistance of the closed switch.
    OnResistance,
    /// How long a battery lasts with the switch open.
    StorageTime,
}

impl QuantityName {
    /// All names, in order.
    pub const ALL: [Self; 13] = [
        Self::Trip,
        Self::ReEnable,
        Self::Hysteresis,
        Self::OnCurrent,
        Self::OffCurrent,
        Self::OffConductance,
        Self::OffConstantCurrent,
        Self::DetectDelay,
        Self::ReleaseDelay,
        Self::DeepCurrent,
        Self::ReboundMargin,
        Self::OnResistance,
        Self::StorageTime,
    ];

    /// The name in files.
    pub fn key(self) -> &'static str {
        match self {
            Self::Trip => "trip",
            Self::ReEnable => "re_enable",
            Self::Hysteresis => "hysteresis",
            Self::OnCurrent => "on_current",
            Self::OffCurrent => "off_current",
            Self::OffConductance => "off_conductance",
            Self::OffConstantCurrent => "off_constant_current",
            Self::DetectDelay => "detect_delay",
            Self::ReleaseDelay => "release_delay",
            Self::DeepCurrent => "deep_current",
            Self::ReboundMargin => "rebound_margin",
            Self::OnResistance => "on_resistance",
            Self::StorageTime => "storage_time",
        }
    }

    /// The name for people.
    pub fn title(self) -> &'static str {
        match self {
            Self::Trip => "trip voltage",
            Self::ReEnable => "re-enable voltage",
            Self::Hysteresis => "hysteresis",
            Self::OnCurrent => "on current",
            Self::OffCurrent => "off current",
            Self::OffConductance => "off conductance",
            Self::OffConstantCurrent => "constant off current",
            Self::DetectDelay => "detect delay",
            Self::ReleaseDelay => "release delay",
            Self::DeepCurrent => "deep current",
            Self::ReboundMargin => "rebound margin",
            Self::OnResistance => "on resistance",
            Self::StorageTime => "storage time",
        }
    }

    /// The unit of its value and limits.
    pub fn unit(self) -> Unit {
        match self {
            Self::Trip | Self::ReEnable | Self::Hysteresis | Self::ReboundMargin => Unit::Volt,
            Self::OnCurrent | Self::OffCurrent | Self::OffConstantCurrent | Self::DeepCurrent => Unit::Ampere,
            Self::OffConductance => Unit::Siemens,
            Self::DetectDelay | Self::ReleaseDelay | Self::StorageTime => Unit::Second,
            Self::OnResistance => Unit::Ohm,
        }
    }
}

/// The limits on one quantity, in its SI unit; at least one of `min` and `max` is there.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Limit {
    /// The voltage at which it is measured, where that matters.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub at: Option<Volts>,
    /// Lowest value allowed.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub min: Option<f64>,
    /// Highest value allowed.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub max: Option<f64>,
}
