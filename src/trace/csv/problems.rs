//! What can be wrong in a trace file, each with its line.

use super::Column;

/// Fewest rows that can hold a change.
pub(super) const FEWEST_ROWS: usize = 2;

/// All that is wrong in one file, in the order of its text. Never empty.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("{}", first_of(.file, .problems))]
pub struct CsvProblems {
    /// The file's name.
    pub file: String,
    /// Its problems.
    pub problems: Vec<CsvProblem>,
}

/// The problems one a line, as many as anybody reads.
fn first_of(file: &str, problems: &[CsvProblem]) -> String {
    const SHOWN: usize = 10;
    let mut lines: Vec<String> =
        problems.iter().take(SHOWN).map(|problem| format!("{file}:{problem}")).collect();
    if let Some(more) = problems.len().checked_sub(SHOWN).filter(|more| *more > 0) {
        lines.push(format!("{file}: {more} more problems of this file are not shown"));
    }
    lines.join("\n")
}

/// One thing that is wrong, and the line where.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("{line}: {what}")]
pub struct CsvProblem {
    /// Line in the file, counted from 1.
    pub line: u64,
    /// What is wrong there.
    pub what: CsvFlaw,
}

/// Sorts of problems of a trace file.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum CsvFlaw {
    /// The bytes are no CSV at all.
    #[error("not readable as CSV: {reason}")]
    Unreadable {
        /// What the reader of the format says.
        reason: String,
    },
    /// Nothing stands in the file.
    #[error("the file is empty; wanted a header time_s,set_v,sense_v,current_a and rows of readings")]
    Empty,
    /// The header lacks a column.
    #[error("the header has no column \"{column}\"; wanted time_s, set_v, sense_v and current_a")]
    MissingColumn {
        /// The column that is not there.
        column: &'static str,
    },
    /// The header names a column nobody knows.
    #[error("unknown column \"{read}\"; {}", nearest_column(read))]
    UnknownColumn {
        /// The name as found.
        read: String,
    },
    /// The header names a column twice.
    #[error("column \"{column}\" stands twice in the header")]
    RepeatedColumn {
        /// The column.
        column: &'static str,
    },
    /// A row has more or fewer cells than the header.
    #[error("read {read} cells, wanted {wanted} as in the header")]
    CellCount {
        /// Cells in the row.
        read: usize,
        /// Columns in the header.
        wanted: usize,
    },
    /// A cell does not hold what its column wants.
    #[error("{column}: read \"{read}\", wanted {wanted}")]
    Cell {
        /// The column.
        column: &'static str,
        /// The text of the cell.
        read: String,
        /// What the column takes.
        wanted: &'static str,
    },
    /// A time before that of the row above.
    #[error("time_s: read \"{read}\", wanted {before} or later as in the row above: time runs backwards")]
    TimeBackwards {
        /// The text of the cell.
        read: String,
        /// The time of the row above, in seconds.
        before: String,
    },
    /// Not enough rows to see anything.
    #[error("rows of readings: {read}, wanted at least {FEWEST_ROWS}")]
    TooFewRows {
        /// Rows found.
        read: usize,
    },
}

fn nearest_column(read: &str) -> String {
    let names = Column::ALL.map(Column::name);
    let distance = |name: &str| strsim::damerau_levenshtein(&read.to_lowercase(), name);
    match names.into_iter().min_by_key(|name| distance(name)).filter(|name| distance(name) <= name.len() / 2)
    {
        Some(name) => format!("did you mean \"{name}\"?"),
        None => format!("known columns: {}", names.join(", ")),
    }
}
