//! All that is known of a run before the output goes on: which board, against which profile, on which bench.

use super::{Moment, Occasion};
use crate::profile::{Limit, QuantityName};
use jiff::Timestamp;
use jiff::civil::Date;
use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;

/// The name of one run: station, start in UTC, and a number that no other run of the station has at that time.
#[derive(Clone, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(transparent)]
pub struct RunId(String);

impl RunId {
    /// `bench-1-20261019T142233Z-0007`: the seventh run of the month at that station.
    pub(super) fn new(station: &str, started: Timestamp, number: usize) -> Self {
        Self(format!("{station}-{}-{number:04}", started.strftime("%Y%m%dT%H%M%SZ")))
    }

    /// The name as text.
    pub fn as_str(&self) -> &str {
        &self.0
    }
}

impl std::fmt::Display for RunId {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.pad(&self.0)
    }
}

/// What is about to be tested, as far as the caller knows it.
#[derive(Clone, Debug, PartialEq)]
pub struct Subject {
    /// The board on the bench.
    pub board: BoardUnderTest,
    /// What it is held against.
    pub profile: ProfileUsed,
    /// What it is measured with.
    pub bench: BenchUsed,
    /// Who does it, where that is known.
    pub operator: Option<String>,
    /// Why it is done.
    pub occasion: Occasion,
}

/// A run's name and all that is known before it begins; kept with the trace and with the run.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Identity {
    /// The run's name.
    pub run: RunId,
    /// Where the bench stands.
    pub station: String,
    /// Which run of this board in this log, counted from 1.
    pub attempt: u32,
    /// When it began.
    pub started: Moment,
    /// The board on the bench.
    pub board: BoardUnderTest,
    /// What it was held against.
    pub profile: ProfileUsed,
    /// What it was measured with.
    pub bench: BenchUsed,
    /// Who did it, where that is known.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub operator: Option<String>,
    /// Why it was done; absent where the board was to be judged for the first time.
    #[serde(default, skip_serializing_if = "Occasion::is_usual")]
    pub occasion: Occasion,
    /// The program.
    pub software: Software,
}

/// The board on the bench.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct BoardUnderTest {
    /// Part number.
    pub board: String,
    /// Revision.
    pub revision: String,
    /// Serial number.
    pub serial_number: String,
    /// Batch it came from.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub batch: Option<String>,
    /// Order it is built under.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub work_order: Option<String>,
}

/// The profile a board was held against.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct ProfileUsed {
    /// Where it was read from.
    pub path: String,
    /// SHA-256 of the file, in hexadecimal.
    pub sha256: String,
    /// The limits as applied, in SI units.
    pub limits: BTreeMap<QuantityName, Limit>,
}

/// The bench a board was measured on.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct BenchUsed {
    /// Its name.
    pub name: String,
    /// Its instruments.
    pub instruments: Vec<Instrument>,
    /// Present when no real board was measured.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub simulated: Option<Simulated>,
}

/// One instrument, as it named itself.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub struct Instrument {
    /// The roles it played, such as `source`.
    pub roles: Vec<String>,
    /// First field of its answer to `*IDN?` (IEEE 488.2, 10.14).
    pub maker: String,
    /// Second field.
    pub model: String,
    /// Third field: its serial number, where it has one.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub serial_number: Option<String>,
    /// Fourth field, where it says one.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub firmware: Option<String>,
    /// The port it is on.
    pub port: String,
    /// Day until which its calibration holds, where the bench file says so.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub calibration_due: Option<Date>,
}

/// What was simulated.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Simulated {
    /// The condition of the board, such as `good`.
    pub condition: String,
    /// The seed that repeats it.
    pub seed: u64,
}

/// The program that made a record.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Software {
    /// Version of this crate.
    pub version: String,
    /// The commit it was built from, `-dirty` when files differed from it, or `unknown`.
    pub build: String,
}

impl Software {
    /// This program.
    pub fn this() -> Self {
        Self { version: env!("CARGO_PKG_VERSION").to_owned(), build: env!("EBBMARK_BUILD").to_owned() }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_run_is_named_after_station_time_and_number() {
        let started: Timestamp = "2026-10-19T14:22:33.5Z".parse().expect("RFC 3339");
        assert_eq!(RunId::new("bench-1", started, 7).as_str(), "bench-1-20261019T142233Z-0007");
    }

    #[test]
    fn the_program_knows_its_version() {
        assert_eq!(Software::this().version, env!("CARGO_PKG_VERSION"));
        assert!(!Software::this().build.is_empty());
    }
}
