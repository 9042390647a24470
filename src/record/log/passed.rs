//! Whether a board has passed already.

use super::folder::Kind;
use super::{LogError, LogFolder, lines, read};
use crate::record::{BoardUnderTest, Occasion, Run};
use crate::verdict::Outcome;

impl LogFolder {
    /// The last run of this board that judged it, of all months, where that was a pass, with or without conditions. A board
    /// that failed since has not passed. Simulated boards are none of the real ones, and a run of a reference board
    /// judges the bench.
    ///
    /// # Errors
    /// The folder cannot be listed or a file not be read.
    pub fn passed(&self, board: &BoardUnderTest, simulated: bool) -> Result<Option<Run>, LogError> {
        let needle = serde_json::Value::from(board.serial_number.as_str()).to_string();
        let mut last = None;
        for month in self.months()? {
            let path = self.file(&month, Kind::Runs);
            lines::each(&path, |line| {
                if line.contains(&needle)
                    && let Ok(run) = read::run_of(line.as_bytes())
                    && judges(&run, board, simulated)
                {
                    last = Some(run);
                }
            })
            .map_err(LogError::disk("read the runs in", &path))?;
        }
        Ok(last.filter(|run| matches!(run.outcome, Outcome::Pass | Outcome::ConditionalPass)))
    }
}

fn judges(run: &Run, board: &BoardUnderTest, simulated: bool) -> bool {
    let identity = &run.identity;
    let judged = match run.outcome {
        Outcome::Pass | Outcome::ConditionalPass | Outcome::ConditionalFail | Outcome::Fail => true,
        Outcome::Invalid | Outcome::Aborted | Outcome::Incomplete => false,
    };
    judged
        && identity.board.serial_number == board.serial_number
        && identity.board.board == board.board
        && run.is_simulated() == simulated
        && identity.occasion != Occasion::Reference
}
