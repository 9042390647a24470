//! Why a board is on the bench.

use super::RunId;
use serde::{Deserialize, Serialize};

/// Why a run was made. What is said of the boards of a lot counts each once: only runs of [`Occasion::Production`].
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Occasion {
    /// To know whether the board is good.
    #[default]
    Production,
    /// The same board again, though it had passed in this run; somebody asked for it.
    Again(RunId),
    /// A board of known values, to know whether the bench is in order.
    Reference,
}

impl Occasion {
    /// True of the usual run, which no record mentions.
    pub(super) fn is_usual(&self) -> bool {
        *self == Self::Production
    }
}
