//! Why a maker's claim may not hold for the readings of a trace.

use crate::units::Celsius;
use jiff::civil::Date;
use serde::{Deserialize, Serialize};

/// One reason, about one instrument.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case", tag = "why")]
pub enum Doubt {
    /// Its calibration no longer holds.
    CalibrationOverdue {
        /// The instrument's name in the bench file.
        instrument: String,
        /// The last day on which it held.
        due: Date,
    },
    /// It stands outside the temperatures for which its claim is stated, and its definition does not say what a degree
    /// more adds.
    OutsideTemperature {
        /// The instrument's name in the bench file.
        instrument: String,
        /// Temperature of the room.
        room: Celsius,
        /// Lowest temperature of the claim.
        from: Celsius,
        /// Highest temperature of the claim.
        to: Celsius,
    },
}
