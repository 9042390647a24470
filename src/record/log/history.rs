//! What a log already knows of a board before its next run.

use super::folder::Kind;
use super::{LogError, LogFolder, lines};
use crate::record::BoardUnderTest;
use serde::Deserialize;
use std::borrow::Cow;

/// Counts of earlier runs.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct History {
    /// Runs of the same board, whatever came of them.
    pub(super) earlier_attempts: u32,
    /// Runs of any board in the month asked for.
    pub(super) runs_this_month: usize,
}

/// Just enough of a run line to know its board.
#[derive(Deserialize)]
struct Glimpse<'l> {
    #[serde(borrow)]
    identity: GlimpseIdentity<'l>,
}

#[derive(Deserialize)]
struct GlimpseIdentity<'l> {
    #[serde(borrow)]
    board: GlimpseBoard<'l>,
}

#[derive(Deserialize)]
struct GlimpseBoard<'l> {
    #[serde(borrow)]
    board: Cow<'l, str>,
    #[serde(borrow)]
    serial_number: Cow<'l, str>,
}

impl History {
    /// Counts through the run lines of all months. Only a line that holds the serial number is looked at closely.
    pub(super) fn of(folder: &LogFolder, board: &BoardUnderTest, this_month: &str) -> Result<Self, LogError> {
        let mut history = Self::default();
        let needle = serde_json::Value::from(board.serial_number.as_str()).to_string();
        for month in folder.months()? {
            let path = folder.file(&month, Kind::Runs);
            lines::each(&path, |line| {
                history.runs_this_month += usize::from(month == this_month);
                if line.contains(&needle)
                    && let Ok(Glimpse { identity }) = serde_json::from_str::<Glimpse<'_>>(line)
                    && identity.board.serial_number == board.serial_number
                    && identity.board.board == board.board
                {
                    history.earlier_attempts += 1;
                }
            })
            .map_err(LogError::disk("read the runs in", &path))?;
        }
        Ok(history)
    }
}
