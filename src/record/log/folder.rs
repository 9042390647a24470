//! The folder of one station's log, and the names of the files in it.

use super::{LogError, lines};
use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};

/// The folder `logs/<station>/`. Reading needs no more than this.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct LogFolder {
    path: PathBuf,
    station: String,
}

/// The two kinds of files, one of each a month.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Kind {
    /// A line per run: every sample and setting.
    Traces,
    /// A short line per run.
    Runs,
}

impl Kind {
    pub(super) const ALL: [Self; 2] = [Self::Traces, Self::Runs];

    fn word(self) -> &'static str {
        match self {
            Kind::Traces => "traces",
            Kind::Runs => "runs",
        }
    }

    pub(super) fn file_name(self, month: &str) -> String {
        format!("{month}.{}.jsonl", self.word())
    }
}

impl LogFolder {
    /// The folder of `station` below `root`. Touches no file.
    ///
    /// # Errors
    /// [`LogError::StationName`].
    pub fn new(root: &Path, station: &str) -> Result<Self, LogError> {
        let plain = |letter: char| letter.is_ascii_alphanumeric() || matches!(letter, '-' | '_' | '.');
        if station.is_empty() || station.starts_with('.') || !station.chars().all(plain) {
            return Err(LogError::StationName { station: station.to_owned() });
        }
        Ok(Self { path: root.join(station), station: station.to_owned() })
    }

    /// Where it is.
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// The station it belongs to.
    pub fn station(&self) -> &str {
        &self.station
    }

    pub(super) fn create(&self) -> Result<(), LogError> {
        fs::create_dir_all(&self.path).map_err(LogError::disk("create the folder", &self.path))?;
        let root = self.path.parent().unwrap_or(&self.path);
        lines::sync_folder(root).map_err(LogError::disk("sync the folder", root))
    }

    pub(super) fn file(&self, month: &str, kind: Kind) -> PathBuf {
        self.path.join(kind.file_name(month))
    }

    /// Where what was cut off such a file is set aside.
    pub(super) fn torn_file(&self, month: &str, kind: Kind) -> PathBuf {
        self.path.join(format!("{month}.{}.torn", kind.word()))
    }

    /// The months that have a file of either kind, earliest first.
    pub(super) fn months(&self) -> Result<BTreeSet<String>, LogError> {
        let cannot = || LogError::disk("list the folder", &self.path);
        let mut months = BTreeSet::new();
        for entry in fs::read_dir(&self.path).map_err(cannot())? {
            let name = entry.map_err(cannot())?.file_name();
            let month = name.to_str().and_then(|name| name.get(..7)).unwrap_or_default();
            let named = Kind::ALL.iter().any(|kind| name.to_str() == Some(&kind.file_name(month)));
            if named && is_month(month) {
                months.insert(month.to_owned());
            }
        }
        Ok(months)
    }
}

fn is_month(text: &str) -> bool {
    text.char_indices().all(|(at, letter)| if at == 4 { letter == '-' } else { letter.is_ascii_digit() })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_station_is_a_plain_folder_name() {
        let root = Path::new("logs");
        assert_eq!(LogFolder::new(root, "bench-1").expect("plain").path(), Path::new("logs/bench-1"));
        for name in ["", ".", "..", "../x", "a/b", "a b", ".hidden", "b\u{e4}nk"] {
            assert!(LogFolder::new(root, name).is_err(), "{name}");
        }
    }

    #[test]
    fn only_the_log_s_own_files_count_as_months() {
        let root = tempfile::tempdir().expect("a temporary folder");
        let folder = LogFolder::new(root.path(), "s").expect("plain");
        folder.create().expect("a new folder");
        for name in
            ["2026-10.runs.jsonl", "2026-09.traces.jsonl", "2026-08.runs.torn", "2026_07.runs.jsonl", "x"]
        {
            fs::write(folder.path().join(name), "").expect("a small file");
        }
        let months: Vec<String> = folder.months().expect("it exists").into_iter().collect();
        assert_eq!(months, ["2026-09", "2026-10"]);
    }
}
