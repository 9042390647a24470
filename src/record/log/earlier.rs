//! The newest passes of one kind of board at a station: what its next board is likely to show.

use super::folder::Kind;
use super::{LogError, LogFolder, lines, read};
use crate::record::{ProfileUsed, Run};
use crate::verdict::Outcome;
use std::collections::VecDeque;

/// Months looked through, the newest that have runs: what a board showed long ago says little of today's.
const MONTHS: usize = 2;

impl LogFolder {
    /// The newest runs, at most `most`, that passed against the same profile to the letter, so of the same board and
    /// revision. Newest last. Reads the short lines of the two newest months; a line that cannot be read is left out.
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
                if line.contains(&profile.sha256) && line.contains(&pass) {
                    if newest.len() >= most {
                        newest.pop_front();
                    }
                    newest.push_back(line.to_owned());
                }
            })
            .map_err(LogError::disk("read the runs in", &path))?;
        }
        let runs = newest.iter().filter_map(|line| read::run_of(line.as_bytes()).ok());
        Ok(runs
            .filter(|run| run.outcome == Outcome::Pass && run.identity.profile.sha256 == profile.sha256)
            .collect())
    }
}
