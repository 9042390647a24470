//! A bench of simulated instruments that outlives the program under test, with its files and logs.
//!
//! The bench runs in this process and the program in its own, as a real bench would: whether the output is truly on is
//! asked of the simulation, never of the program. Time is real, and nothing is late unless a test makes it so.

use super::{HANGS, Said, ebbmark};
use crate::simulated_bench::setup;
use ebbmark::clock::Clock;
use ebbmark::instrument::definition::builtin;
use ebbmark::record::{LogFolder, Run};
use ebbmark::sim::bench::{InFixture, Options, SimulatedBench};
use ebbmark::sim::device::Kind;
use ebbmark::sim::link_faults::{Effect, Lasting, LinkFault, When};
use ebbmark::sim::terminal::Pace;
use ebbmark::sim::{BoardModel, Setup};
use ebbmark::trace::Trace;
use std::fs;
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::time::Duration;
use tempfile::TempDir;

/// A board of the profile.
pub(super) const BOARD: &str = "RN000123";

/// Where a run need not be seen from outside, the program's own simulation runs so many times faster than the wall.
/// Deadlines shrink with it, so no more than a busy computer can keep.
pub(super) const SPEED: &str = "5";

/// How long an instrument may keep the program waiting, unless a test says otherwise.
const PATIENCE: &str = "8 s";

pub(super) struct Workplace {
    pub(super) bench: SimulatedBench,
    folder: TempDir,
}

impl Workplace {
    /// A bench in order, a good board on it, and no log yet.
    pub(super) fn new() -> Self {
        Self::of(&setup())
    }

    /// A bench in order with this board and these instruments.
    pub(super) fn of(setup: &Setup) -> Self {
        Self::start(setup, Vec::new())
    }

    /// The same, with something that will go wrong.
    pub(super) fn with(faults: Vec<LinkFault>) -> Self {
        Self::start(&setup(), faults)
    }

    /// The same, with something about the board that is not good.
    pub(super) fn on_board(change: impl FnOnce(&mut BoardModel)) -> Self {
        let mut setup = setup();
        change(&mut setup.board);
        Self::start(&setup, Vec::new())
    }

    /// A bench in order with this in its fixture, and something that will go wrong.
    pub(super) fn holding(in_fixture: InFixture, faults: Vec<LinkFault>) -> Self {
        Self::start_with(&setup(), in_fixture, faults)
    }

    fn start(setup: &Setup, faults: Vec<LinkFault>) -> Self {
        Self::start_with(setup, InFixture::Board, faults)
    }

    fn start_with(setup: &Setup, in_fixture: InFixture, faults: Vec<LinkFault>) -> Self {
        let options = Options {
            clock: Clock::real(),
            pace: Pace { response: Duration::ZERO, baud: None },
            faults,
            in_fixture,
            ..Options::default()
        };
        let bench = SimulatedBench::start(setup, options).expect("pseudo-terminals");
        let folder = tempfile::tempdir().expect("a temporary folder");
        let place = Self { bench, folder };
        place.put("bench.toml", &place.bench.bench_file());
        place.put("profile.toml", &quick_profile());
        for name in ["programmable-supply", "bench-meter-current", "bench-meter-voltage"] {
            place.put(&format!("{name}.toml"), &patient_definition(name));
            place.edit("bench.toml", &format!("\"{name}\""), &format!("\"{name}.toml\""));
        }
        place
    }

    pub(super) fn folder(&self) -> &Path {
        self.folder.path()
    }

    /// Writes a file of this place.
    pub(super) fn put(&self, name: &str, text: &str) {
        fs::write(self.folder().join(name), text).expect("writable");
    }

    /// Has instruments of this definition given up on sooner, where a fault makes the program wait in vain.
    pub(super) fn give_up(&self, definition: &str, after: Duration) {
        let after = format!("reply = \"{} ms\"", after.as_millis());
        self.edit(&format!("{definition}.toml"), &format!("reply = \"{PATIENCE}\""), &after);
    }

    /// Changes a file of this place.
    pub(super) fn edit(&self, name: &str, from: &str, to: &str) {
        let text = fs::read_to_string(self.folder().join(name)).expect("a file");
        assert!(text.contains(from), "no {from:?} in {text}");
        self.put(name, &text.replace(from, to));
    }

    /// Tests the board.
    pub(super) fn test(&self, more: &[&str]) -> Said {
        self.test_board(BOARD, more)
    }

    pub(super) fn test_board(&self, serial_number: &str, more: &[&str]) -> Said {
        ebbmark(self.folder(), &[&arguments(serial_number)[..], more].concat())
    }

    /// Begins to test the board, and waits until the output is on and the board has been read a few times.
    pub(super) fn test_under_way(&self, more: &[&str]) -> Running {
        let mut running = Running::start(self.folder(), &[&arguments(BOARD)[..], more].concat());
        running.until("the output is on", || self.bench.output());
        self.bench.take_exchanges(Kind::Ammeter);
        let mut readings = 0;
        running.until("the board is read", || {
            readings += self.bench.take_exchanges(Kind::Ammeter).len();
            readings > 10
        });
        running
    }

