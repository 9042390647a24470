//! The newest passes of one kind of board at a station: what its next board is likely to show.

use super::folder::Kind;
use super::{LogError, LogFolder, lines, read};
use crate::record::{Occasion, ProfileUsed, Run};
use crate::verdict::Outcome;
use std::collections::VecDeque;

/// Months looked through, the newest that have runs: what a board showed long ago says little of today's.
const MONTHS: usize = 2;

/// The key of a line that only an unusual run has; within a text its quotes would be escaped.
const OCCASION: &str = "\"occasion\":";

impl LogFolder {
    /// The newest runs, at most `most`, that passed against the same profile to the letter, so of the same board and
    /// revision. Reference boards are left out, and boards that were tested again after a pass: each counts once. Newest
    /// last. Reads the short lines of the two newest months; a line that cannot be read is left out.
    ///
    /// # Errors
    /// The folder cannot be listed or a file not be read.
    pub fn earlier_passes(&self, profile: &ProfileUsed, most: usize) -> Result<Vec<Run>, LogError> {
        // Cheaper than to read every line; whether they are what they look like is seen below.
        let mut newest: VecDeque<String> = VecDeque::new();
        let pass = serde_json::to_string(&Outcome::Pass).unwrap_or_default();
        let months = self.months()?;
        for month in months.iter().skip(months.len().saturating_sub(MONTHS)) {
            let path = self.file(month, Kind::Runs);
            lines::each(&path, |line| {
                let is_usual = !line.contains(OCCASION);
                if is_usual && line.contains(&profile.sha256) && line.contains(&pass) {
                    if newest.len() >= most {
                        newest.pop_front();
                    }
                    newest.push_back(line.to_owned());
                }
            })
            .map_err(LogError::disk("read the runs in", &path))?;
        }
        let runs = newest.iter().filter_map(|line| read::run_of(line.as_bytes()).ok());
        let is_one = |run: &Run| {
            let identity = &run.identity;
            run.outcome == Outcome::Pass
                && identity.profile.sha256 == profile.sha256
                && identity.occasion == Occasion::Production
        };
        Ok(runs.filter(is_one).collect())
    }
}
