//! Studies in progress: one file each below `studies`, a heading and then a line for every finished cycle.
//!
//! A line is on disk before the next cycle begins, so that whatever ends a study costs at most the cycle on the bench.

use super::torn::mend_end;
use super::{Log, LogError, LogFolder, Torn, lines};
use crate::record::{Moment, SCHEMA, Software};
use crate::study::{Cycle, Plan};
use crate::trace::Trace;
use serde::{Deserialize, Serialize};
use std::fs;
use std::path::PathBuf;

/// Folder of the studies in a station's folder.
const FOLDER: &str = "studies";

/// The first line of a study: what was ordered.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct StudyHeading {
    /// Layout of the lines: [`SCHEMA`].
    pub schema: u32,
    /// Part number of the boards.
    pub board: String,
    /// Their revision.
    pub revision: String,
    /// SHA-256 of the profile's text, in hexadecimal.
    pub profile_sha256: String,
    /// What was simulated, in words; absent on a real bench.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub simulated: Option<String>,
    /// The cycles ordered.
    pub plan: Plan,
    /// When it began.
    pub begun: Moment,
    /// The program that began it.
    pub software: Software,
}

impl StudyHeading {
    /// True when the other orders the same of the same boards; when it began, and by which program, does not matter.
    pub fn orders_the_same(&self, other: &Self) -> bool {
        let ordered =
            |it: &Self| (it.schema, it.profile_sha256.clone(), it.simulated.clone(), it.plan.clone());
        ordered(self) == ordered(other)
    }
}

/// What is kept of a study.
#[derive(Clone, Debug, PartialEq)]
pub struct KeptStudy {
    /// Its heading.
    pub heading: StudyHeading,
    /// The finished cycles, as they came.
    pub cycles: Vec<Cycle>,
}

/// A study that takes more cycles. Only an open [`Log`] gives one; keep that log open, its lock keeps others away.
#[derive(Debug)]
pub struct Study {
    path: PathBuf,
}

/// A finished cycle with every reading. They stay on disk when a study is read back.
#[derive(Serialize)]
struct Line<'l> {
    #[serde(flatten)]
    cycle: &'l Cycle,
    trace: &'l Trace,
}

impl LogFolder {
    /// The file of the study called `name`.
    ///
    /// # Errors
    /// [`LogError::StudyName`].
    pub fn study_file(&self, name: &str) -> Result<PathBuf, LogError> {
        let plain = |letter: char| letter.is_ascii_alphanumeric() || matches!(letter, '-' | '_' | '.');
        if name.is_empty() || name.starts_with('.') || !name.chars().all(plain) {
            return Err(LogError::StudyName { name: name.to_owned() });
        }
        Ok(self.path().join(FOLDER).join(format!("{name}.jsonl")))
    }

    /// What is kept of the study called `name`; `None` where there is nothing yet. A torn last line is left out.
    ///
    /// # Errors
    /// A name that cannot be a file, a file that cannot be read, or one that is no study.
    pub fn study(&self, name: &str) -> Result<Option<KeptStudy>, LogError> {
        let path = self.study_file(name)?;
        let text = match fs::read_to_string(&path) {
            Ok(text) => text,
            Err(cause) if cause.kind() == std::io::ErrorKind::NotFound => return Ok(None),
            Err(cause) => return Err(LogError::disk("read the study", path)(cause)),
        };
        let mut whole = text.split_inclusive('\n').filter(|line| line.ends_with('\n')).enumerate();
        let foreign = |line: usize, cause: serde_json::Error| LogError::StudyLine {
            path: path.clone(),
            line: line + 1,
            cause,
        };
        let Some((at, line)) = whole.next() else { return Ok(None) };
        let heading: StudyHeading = serde_json::from_str(line).map_err(|cause| foreign(at, cause))?;
        let mut cycles: Vec<Cycle> = Vec::new();
        for (at, line) in whole {
            let cycle: Cycle = serde_json::from_str(line).map_err(|cause| foreign(at, cause))?;
            if cycles.iter().all(|known| known.order != cycle.order) {
                cycles.push(cycle);
            }
        }
        Ok(Some(KeptStudy { heading, cycles }))
    }
}

impl Log {
    /// Opens the study called `name` for more cycles: a half-written line is cut off and set aside, and a new study gets
    /// its heading.
    ///
    /// # Errors
    /// A name that cannot be a file, or a disk that refuses.
    pub fn open_study(
        &self,
        name: &str,
        heading: &StudyHeading,
        now: &Moment,
    ) -> Result<(Study, Option<Torn>), LogError> {
        let path = self.folder().study_file(name)?;
        let folder = self.folder().path().join(FOLDER);
        fs::create_dir_all(&folder).map_err(LogError::disk("create the folder", &folder))?;
        lines::sync_folder(self.folder().path()).map_err(LogError::disk("sync the folder", &folder))?;
        let torn = mend_end(&path, &path.with_extension("torn"), now)
            .map_err(LogError::disk("mend the end of", &path))?;
        let study = Study { path };
        if fs::metadata(&study.path).map_or(true, |file| file.len() == 0) {
            study.append(heading)?;
        }
        Ok((study, torn))
    }
}

