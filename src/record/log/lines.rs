//! A file of lines that only grows: whole lines at the end, on disk or not there at all.

use sha2::{Digest, Sha256};
use std::fs::{File, OpenOptions};
use std::io::{self, BufRead, BufReader, Read, Seek, SeekFrom, Write};
use std::path::Path;

/// Appends `line`, which ends with a newline, and waits until it is on disk. Returns where it begins.
///
/// # Errors
/// Whatever the system says. The file is then as long as it was, so that no later line joins a torn one.
pub(super) fn append(path: &Path, line: &[u8]) -> io::Result<u64> {
    let is_new = !path.exists();
    let mut file = OpenOptions::new().read(true).append(true).create(true).open(path)?;
    if is_new && let Some(folder) = path.parent() {
        sync_folder(folder)?;
    }
    let old = file.metadata()?.len();
    if !ends_with_newline(&mut file, old)? {
        return Err(io::Error::other(
            "its last line is torn; close the program and start it again to mend the log",
        ));
    }
    if let Err(cause) = file.write_all(line).and_then(|()| file.sync_data()) {
        file.set_len(old)?;
        file.sync_data()?;
        return Err(cause);
    }
    Ok(old)
}

/// The last line with its newline, if it has one, and where it begins; `None` in an empty file.
pub(super) fn last(file: &mut File) -> io::Result<Option<(u64, Vec<u8>)>> {
    const BLOCK: u64 = 64 * 1024;
    let end = file.seek(SeekFrom::End(0))?;
    if end == 0 {
        return Ok(None);
    }
    let mut line = Vec::new();
    let mut from = end;
    while from > 0 {
        let length = BLOCK.min(from);
        from -= length;
        let mut block = vec![0; length as usize];
        file.seek(SeekFrom::Start(from))?;
        file.read_exact(&mut block)?;
        block.append(&mut line);
        line = block;
        let before_last = &line[..line.len() - 1];
        if let Some(newline) = before_last.iter().rposition(|byte| *byte == b'\n') {
            line.drain(..=newline);
            break;
        }
    }
    Ok(Some((end - line.len() as u64, line)))
}

/// Shows every line to `look`; a file that is not there has none, and a line that is not text shows as empty.
pub(super) fn each(path: &Path, mut look: impl FnMut(&str)) -> io::Result<()> {
    let mut reader = match File::open(path) {
        Ok(file) => BufReader::with_capacity(256 * 1024, file),
        Err(cause) if cause.kind() == io::ErrorKind::NotFound => return Ok(()),
        Err(cause) => return Err(cause),
    };
    let mut line = Vec::new();
    while reader.read_until(b'\n', &mut line)? > 0 {
        look(std::str::from_utf8(&line).unwrap_or_default());
        line.clear();
    }
    Ok(())
}

/// SHA-256 in hexadecimal.
pub(super) fn sha256(bytes: &[u8]) -> String {
    Sha256::digest(bytes).iter().map(|byte| format!("{byte:02x}")).collect()
}

/// Makes the names of new and renamed files in a folder last through a power cut.
#[cfg(unix)]
pub(super) fn sync_folder(folder: &Path) -> io::Result<()> {
    File::open(if folder.as_os_str().is_empty() { Path::new(".") } else { folder })?.sync_all()
}

/// Elsewhere a folder cannot be opened as a file; the file system keeps names in its own journal.
#[cfg(not(unix))]
pub(super) fn sync_folder(_folder: &Path) -> io::Result<()> {
    Ok(())
}

fn ends_with_newline(file: &mut File, length: u64) -> io::Result<bool> {
    if length == 0 {
        return Ok(true);
    }
    let mut byte = [0];
    file.seek(SeekFrom::Start(length - 1))?;
    file.read_exact(&mut byte)?;
    Ok(byte == *b"\n")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_last_line_is_found_however_long_it_is() {
        let folder = tempfile::tempdir().expect("a temporary folder");
        let path = folder.path().join("lines");
        for length in [1, 2, 65_534, 65_535, 65_536, 65_537, 200_000] {
            let line = format!("{}\n", "x".repeat(length));
            std::fs::write(&path, format!("first\n{line}")).expect("a file");
            let found =
                last(&mut File::open(&path).expect("it exists")).expect("readable").expect("not empty");
            assert_eq!((found.0, found.1.len()), (6, length + 1));
            std::fs::write(&path, &line).expect("a file");
            let only =
                last(&mut File::open(&path).expect("it exists")).expect("readable").expect("not empty");
            assert_eq!((only.0, only.1.len()), (0, length + 1));
        }
        std::fs::write(&path, "").expect("a file");
        assert_eq!(last(&mut File::open(&path).expect("it exists")).expect("readable"), None);
    }

    #[test]
    fn nothing_is_joined_to_a_torn_line() {
        let folder = tempfile::tempdir().expect("a temporary folder");
        let path = folder.path().join("lines");
        assert_eq!(append(&path, b"one\n").expect("a new file"), 0);
        assert_eq!(append(&path, b"two\n").expect("one more"), 4);
        std::fs::write(&path, "one\ntw").expect("a file");
        assert!(append(&path, b"three\n").expect_err("torn").to_string().contains("torn"));
        assert_eq!(std::fs::read_to_string(&path).expect("text"), "one\ntw");
    }

    /// FIPS 180-4 test vector for the message "abc" (NIST, SHA-256 example 1).
    #[test]
    fn the_hash_is_that_of_the_standard() {
        assert_eq!(sha256(b"abc"), "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
    }
}
