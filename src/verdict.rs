//! Quantities and limits in, decisions and one outcome out. Pure.

use crate::analysis::{Finding, Quantity};
use crate::profile::Limit;
use serde::{Deserialize, Serialize};

/// The decision about one quantity: the four statements of ILAC-G8:09/2019, 4.2.3.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Decision {
    /// Inside the limits by at least the guard band.
    Pass,
    /// Inside the limits, but within the guard band.
    ConditionalPass,
    /// Outside the limits, but within the guard band.
    ConditionalFail,
    /// Outside the limits by more than the guard band.
    Fail,
}

/// The outcome of a run.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
pub enum Outcome {
    /// Every quantity passes.
    #[serde(rename = "PASS")]
    Pass,
    /// The worst decision is a conditional pass.
    #[serde(rename = "CONDITIONAL PASS")]
    ConditionalPass,
    /// The worst decision is a conditional fail.
    #[serde(rename = "CONDITIONAL FAIL")]
    ConditionalFail,
    /// At least one quantity fails, or the board did what no board may do.
    #[serde(rename = "FAIL")]
    Fail,
    /// The bench could not judge the board.
    #[serde(rename = "INVALID")]
    Invalid,
    /// Stopped by the operator before any failing quantity.
    #[serde(rename = "ABORTED")]
    Aborted,
    /// The run never ended; found at the next start.
    #[serde(rename = "INCOMPLETE")]
    Incomplete,
}

/// A quantity with the limit it was held against.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Judged {
    /// What was measured.
    pub quantity: Quantity,
    /// Coverage factor k.
    pub coverage_factor: f64,
    /// The limit, where the profile sets one.
    pub limit: Option<Limit>,
    /// The decision, where there is a limit.
    pub decision: Option<Decision>,
}

/// All that was decided about a run.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Verdict {
    /// One word for the run.
    pub outcome: Outcome,
    /// Every quantity, judged.
    pub judged: Vec<Judged>,
    /// Findings, the most telling first.
    pub findings: Vec<Finding>,
}