impl Study {
    /// Keeps a finished cycle and the trace it was read from. When this returns, it is on disk.
    ///
    /// # Errors
    /// A disk that refuses; the file is then as it was.
    pub fn keep(&self, cycle: &Cycle, trace: &Trace) -> Result<(), LogError> {
        self.append(&Line { cycle, trace })
    }

    fn append(&self, line: &impl Serialize) -> Result<(), LogError> {
        let text = serde_json::to_string(line)
            .map_err(|cause| LogError::disk("write as text the line for", &self.path)(cause.into()))?;
        lines::append(&self.path, (text + "\n").as_bytes())
            .map_err(LogError::disk("write the study to", &self.path))?;
        Ok(())
    }
}

impl StudyHeading {
    /// Of a study that begins now.
    pub fn new(
        board: &str,
        revision: &str,
        profile_sha256: &str,
        simulated: Option<String>,
        plan: Plan,
        begun: Moment,
    ) -> Self {
        Self {
            schema: SCHEMA,
            board: board.to_owned(),
            revision: revision.to_owned(),
            profile_sha256: profile_sha256.to_owned(),
            simulated,
            plan,
            begun,
            software: Software::this(),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::Order;
    use crate::trace::{Claims, Ending, OutputState, Stop};
    use crate::units::Ohms;
    use jiff::tz::TimeZone;
    use std::path::Path;

    fn moment() -> Moment {
        Moment::new("2026-12-01T08:00:00Z".parse().expect("RFC 3339"), &TimeZone::UTC)
    }

    fn heading(cycles: u32) -> StudyHeading {
        let plan = Plan {
            boards: vec!["A".to_owned()],
            temperatures: vec![None],
            loads: vec![Ohms(55.0)],
            rates: vec![None],
            cycles,
        };
        StudyHeading::new("RN-204", "C", "0", None, plan, moment())
    }

    fn cycle(number: u32) -> Cycle {
        Cycle {
            order: Order { board: 0, temperature: 0, load: 0, cycle: number, rate: 0 },
            temperature: None,
            load: Ohms(55.0),
            trip: None,
            re_enable: None,
            claim: None,
            settle: 0.0,
            integration: 0.0,
            duration: 0.1,
        }
    }

    fn trace() -> Trace {
        let ending = Ending { stop: Stop::Completed, output: OutputState::Off };
        Trace { samples: Vec::new(), settings: Vec::new(), claims: Claims::default(), ending }
    }

    fn log(root: &Path) -> Log {
        Log::open(root, "s", &moment()).expect("a log").log
    }

    #[test]
    fn a_study_goes_on_behind_its_last_whole_line() {
        let root = tempfile::tempdir().expect("a temporary folder");
        let log = log(root.path());
        assert_eq!(log.folder().study("first").expect("nothing yet"), None);
        let (study, torn) = log.open_study("first", &heading(3), &moment()).expect("a new file");
        assert_eq!(torn, None);
        study.keep(&cycle(0), &trace()).expect("kept");
        let path = log.folder().study_file("first").expect("a plain name");
        let whole = fs::read_to_string(&path).expect("text");
        for cut in 1..whole.lines().last().expect("a line").len() {
            fs::write(&path, format!("{whole}{}", &whole.lines().last().expect("a line")[..cut]))
                .expect("writable");
            let kept = log.folder().study("first").expect("readable").expect("there");
            assert_eq!(kept.cycles, [cycle(0)], "cut after {cut} bytes");
        }
        let (study, torn) = log.open_study("first", &heading(3), &moment()).expect("mended");
        assert!(torn.is_some_and(|torn| torn.kept.ends_with("first.torn")));
        study.keep(&cycle(1), &trace()).expect("kept");
        let kept = log.folder().study("first").expect("readable").expect("there");
        assert_eq!(kept.cycles, [cycle(0), cycle(1)]);
        assert!(kept.heading.orders_the_same(&heading(3)) && !kept.heading.orders_the_same(&heading(4)));
    }

    #[test]
    fn a_name_is_a_plain_file_name_and_a_foreign_file_is_no_study() {
        let root = tempfile::tempdir().expect("a temporary folder");
        let log = log(root.path());
        for name in ["", "..", "a/b", "a b"] {
            assert!(log.folder().study_file(name).is_err(), "{name}");
        }
        log.open_study("x", &heading(1), &moment()).expect("a new file");
        fs::write(log.folder().study_file("x").expect("plain"), "{}\n").expect("writable");
        let error = log.folder().study("x").expect_err("no heading").to_string();
        assert!(error.contains("x.jsonl:1: not a line of a study"), "{error}");
    }
}
