//! Quantities and limits in, decisions and one outcome out. Pure.

mod budget;
mod decision;
mod foresight;
mod judge;
mod line;
mod outcome;

pub use budget::{BudgetLine, budget};
pub use decision::{COVERAGE_FACTOR, Decision, Judged};
pub use foresight::{Doubt, doubts};
pub use judge::judge;
pub use line::QuantityLine;
pub use outcome::Outcome;

use crate::analysis::Finding;
use serde::{Deserialize, Serialize};

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
