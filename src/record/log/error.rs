//! Why a log cannot be opened, written or read, and what to do about it.

use crate::record::RunId;
use std::io;
use std::path::PathBuf;

/// What went wrong with a log. The cause is part of the message.
#[derive(Debug, thiserror::Error)]
pub enum LogError {
    /// The name of the station cannot be the name of a folder.
    #[error(
        "station \"{station}\": wanted letters, digits, '-', '_' and '.', not beginning with '.', such as \"bench-1\""
    )]
    StationName {
        /// The name as given.
        station: String,
    },
    /// The name of a study cannot be the name of a file.
    #[error(
        "study \"{name}\": wanted letters, digits, '-', '_' and '.', not beginning with '.', such as \"first-prototypes\""
    )]
    StudyName {
        /// The name as given.
        name: String,
    },
    /// A line of a study that is whole and not understood.
    #[error(
        "{path}:{line}: not a line of a study: {cause}; was it changed, or written by a newer version? \
         give the study another --name to begin anew",
        path = .path.display()
    )]
    StudyLine {
        /// The file.
        path: PathBuf,
        /// The line, counted from 1.
        line: usize,
        /// What the reader said.
        cause: serde_json::Error,
    },
    /// Another program has the log open.
    #[error(
        "{path} is in use by {holder}: a second program on the same bench would disturb its measurement; \
         close the other one, or give this bench a station of its own with `--station`",
        path = .path.display()
    )]
    Taken {
        /// The lock file.
        path: PathBuf,
        /// Who holds it, in words.
        holder: String,
    },
    /// The disk refused.
    #[error("cannot {doing} {path}: {cause}; see that the folder exists, is writable and has space left", path = .path.display())]
    Disk {
        /// What was tried.
        doing: &'static str,
        /// With which file or folder.
        path: PathBuf,
        /// What the system said.
        cause: io::Error,
    },
    /// A record that has no text form: a fault of this program.
    #[error("run {run} cannot be written as text: {cause}; this is a fault of the program, please report it")]
    NoText {
        /// The run.
        run: RunId,
        /// What the writer said.
        cause: serde_json::Error,
    },
    /// A run was started while an earlier one is not kept.
    #[error(
        "run {run} is not in the log yet; nothing new is measured until it is: free disk space and try again"
    )]
    Unfinished {
        /// The earlier run.
        run: RunId,
    },
    /// A run was started while the output may be on.
    #[error(
        "the output may still be on after {}: switch it off and read it back before anything else",
        .run.as_ref().map_or_else(|| "an earlier run".to_owned(), |run| format!("run {run}"))
    )]
    OutputNotConfirmed {
        /// The run that left it so, where that is known.
        run: Option<RunId>,
    },
    /// A run was finished that had not been started: a fault of this program.
    #[error("there is no started run to finish; this is a fault of the program, please report it")]
    NotStarted,
    /// A finished run could not be kept.
    #[error("run {run} could not be written to {path}: {cause}; {rescue}", path = .path.display())]
    NotKept {
        /// The run.
        run: RunId,
        /// The file that refused; it is as long as it was before.
        path: PathBuf,
        /// What the system said.
        cause: io::Error,
        /// What became of the data.
        rescue: Rescue,
    },
    /// No such run in the log.
    #[error("no run {run} in {path}; `log show` lists the runs there are", path = .path.display())]
    NoSuchRun {
        /// The run as asked for.
        run: String,
        /// The folder of the log.
        path: PathBuf,
    },
    /// A run without samples.
    #[error("run {run} has no trace: it never ended, and nothing it measured was kept")]
    NoTrace {
        /// The run.
        run: RunId,
    },
    /// A trace that is not what it was when its run was written.
    #[error(
        "the trace of run {run} in {path} has been changed: read SHA-256 {found}, wanted {wanted}; \
         bring the file back from a copy, and do not judge from it",
        path = .path.display()
    )]
    TraceChanged {
        /// The run.
        run: RunId,
        /// The file of traces.
        path: PathBuf,
        /// The hash of the line as it stands.
        found: String,
        /// The hash in the run.
        wanted: String,
    },
    /// A trace that is what it was, but not understood.
    #[error("the trace of run {run} in {path} cannot be read: {cause}; was it written by a newer version?", path = .path.display())]
    TraceUnreadable {
        /// The run.
        run: RunId,
        /// The file of traces.
        path: PathBuf,
        /// What the reader said.
        cause: serde_json::Error,
    },
}

impl LogError {
    pub(super) fn disk(doing: &'static str, path: impl Into<PathBuf>) -> impl FnOnce(io::Error) -> Self {
        let path = path.into();
        move |cause| Self::Disk { doing, path, cause }
    }
}

/// What became of a run that the log could not keep.
#[derive(Debug)]
pub enum Rescue {
    /// Its trace line and its run line are in this file.
    Written(PathBuf),
    /// The temporary folder refused as well.
    Failed {
        /// The temporary folder.
        folder: PathBuf,
        /// What the system said.
        cause: io::Error,
    },
}

impl std::fmt::Display for Rescue {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Rescue::Written(path) => write!(
                f,
                "nothing measured is lost: a copy is in {}; move it to a safe place, free disk space, start again",
                path.display()
            ),
            Rescue::Failed { folder, cause } => write!(
                f,
                "a copy could not be written to {} either ({cause}): this run is lost when the program ends; \
                 free disk space and test the board again",
                folder.display()
            ),
        }
    }
}
