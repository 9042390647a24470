//! Half-written last lines: cut off, set aside and reported; never dropped, and never joined by the next line.

use super::folder::Kind;
use super::{LogError, LogFolder, bench_entries, lines};
use crate::record::Moment;
use serde::de::IgnoredAny;
use std::fs::OpenOptions;
use std::io::{self, ErrorKind};
use std::path::{Path, PathBuf};

/// A half-written line that was found at the end of a file.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Torn {
    /// The file it was cut off.
    pub file: PathBuf,
    /// Where it began, in bytes.
    pub offset: u64,
    /// How many bytes there were.
    pub length: usize,
    /// Where those bytes are kept.
    pub kept: PathBuf,
}

impl std::fmt::Display for Torn {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(
            f,
            "{} ended with a half-written line ({} bytes from byte {}), as a power cut leaves it; it is set aside in {}",
            self.file.display(),
            self.length,
            self.offset,
            self.kept.display()
        )
    }
}

/// Makes every file of the log end with a whole line.
pub(super) fn mend(folder: &LogFolder, now: &Moment) -> Result<Vec<Torn>, LogError> {
    let mut files = vec![(folder.bench_file(), folder.path().join(bench_entries::TORN_FILE))];
    for month in folder.months()? {
        files.extend(Kind::ALL.map(|kind| (folder.file(&month, kind), folder.torn_file(&month, kind))));
    }
    let mut torn = Vec::new();
    for (file, kept) in files {
        while let Some(cut) = mend_end(&file, &kept, now).map_err(LogError::disk("mend the end of", &file))? {
            torn.push(cut);
        }
    }
    Ok(torn)
}

/// Cuts off one torn line. Setting it aside comes first, so that a crash between the two repeats rather than loses it.
pub(super) fn mend_end(path: &Path, kept: &Path, now: &Moment) -> io::Result<Option<Torn>> {
    let mut file = match OpenOptions::new().read(true).write(true).open(path) {
        Ok(file) => file,
        Err(cause) if cause.kind() == ErrorKind::NotFound => return Ok(None),
        Err(cause) => return Err(cause),
    };
    let Some((offset, line)) = lines::last(&mut file)? else { return Ok(None) };
    if is_whole(&line) {
        return Ok(None);
    }
    let name = path.file_name().unwrap_or_default().to_string_lossy();
    let heading = format!("# set aside {}: {name}, {} bytes from byte {offset}:\n", now.utc, line.len());
    lines::append(kept, &[heading.as_bytes(), &line, b"\n"].concat())?;
    file.set_len(offset)?;
    file.sync_all()?;
    Ok(Some(Torn { file: path.to_owned(), offset, length: line.len(), kept: kept.to_owned() }))
}

fn is_whole(line: &[u8]) -> bool {
    line.ends_with(b"\n") && serde_json::from_slice::<IgnoredAny>(line).is_ok()
}
