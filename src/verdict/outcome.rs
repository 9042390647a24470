//! The outcome of a run: one word, and whether it counts in a yield.

use super::Decision;
use serde::{Deserialize, Serialize};
use std::fmt;

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

impl Outcome {
    /// All outcomes, best first.
    pub const ALL: [Self; 7] = [
        Self::Pass,
        Self::ConditionalPass,
        Self::ConditionalFail,
        Self::Fail,
        Self::Invalid,
        Self::Aborted,
        Self::Incomplete,
    ];

    /// The word, as in records and on paper.
    pub fn word(self) -> &'static str {
        match self {
            Self::Pass => "PASS",
            Self::ConditionalPass => "CONDITIONAL PASS",
            Self::ConditionalFail => "CONDITIONAL FAIL",
            Self::Fail => "FAIL",
            Self::Invalid => "INVALID",
            Self::Aborted => "ABORTED",
            Self::Incomplete => "INCOMPLETE",
        }
    }

    /// True when the board was judged, so that the run counts in a yield.
    pub fn counts_in_yield(self) -> bool {
        matches!(self, Self::Pass | Self::ConditionalPass | Self::ConditionalFail | Self::Fail)
    }
}

impl From<Decision> for Outcome {
    fn from(decision: Decision) -> Self {
        match decision {
            Decision::Pass => Self::Pass,
            Decision::ConditionalPass => Self::ConditionalPass,
            Decision::ConditionalFail => Self::ConditionalFail,
            Decision::Fail => Self::Fail,
        }
    }
}

impl fmt::Display for Outcome {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.pad(self.word())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_word_is_the_same_on_paper_and_in_files() {
        for outcome in Outcome::ALL {
            assert_eq!(serde_json::to_string(&outcome).expect("a word"), format!("\"{outcome}\""));
        }
        assert_eq!(Outcome::ConditionalPass.to_string(), "CONDITIONAL PASS");
    }

    #[test]
    fn only_judged_boards_count_in_a_yield() {
        assert_eq!(Outcome::ALL.map(Outcome::counts_in_yield), [true, true, true, true, false, false, false]);
    }
}
