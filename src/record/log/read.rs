//! The lines of a log as text, and back: run lines of all months in order, and one trace, verified by its hash.

use super::folder::Kind;
use super::{LogError, LogFolder, lines};
use crate::record::{Identity, Run, SCHEMA, TraceReference};
use crate::trace::Trace;
use serde::{Deserialize, Serialize};
use std::borrow::Cow;
use std::fs::File;
use std::io::{self, BufRead, BufReader, ErrorKind, Read, Seek, SeekFrom};
use std::path::PathBuf;

/// One line of a file of traces. It says whose it is, so that it stands up without its run line.
#[derive(Serialize, Deserialize)]
pub(super) struct TraceLine<'t> {
    schema: u32,
    pub(super) identity: Cow<'t, Identity>,
    trace: Cow<'t, Trace>,
}

impl TraceLine<'_> {
    /// The line with its newline.
    pub(super) fn text(identity: &Identity, trace: &Trace) -> Result<String, LogError> {
        let line =
            TraceLine { schema: SCHEMA, identity: Cow::Borrowed(identity), trace: Cow::Borrowed(trace) };
        text_of(&line, identity)
    }
}

/// The line of a run with its newline.
pub(super) fn run_line(run: &Run) -> Result<String, LogError> {
    text_of(run, &run.identity)
}

fn text_of(line: &impl Serialize, identity: &Identity) -> Result<String, LogError> {
    serde_json::to_string(line)
        .map(|text| text + "\n")
        .map_err(|cause| LogError::NoText { run: identity.run.clone(), cause })
}

/// What a run keeps of the trace line at `offset`.
pub(super) fn reference(month: &str, offset: u64, line: &[u8]) -> TraceReference {
    TraceReference {
        file: Kind::Traces.file_name(month),
        offset,
        length: line.len() as u64,
        sha256: lines::sha256(line),
    }
}

impl LogFolder {
    /// The runs of all months, the earliest first. Needs no lock: a run may be added meanwhile.
    ///
    /// # Errors
    /// The folder cannot be listed.
    pub fn runs(&self) -> Result<Runs, LogError> {
        let files: Vec<PathBuf> = self.months()?.iter().map(|month| self.file(month, Kind::Runs)).collect();
        Ok(Runs { files: files.into_iter(), open: None })
    }

    /// The run called `name`; where a run was written twice, the last line counts.
    ///
    /// # Errors
    /// The folder cannot be listed, or there is no such run.
    pub fn run(&self, name: &str) -> Result<Run, LogError> {
        let mut found = None;
        for month in self.months()? {
            found = self.run_in(&month, name)?.or(found);
        }
        found.ok_or_else(|| LogError::NoSuchRun { run: name.to_owned(), path: self.path().to_owned() })
    }

    /// The run called `name` in the file of one month, if it is there. Only lines that hold the name are parsed.
    pub(super) fn run_in(&self, month: &str, name: &str) -> Result<Option<Run>, LogError> {
        let path = self.file(month, Kind::Runs);
        let mut found = None;
        lines::each(&path, |line| {
            if line.contains(name)
                && let Ok(run) = run_of(line.as_bytes())
                && run.identity.run.as_str() == name
            {
                found = Some(run);
            }
        })
        .map_err(LogError::disk("read the runs in", &path))?;
        Ok(found)
    }

    /// The trace of `run`, after its hash has been verified.
    ///
    /// # Errors
    /// The run has no trace, its file cannot be read, or the line is not what it was.
    pub fn trace(&self, run: &Run) -> Result<Trace, LogError> {
        let name = || run.identity.run.clone();
        let reference = run.trace.as_ref().ok_or_else(|| LogError::NoTrace { run: name() })?;
        let path = self.path().join(&reference.file);
        let mut line = Vec::new();
        let mut read = || -> io::Result<usize> {
            let mut file = File::open(&path)?;
            file.seek(SeekFrom::Start(reference.offset))?;
            file.take(reference.length).read_to_end(&mut line)
        };
        read().map_err(LogError::disk("read the traces in", &path))?;
        let found = lines::sha256(&line);
        if found != reference.sha256 {
            return Err(LogError::TraceChanged {
                run: name(),
                path,
                found,
                wanted: reference.sha256.clone(),
            });
        }
        match serde_json::from_slice::<TraceLine<'_>>(&line) {
            Ok(line) => Ok(line.trace.into_owned()),
            Err(cause) => Err(LogError::TraceUnreadable { run: name(), path, cause }),
        }
    }
}

/// A run line that cannot be read. It stays in its file.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("{}:{line}: {reason}", .file.display())]
pub struct Unreadable {
    /// The file of runs.
    pub file: PathBuf,
    /// The line, counted from 1; 0 when the file cannot be opened.
    pub line: usize,
    /// What is wrong with it.
    pub reason: String,
}

/// The runs of a log, read one by one. A line that cannot be read is reported, and the next one follows.
#[derive(Debug)]
pub struct Runs {
    files: std::vec::IntoIter<PathBuf>,
    open: Option<OpenFile>,
}

#[derive(Debug)]
struct OpenFile {
    path: PathBuf,
    reader: BufReader<File>,
    line: usize,
}

impl Iterator for Runs {
    type Item = Result<Run, Unreadable>;

    fn next(&mut self) -> Option<Self::Item> {
        loop {
            if let Some(open) = &mut self.open {
                if let Some(item) = open.next() {
                    return Some(item);
                }
                self.open = None;
            }
            let path = self.files.next()?;
            match File::open(&path) {
                Ok(file) => self.open = Some(OpenFile { path, reader: BufReader::new(file), line: 0 }),
                Err(cause) if cause.kind() == ErrorKind::NotFound => {}
                Err(cause) => {
                    return Some(Err(Unreadable { file: path, line: 0, reason: cause.to_string() }));
                }
            }
        }
    }
}

impl OpenFile {
    fn next(&mut self) -> Option<Result<Run, Unreadable>> {
        let mut bytes = Vec::new();
        self.line += 1;
        let read = self.reader.read_until(b'\n', &mut bytes);
        let reason = match read {
            Ok(0) => return None,
            Ok(_) if !bytes.ends_with(b"\n") => "a half-written last line".to_owned(),
            Ok(_) => match run_of(&bytes) {
                Ok(run) => return Some(Ok(run)),
                Err(reason) => reason,
            },
            Err(cause) => cause.to_string(),
        };
        Some(Err(Unreadable { file: self.path.clone(), line: self.line, reason }))
    }
}

pub(super) fn run_of(line: &[u8]) -> Result<Run, String> {
    #[derive(Deserialize)]
    struct Layout {
        schema: u32,
    }
    let layout: Layout = serde_json::from_slice(line).map_err(|cause| format!("not a run: {cause}"))?;
    if layout.schema != SCHEMA {
        return Err(format!("schema {}, this version of the program reads schema {SCHEMA}", layout.schema));
    }
    serde_json::from_slice(line).map_err(|cause| format!("not a run: {cause}"))
}
