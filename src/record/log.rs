//! The append-only log of one station: what was measured is on disk before the next board starts.
//!
//! [`Log::start`] leaves a mark before the output goes on; [`Log::finish`] writes the trace, then the run that points
//! to it, each synced, and takes the mark away. A mark that is still there at the next [`Log::open`] means that a run
//! never ended: it is recorded as `INCOMPLETE`, and no run starts until somebody has confirmed the output to be off.

mod bench_entries;
mod earlier;
mod error;
mod folder;
mod history;
mod lines;
mod lock;
mod mark;
mod passed;
mod read;
mod recovery;
mod rescue;
mod studies;
mod torn;

pub use error::{LogError, Rescue};
pub use folder::LogFolder;
pub use read::{Runs, Unreadable};
pub use recovery::Leftover;
pub use studies::{KeptStudy, Study, StudyHeading};
pub use torn::Torn;

use super::{Identity, Moment, Run, RunId, SCHEMA, Software, Subject, TraceReference};
use crate::trace::{OutputState, Trace};
use crate::verdict::Verdict;
use folder::Kind;
use history::History;
use lock::Lock;
use read::TraceLine;
use std::io;
use std::path::{Path, PathBuf};
use std::time::Duration;

/// The log of one station, open for writing by this program alone.
#[derive(Debug)]
pub struct Log {
    folder: LogFolder,
    state: State,
    _lock: Lock,
}

/// A log just opened, and what its last user left behind.
#[derive(Debug)]
pub struct Opened {
    /// The log.
    pub log: Log,
    /// Runs that never ended. Not empty: command the output off, read it back, then
    /// [`Log::confirm_output_off`], before anything else.
    pub leftovers: Vec<Leftover>,
    /// Half-written lines that were cut off and set aside.
    pub torn: Vec<Torn>,
}

/// What is known of a run when it is over.
#[derive(Clone, Debug, PartialEq)]
pub struct Finished {
    /// What was decided.
    pub verdict: Verdict,
    /// When it was over.
    pub ended: Moment,
    /// How long it took by the bench's own clock.
    pub duration: Duration,
}

#[derive(Debug)]
enum State {
    Ready,
    /// A run has begun. Its trace may be kept already, when only the run line could not be written.
    Running {
        identity: Box<Identity>,
        trace: Option<TraceReference>,
    },
    /// The output may be on from an earlier run.
    OutputUnknown {
        run: Option<RunId>,
    },
}

impl Log {
    /// Opens the log of `station` below the folder `root`, and puts in order what a crash left behind.
    ///
    /// # Errors
    /// A station name that cannot be a folder, another program at work in the same log, or a disk that refuses.
    pub fn open(root: &Path, station: &str, now: &Moment) -> Result<Opened, LogError> {
        let folder = LogFolder::new(root, station)?;
        folder.create()?;
        let lock = Lock::take(&folder)?;
        let torn = torn::mend(&folder, now)?;
        let leftovers = recovery::recover(&folder, now)?;
        let state = match leftovers.first() {
            Some(leftover) => State::OutputUnknown { run: leftover.run().cloned() },
            None => State::Ready,
        };
        Ok(Opened { log: Self { folder, state, _lock: lock }, leftovers, torn })
    }

    /// Where the log is, for reading.
    pub fn folder(&self) -> &LogFolder {
        &self.folder
    }

    /// The mark of a run that has begun: taking it away says that the output is off.
    pub fn mark(&self) -> PathBuf {
        mark::path(&self.folder)
    }

    /// Says that the output was commanded off and read back as off after an earlier run left it unknown.
    ///
    /// # Errors
    /// The mark cannot be taken away.
    pub fn confirm_output_off(&mut self) -> Result<(), LogError> {
        if matches!(self.state, State::OutputUnknown { .. }) {
            mark::remove(&self.folder)?;
            self.state = State::Ready;
        }
        Ok(())
    }

