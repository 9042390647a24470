//! The entries about the bench itself, in one file beside the runs: `bench.jsonl`.

use super::{Log, LogError, LogFolder, lines};
use crate::record::{BenchEntry, SCHEMA};
use std::path::PathBuf;

/// Name of the file in a station's folder.
pub(super) const FILE: &str = "bench.jsonl";

/// Where its half-written ends are set aside.
pub(super) const TORN_FILE: &str = "bench.torn";

impl Log {
    /// Keeps an entry about the bench. When this returns, it is on disk.
    ///
    /// # Errors
    /// A disk that refuses.
    pub fn keep(&self, entry: &BenchEntry) -> Result<(), LogError> {
        let path = self.folder().bench_file();
        let line = serde_json::to_string(entry)
            .map_err(|cause| LogError::disk("write the entry as text for", &path)(cause.into()))?;
        lines::append(&path, (line + "\n").as_bytes())
            .map_err(LogError::disk("write the entry about the bench to", &path))?;
        Ok(())
    }
}

impl LogFolder {
    /// The entries about the bench, the earliest first. A line that cannot be read, or that another version of the program
    /// wrote, is left out: what it says counts as not done. Needs no lock.
    ///
    /// # Errors
    /// The file is there and cannot be read.
    pub fn bench_entries(&self) -> Result<Vec<BenchEntry>, LogError> {
        let path = self.bench_file();
        let mut entries = Vec::new();
        let mut number = 0;
        lines::each(&path, |line| {
            number += 1;
            match serde_json::from_str::<BenchEntry>(line) {
                Ok(entry) if entry.schema == SCHEMA => entries.push(entry),
                _ => tracing::warn!("{}:{number}: left out, not an entry of this version", path.display()),
            }
        })
        .map_err(LogError::disk("read the entries about the bench in", &path))?;
        Ok(entries)
    }

    /// The file of entries about the bench.
    pub fn bench_file(&self) -> PathBuf {
        self.path().join(FILE)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::record::{BenchFound, BenchUsed, BoardUnderTest, Moment, Occasion, ProfileUsed, Subject};
    use crate::trace::OutputState;
    use jiff::tz::TimeZone;
    use std::collections::BTreeMap;

    fn entry(minute: u8) -> BenchEntry {
        let utc = format!("2026-12-01T08:{minute:02}:00Z").parse().expect("RFC 3339");
        let used = BenchUsed { name: "b".to_owned(), instruments: Vec::new(), simulated: None };
        let taken = Moment::new(utc, &TimeZone::UTC);
        BenchEntry::new("s", taken, used, BenchFound::Zero { zeros: Vec::new() }, Vec::new())
    }

    fn opened(root: &std::path::Path) -> super::super::Opened {
        Log::open(root, "s", &entry(0).taken).expect("a log")
    }

    #[test]
    fn entries_are_kept_in_order_and_a_torn_one_is_set_aside() {
        let root = tempfile::tempdir().expect("a temporary folder");
        let log = opened(root.path()).log;
        assert_eq!(log.folder().bench_entries().expect("none yet"), []);
        log.keep(&entry(1)).expect("kept");
        log.keep(&entry(2)).expect("kept");
        let path = log.folder().bench_file();
        drop(log);
        let whole = std::fs::read_to_string(&path).expect("text");
        std::fs::write(&path, format!("{whole}{}", &whole[..40])).expect("a torn line");

        let opened = opened(root.path());
        assert_eq!(opened.torn.len(), 1, "{:?}", opened.torn);
        opened.log.keep(&entry(3)).expect("kept behind whole lines");
        let kept = opened.log.folder().bench_entries().expect("readable");
        assert_eq!(kept, [entry(1), entry(2), entry(3)]);
        let set_aside = std::fs::read_to_string(root.path().join("s").join(TORN_FILE)).expect("text");
        assert!(set_aside.contains(&whole[..40]), "{set_aside}");
    }

    /// Work on a bench that was cut off is found at the next start, and work that ended leaves nothing.
    #[test]
    fn work_leaves_a_mark_until_the_output_is_off() {
        let root = tempfile::tempdir().expect("a temporary folder");
        let board = BoardUnderTest {
            board: "(none)".to_owned(),
            revision: "-".to_owned(),
            serial_number: "bench zero".to_owned(),
            batch: None,
            work_order: None,
        };
        let profile = ProfileUsed { path: String::new(), sha256: String::new(), limits: BTreeMap::new() };
        let subject = || Subject {
            board: board.clone(),
            profile: profile.clone(),
            bench: entry(0).bench,
            operator: None,
            occasion: Occasion::Production,
        };
        let mut log = opened(root.path()).log;
        log.start(subject(), entry(1).taken).expect("begun");
        log.end_work(OutputState::Off).expect("ended");
        log.start(subject(), entry(2).taken).expect("nothing in the way");
        log.end_work(OutputState::MayBeOn).expect("the mark stays");
        assert!(log.start(subject(), entry(3).taken).is_err(), "the output may be on");
        drop(log);
        let opened = opened(root.path());
        assert_eq!(opened.leftovers.len(), 1);
        assert!(opened.leftovers[0].to_string().contains("the run of bench zero"), "{}", opened.leftovers[0]);
    }

    #[test]
    fn a_line_of_another_version_is_left_out() {
        let root = tempfile::tempdir().expect("a temporary folder");
        let log = opened(root.path()).log;
        log.keep(&BenchEntry { schema: SCHEMA + 1, ..entry(1) }).expect("kept");
        log.keep(&entry(2)).expect("kept");
        assert_eq!(log.folder().bench_entries().expect("readable"), [entry(2)]);
    }
}
