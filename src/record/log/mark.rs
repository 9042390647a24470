//! The mark of a run that has begun: a small file that is there from before the output goes on until the run is kept.

use super::{LogError, LogFolder, lines};
use crate::record::Identity;
use std::fs::{self, File};
use std::io::{self, Write};
use std::path::PathBuf;

/// What is known of a run from its mark.
#[derive(Debug)]
pub(super) enum Mark {
    /// The run that left it.
    Of(Box<Identity>),
    /// There is a mark, but nobody can say whose.
    Unreadable {
        /// Where it is kept for inspection.
        kept: PathBuf,
    },
}

/// Writes the mark so that it is there as a whole, or not at all.
pub(super) fn write(folder: &LogFolder, identity: &Identity) -> Result<(), LogError> {
    let path = path(folder);
    let text = serde_json::to_string(identity)
        .map_err(|cause| LogError::NoText { run: identity.run.clone(), cause })?;
    let draft = folder.path().join("started.new");
    let put = || -> io::Result<()> {
        let mut file = File::create(&draft)?;
        writeln!(file, "{text}")?;
        file.sync_all()?;
        fs::rename(&draft, &path)?;
        lines::sync_folder(folder.path())
    };
    put().map_err(LogError::disk("mark the run as started in", &path))
}

/// Takes the mark away, if there is one.
pub(super) fn remove(folder: &LogFolder) -> Result<(), LogError> {
    let path = path(folder);
    let cannot = || LogError::disk("take away the mark", &path);
    match fs::remove_file(&path) {
        Err(cause) if cause.kind() != io::ErrorKind::NotFound => Err(cannot()(cause)),
        _ => lines::sync_folder(folder.path()).map_err(cannot()),
    }
}

/// The mark that a run left behind, if any. One that cannot be read is copied aside, since it will be taken away.
pub(super) fn find(folder: &LogFolder) -> Result<Option<Mark>, LogError> {
    let path = path(folder);
    let bytes = match fs::read(&path) {
        Ok(bytes) => bytes,
        Err(cause) if cause.kind() == io::ErrorKind::NotFound => return Ok(None),
        Err(cause) => return Err(LogError::disk("read the mark", &path)(cause)),
    };
    if let Ok(identity) = serde_json::from_slice(&bytes) {
        return Ok(Some(Mark::Of(Box::new(identity))));
    }
    let kept = folder.path().join("started.unreadable");
    fs::write(&kept, &bytes).map_err(LogError::disk("copy the mark to", &kept))?;
    Ok(Some(Mark::Unreadable { kept }))
}

/// Where the mark is, when there is one.
pub(super) fn path(folder: &LogFolder) -> PathBuf {
    folder.path().join("started.json")
}
