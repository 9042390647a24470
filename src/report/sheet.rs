//! What is to be said of one run, whether it comes from a record or from a trace that was judged without one.

use crate::analysis::Finding;
use crate::profile::Profile;
use crate::record::Run;
use crate::trace::OutputState;
use crate::verdict::{Judged, Outcome, Verdict};
use std::path::Path;

/// The parts of a run that a report shows.
#[derive(Clone, Copy, Debug)]
pub struct Sheet<'r> {
    /// One word for the run.
    pub outcome: Outcome,
    /// Part number.
    pub board: &'r str,
    /// Revision.
    pub revision: &'r str,
    /// Serial number, where one is known.
    pub serial_number: Option<&'r str>,
    /// What was measured, held against the limits.
    pub quantities: &'r [Judged],
    /// What is wrong with the board or the bench.
    pub findings: &'r [Finding],
    /// What is known of the output; `None` for a run that never ended.
    pub output: Option<OutputState>,
    /// Its record, where there is one.
    pub run: Option<&'r Run>,
    /// The folder of the log that keeps it.
    pub folder: Option<&'r Path>,
}

impl<'r> Sheet<'r> {
    /// The sheet of a recorded run.
    pub fn of(run: &'r Run) -> Self {
        let board = &run.identity.board;
        Self {
            outcome: run.outcome,
            board: &board.board,
            revision: &board.revision,
            serial_number: Some(&board.serial_number),
            quantities: &run.quantities,
            findings: &run.findings,
            output: run.ending.as_ref().map(|ending| ending.output),
            run: Some(run),
            folder: None,
        }
    }

    /// The sheet of a trace that was judged and is not in a log.
    pub fn of_trace(
        profile: &'r Profile,
        serial_number: Option<&'r str>,
        verdict: &'r Verdict,
        output: OutputState,
    ) -> Self {
        Self {
            outcome: verdict.outcome,
            board: &profile.board,
            revision: &profile.revision,
            serial_number,
            quantities: &verdict.judged,
            findings: &verdict.findings,
            output: Some(output),
            run: None,
            folder: None,
        }
    }

    /// The same, with the folder of the log it is kept in.
    #[must_use]
    pub fn kept_in(self, folder: &'r Path) -> Self {
        Self { folder: Some(folder), ..self }
    }
}
