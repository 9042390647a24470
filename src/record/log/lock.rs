//! One program at a time: an exclusive lock on a file of its own, never on one that is written or renamed.

use super::{LogError, LogFolder};
use std::fs::{File, OpenOptions, TryLockError};
use std::io::{Read, Seek, SeekFrom, Write};

/// Held as long as the log is open; the system lets go of it even when the program is killed.
#[derive(Debug)]
pub(super) struct Lock(File);

impl Lock {
    pub(super) fn take(folder: &LogFolder) -> Result<Self, LogError> {
        let path = folder.path().join(".lock");
        let cannot = || LogError::disk("lock", &path);
        let mut file = OpenOptions::new()
            .read(true)
            .write(true)
            .create(true)
            .truncate(false)
            .open(&path)
            .map_err(cannot())?;
        match file.try_lock() {
            Ok(()) => {}
            Err(TryLockError::WouldBlock) => {
                let mut holder = String::new();
                // Where the system keeps a locked file from being read, the name of its holder stays unknown.
                let known = file.read_to_string(&mut holder).is_ok() && !holder.trim().is_empty();
                let holder = if known { holder.trim().to_owned() } else { "another program".to_owned() };
                return Err(LogError::Taken { path, holder });
            }
            Err(TryLockError::Error(cause)) => return Err(cannot()(cause)),
        }
        file.set_len(0)
            .and_then(|()| file.seek(SeekFrom::Start(0)))
            .and_then(|_| writeln!(file, "process {}", std::process::id()))
            .map_err(cannot())?;
        Ok(Self(file))
    }
}

impl Drop for Lock {
    /// Closing alone would not do: a child process that has been forked and not yet started its own program shares
    /// the open file, and with it the lock.
    fn drop(&mut self) {
        // A lock that cannot be given back ends with the program.
        let _ = self.0.unlock();
    }
}
