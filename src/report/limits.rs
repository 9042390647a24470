//! Limits worked out of a board's parts: for the design engineer, and for programs.

mod csv;
mod json;
mod text;

pub use csv::limits_csv;
pub use json::limits_json;
pub use text::limits_text;

use crate::limits::{Proposal, Question};
use crate::profile::{Parts, Profile};

/// What is to be said of limits that were worked out.
#[derive(Clone, Copy, Debug)]
pub struct LimitsSheet<'r> {
    /// The board.
    pub profile: &'r Profile,
    /// Its parts.
    pub parts: &'r Parts,
    /// What was asked.
    pub question: &'r Question,
    /// Where the uncertainty comes from, in words.
    pub uncertainty_from: &'r str,
    /// The answer.
    pub proposal: &'r Proposal,
}