    /// The log of the bench.
    pub(super) fn log(&self) -> LogFolder {
        LogFolder::new(&self.folder().join("logs"), "sim").expect("a plain name")
    }

    /// All runs in the log; none where there is no log.
    pub(super) fn runs(&self) -> Vec<Run> {
        if !self.log().path().exists() {
            return Vec::new();
        }
        self.log().runs().expect("readable").map(|run| run.expect("whole")).collect()
    }

    /// The only run there is, and its trace after its hash was verified. `log show` must know it too.
    #[track_caller]
    pub(super) fn kept(&self) -> (Run, Trace) {
        let mut runs = self.runs();
        assert_eq!(runs.len(), 1, "{runs:?}");
        let run = runs.remove(0);
        let trace = self.log().trace(&run).expect("the trace it points to");
        let shown = ebbmark(self.folder(), &["log", "show", "--station", "sim", run.identity.run.as_str()]);
        shown.ended(0);
        assert!(shown.out.contains(run.outcome.word()) && shown.out.contains(BOARD), "{shown}");
        (run, trace)
    }

    /// Files of the log other than its lock.
    pub(super) fn log_files(&self) -> Vec<PathBuf> {
        let entries = fs::read_dir(self.log().path()).into_iter().flatten().flatten();
        entries.map(|entry| entry.path()).filter(|path| !path.ends_with(".lock")).collect()
    }
}

fn arguments(serial_number: &str) -> [&str; 6] {
    ["test", "profile.toml", "--bench", "bench.toml", "--serial-number", serial_number]
}

/// The river-level logger in large steps, so that a run takes little real time.
pub(super) fn quick_profile() -> String {
    let text = include_str!("../../../profiles/river-node.toml");
    let quick = text.replace("mode = \"search\"", "mode = \"staircase\"");
    let quick = quick.replace("step = \"10 mV\"", "step = \"60 mV\"");
    assert_ne!(quick, text);
    quick
}

/// A definition that comes with the program, of an instrument that is waited for longer: a busy computer is no fault.
fn patient_definition(name: &str) -> String {
    let text = builtin(name).expect("it comes with the program");
    let patient = text.replace("reply = \"1 s\"", &format!("reply = \"{PATIENCE}\""));
    assert_ne!(patient, text);
    patient
}

/// Something that goes wrong once.
pub(super) fn once(instrument: Kind, when: When, effect: Effect) -> LinkFault {
    LinkFault { instrument, when, lasting: Lasting::Once, effect }
}

/// Something that goes wrong and stays so.
pub(super) fn always(instrument: Kind, when: When, effect: Effect) -> LinkFault {
    LinkFault { instrument, when, lasting: Lasting::Always, effect }
}

/// The first message that contains this text.
pub(super) fn at(text: &str) -> When {
    When::Containing(text.to_owned())
}

/// A program at work. It is killed when a test gives up on it.
pub(super) struct Running(Option<Child>);

impl Running {
    /// Starts the program in `folder` and lets it run.
    pub(super) fn start(folder: &Path, arguments: &[&str]) -> Self {
        let child = Command::new(env!("CARGO_BIN_EXE_ebbmark"))
            .current_dir(folder)
            .args(arguments)
            .stdin(Stdio::null())
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn();
        Self(Some(child.expect("the program starts")))
    }

    /// Sends a signal by the name `kill` (POSIX) knows it by.
    pub(super) fn signal(&self, name: &str) {
        let id = self.0.as_ref().map(Child::id).expect("not waited for yet").to_string();
        let sent = Command::new("kill").args(["-s", name, &id]).status().expect("kill is there");
        assert!(sent.success(), "{name} to {id}");
    }

    /// Looks again and again until something is so. A program that ends before fails the test.
    #[track_caller]
    pub(super) fn until(&mut self, what: &str, mut is_so: impl FnMut() -> bool) {
        let clock = Clock::real();
        while !is_so() {
            let child = self.0.as_mut().expect("not waited for yet");
            let ended = child.try_wait().expect("a child");
            assert!(ended.is_none(), "ended before {what}: {}", Said::of(&self.output()));
            assert!(clock.now() < HANGS, "waited in vain until {what}");
            std::thread::sleep(Duration::from_millis(2));
        }
    }

    /// Waits for its end and returns what it said.
    pub(super) fn end(mut self) -> Said {
        Said::of(&self.output())
    }

    /// Kills it without a warning.
    pub(super) fn kill(mut self) {
        self.0.as_mut().expect("not waited for yet").kill().expect("it runs");
        assert_eq!(self.output().status.code(), None, "it was killed");
    }

    fn output(&mut self) -> std::process::Output {
        self.0.take().expect("not waited for yet").wait_with_output().expect("it ends")
    }
}

impl Drop for Running {
    fn drop(&mut self) {
        if let Some(mut child) = self.0.take() {
            // It may have ended by itself.
            let _ = child.kill();
            let _ = child.wait();
        }
    }
}
