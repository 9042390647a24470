//! Runs that never ended, found when the log is opened: recorded as `INCOMPLETE`, so that they are not forgotten.

use super::folder::Kind;
use super::mark::{self, Mark};
use super::read::{self, TraceLine};
use super::{LogError, LogFolder, lines};
use crate::analysis::{About, Finding, FindingCode};
use crate::record::{Identity, Moment, Run, RunId, SCHEMA, TraceReference};
use crate::verdict::Outcome;
use std::collections::BTreeSet;
use std::fs::File;
use std::io::ErrorKind;
use std::path::PathBuf;

/// What an earlier run left behind. The output of its supply may still be on.
#[derive(Clone, Debug, PartialEq)]
pub enum Leftover {
    /// It never ended, and is in the log as `INCOMPLETE` now.
    Incomplete(Box<Run>),
    /// It is in the log, but its output was not confirmed off, or the program ended before it could say so.
    OutputUnknown(Box<Identity>),
    /// A run had begun, but its mark cannot be read.
    UnreadableMark {
        /// Where the mark is kept.
        kept: PathBuf,
    },
}

impl Leftover {
    /// The run, where it is known.
    pub fn run(&self) -> Option<&RunId> {
        self.identity().map(|identity| &identity.run)
    }

    /// What was known of the run when it began, where the run is known.
    pub fn identity(&self) -> Option<&Identity> {
        match self {
            Leftover::Incomplete(run) => Some(&run.identity),
            Leftover::OutputUnknown(identity) => Some(identity),
            Leftover::UnreadableMark { .. } => None,
        }
    }
}

impl std::fmt::Display for Leftover {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Leftover::Incomplete(run) => write!(
                f,
                "the run of {} begun {} never ended; it is recorded as INCOMPLETE ({})",
                run.identity.board.serial_number,
                run.identity.started.on_the_wall(),
                run.identity.run
            ),
            Leftover::OutputUnknown(identity) => write!(
                f,
                "the run of {} begun {} is recorded, but its output was not confirmed off ({})",
                identity.board.serial_number,
                identity.started.on_the_wall(),
                identity.run
            ),
            Leftover::UnreadableMark { kept } => write!(
                f,
                "a run had begun and never ended, but its mark cannot be read; it is kept in {}",
                kept.display()
            ),
        }
    }
}

/// Records what never ended. The mark stays until the output is confirmed off; what is recorded once is not again.
pub(super) fn recover(folder: &LogFolder, now: &Moment) -> Result<Vec<Leftover>, LogError> {
    let mark = mark::find(folder)?;
    let marked = match &mark {
        Some(Mark::Of(identity)) => Some(&**identity),
        _ => None,
    };
    let mut months: BTreeSet<String> = folder.months()?.into_iter().next_back().into_iter().collect();
    months.extend(marked.map(|identity| identity.started.month()));

    let mut leftovers = Vec::new();
    for month in &months {
        if let Some((identity, trace)) = last_trace(folder, month)?
            && !is_recorded(folder, &identity)?
        {
            leftovers.push(record(folder, identity, Some(trace), now)?);
        }
    }
    match mark {
        Some(Mark::Of(identity)) if leftovers.iter().all(|found| found.run() != Some(&identity.run)) => {
            leftovers.push(if is_recorded(folder, &identity)? {
                Leftover::OutputUnknown(identity)
            } else {
                record(folder, *identity, None, now)?
            });
        }
        Some(Mark::Of(_)) | None => {}
        Some(Mark::Unreadable { kept }) => leftovers.push(Leftover::UnreadableMark { kept }),
    }
    Ok(leftovers)
}

/// The last trace of a month and whose it is. Only the last can be without its run: the next start would have found it.
fn last_trace(folder: &LogFolder, month: &str) -> Result<Option<(Identity, TraceReference)>, LogError> {
    let path = folder.file(month, Kind::Traces);
    let cannot = || LogError::disk("read", &path);
    let mut file = match File::open(&path) {
        Ok(file) => file,
        Err(cause) if cause.kind() == ErrorKind::NotFound => return Ok(None),
        Err(cause) => return Err(cannot()(cause)),
    };
    let Some((offset, line)) = lines::last(&mut file).map_err(cannot())? else { return Ok(None) };
    let reference = read::reference(month, offset, &line);
    let whose = serde_json::from_slice::<TraceLine<'_>>(&line).ok();
    Ok(whose.map(|line| (line.identity.into_owned(), reference)))
}

fn is_recorded(folder: &LogFolder, identity: &Identity) -> Result<bool, LogError> {
    Ok(folder.run_in(&identity.started.month(), identity.run.as_str())?.is_some())
}

fn record(
    folder: &LogFolder,
    identity: Identity,
    trace: Option<TraceReference>,
    now: &Moment,
) -> Result<Leftover, LogError> {
    let kept = match &trace {
        Some(_) => "its trace was kept and can be judged again",
        None => "nothing it measured was kept",
    };
    let text = format!(
        "the run never ended, and was found at the next start at {}: a power cut, a full disk, or \
         the program was killed; {kept}. Test the board again.",
        now.local
    );
    let path = folder.file(&identity.started.month(), Kind::Runs);
    let run = Run {
        schema: SCHEMA,
        outcome: Outcome::Incomplete,
        identity,
        ended: None,
        duration_s: None,
        ending: None,
        quantities: Vec::new(),
        findings: vec![Finding { code: FindingCode::Incomplete, about: About::Bench, text }],
        trace,
    };
    lines::append(&path, read::run_line(&run)?.as_bytes())
        .map_err(LogError::disk("record the run that never ended in", &path))?;
    Ok(Leftover::Incomplete(Box::new(run)))
}
