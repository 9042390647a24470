//! The last resort for a run that the log could not keep: a copy of its lines in the system's temporary folder.

use super::error::Rescue;
use super::read;
use crate::record::Run;
use std::io::{self, Write};
use std::path::PathBuf;

/// Writes the trace line and the run line to a new file that stays when the program ends.
pub(super) fn write(run: &Run, trace_line: &str) -> Rescue {
    let folder = std::env::temp_dir();
    let put = || -> io::Result<PathBuf> {
        let prefix = format!("ebbmark-rescue-{}-", run.identity.run);
        let mut file = tempfile::Builder::new().prefix(&prefix).suffix(".jsonl").tempfile_in(&folder)?;
        file.write_all(trace_line.as_bytes())?;
        file.write_all(read::run_line(run).map_err(io::Error::other)?.as_bytes())?;
        file.as_file().sync_all()?;
        let (_, path) = file.keep().map_err(|kept| kept.error)?;
        Ok(path)
    };
    match put() {
        Ok(path) => Rescue::Written(path),
        Err(cause) => Rescue::Failed { folder, cause },
    }
}