    /// Marks a run as begun. Call it before the output goes on.
    ///
    /// # Errors
    /// An earlier run that is not kept yet or whose output is not confirmed off, or a disk that refuses.
    pub fn start(&mut self, subject: Subject, started: Moment) -> Result<Identity, LogError> {
        match &self.state {
            State::Ready => {}
            State::Running { identity, .. } => {
                return Err(LogError::Unfinished { run: identity.run.clone() });
            }
            State::OutputUnknown { run } => return Err(LogError::OutputNotConfirmed { run: run.clone() }),
        }
        let history = History::of(&self.folder, &subject.board, &started.month())?;
        let identity = Identity {
            run: RunId::new(self.folder.station(), started.utc, history.runs_this_month + 1),
            station: self.folder.station().to_owned(),
            attempt: history.earlier_attempts + 1,
            started,
            board: subject.board,
            profile: subject.profile,
            bench: subject.bench,
            operator: subject.operator,
            occasion: subject.occasion,
            software: Software::this(),
        };
        mark::write(&self.folder, &identity)?;
        self.state = State::Running { identity: Box::new(identity.clone()), trace: None };
        Ok(identity)
    }

    /// Ends what was started and leaves no run: work on the bench itself. Unless the output was read back as off, the mark
    /// stays, and the next start finds work that never ended.
    ///
    /// # Errors
    /// Nothing was started, or the mark cannot be taken away.
    pub fn end_work(&mut self, output: OutputState) -> Result<(), LogError> {
        let State::Running { identity, .. } = &self.state else {
            return Err(LogError::NotStarted);
        };
        self.state = State::OutputUnknown { run: Some(identity.run.clone()) };
        if output == OutputState::Off { self.confirm_output_off() } else { Ok(()) }
    }

    /// Keeps the run that was started: its trace, then the line that points to it. When this returns, both are on
    /// disk. If it fails, the run is still open: free some space and call it again with the same arguments.
    ///
    /// When the output may still be on, the mark stays, and the next start asks for
    /// [`confirm_output_off`](Self::confirm_output_off).
    ///
    /// # Errors
    /// No run was started, or the disk refused; then both lines are written to the system's temporary folder.
    pub fn finish(&mut self, finished: &Finished, trace: &Trace) -> Result<Run, LogError> {
        let State::Running { identity, trace: kept } = &mut self.state else {
            return Err(LogError::NotStarted);
        };
        let trace_line = TraceLine::text(identity, trace)?;
        let mut run = Run {
            schema: SCHEMA,
            outcome: finished.verdict.outcome,
            identity: (**identity).clone(),
            ended: Some(finished.ended.clone()),
            duration_s: Some(finished.duration.as_secs_f64()),
            ending: Some(trace.ending.clone()),
            quantities: finished.verdict.judged.clone(),
            findings: finished.verdict.findings.clone(),
            trace: None,
        };
        let month = identity.started.month();
        let rescued = |path: PathBuf, cause: io::Error, run: &Run| LogError::NotKept {
            run: run.identity.run.clone(),
            path,
            cause,
            rescue: rescue::write(run, &trace_line),
        };
        if kept.is_none() {
            let path = self.folder.file(&month, Kind::Traces);
            match lines::append(&path, trace_line.as_bytes()) {
                Ok(offset) => *kept = Some(read::reference(&month, offset, trace_line.as_bytes())),
                Err(cause) => return Err(rescued(path, cause, &run)),
            }
        }
        run.trace.clone_from(kept);
        let path = self.folder.file(&month, Kind::Runs);
        if let Err(cause) = lines::append(&path, read::run_line(&run)?.as_bytes()) {
            return Err(rescued(path, cause, &run));
        }
        self.state = State::OutputUnknown { run: Some(run.identity.run.clone()) };
        if trace.ending.output == OutputState::Off {
            self.confirm_output_off()?;
        }
        Ok(run)
    }
}
