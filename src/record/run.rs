//! One run as it is kept: a short line that says who, what, when, and with which outcome.

use super::{Identity, Moment};
use crate::analysis::Finding;
use crate::trace::Ending;
use crate::verdict::{Judged, Outcome};
use serde::{Deserialize, Serialize};

/// The layout of the lines in a log.
pub const SCHEMA: u32 = 1;

/// All that is kept of a run but its samples.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Run {
    /// Layout of this line: [`SCHEMA`].
    pub schema: u32,
    /// One word for the run.
    pub outcome: Outcome,
    /// Who, what, when and with which.
    pub identity: Identity,
    /// When it was over; absent when it never ended.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub ended: Option<Moment>,
    /// How long it took by the bench's own clock, in seconds; absent when it never ended.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub duration_s: Option<f64>,
    /// How it ended; absent when it never did.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub ending: Option<Ending>,
    /// What was measured, held against the limits.
    pub quantities: Vec<Judged>,
    /// What is wrong with the board or the bench, the most telling first.
    pub findings: Vec<Finding>,
    /// Where the samples are; absent when none were kept.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub trace: Option<TraceReference>,
}

impl Run {
    /// True when no real board was measured.
    pub fn is_simulated(&self) -> bool {
        self.identity.bench.simulated.is_some()
    }
}

/// Where a trace line stands, and what it must be.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct TraceReference {
    /// File in the log's folder.
    pub file: String,
    /// First byte of the line.
    pub offset: u64,
    /// Bytes of the line with its newline.
    pub length: u64,
    /// SHA-256 of the line with its newline, in hexadecimal: what `sha256sum` says of it.
    pub sha256: String,
}
