//! What a bench shows with nothing in its fixture, as it goes with a trace.

use super::seconds;
use crate::units::{Amps, Volts};
use serde::{Deserialize, Serialize};
use std::time::Duration;

/// The ammeter's reading with an empty fixture, on one range at one voltage.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Zero {
    /// Full scale of the range.
    #[serde(rename = "full_scale_a")]
    pub full_scale: Amps,
    /// Voltage at the terminals.
    #[serde(rename = "at_v")]
    pub at: Volts,
    /// The mean reading, less what the voltmeter draws by its stated input resistance: the ammeter's own offset, what
    /// leaks in the fixture, and what the voltmeter draws beyond that.
    #[serde(rename = "current_a")]
    pub current: Amps,
    /// Its standard uncertainty: scatter of the mean (JCGM 100:2008, 4.2.3) and the last digit (F.2.2.1).
    #[serde(rename = "standard_uncertainty_a")]
    pub standard_uncertainty: Amps,
    /// How many readings the mean is made of.
    pub readings: u32,
    /// How old it was when the run began.
    #[serde(rename = "age_s", with = "seconds")]
    pub age: Duration,
}
