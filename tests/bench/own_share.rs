//! The program's own share of a run's time: one board from connecting the bench to the kept record, over
//! pseudo-terminals in real time, as `ebbmark test` does it.
//!
//! Not its own are the waits that the procedure orders, up to the time it ordered and no longer, the settling of the
//! instruments after their ports open, and the time in which at least one instrument deals with a message: response,
//! integration and wire. All else counts, the wake-ups of threads on both sides of the line included.

#![expect(clippy::print_stdout, reason = "a benchmark prints its figures")]

mod figures;
mod spans;

use ebbmark::analysis::analyse;
use ebbmark::bench::serial::{SerialBench, connect};
use ebbmark::bench::{Bench, Watch, drive};
use ebbmark::clock::Clock;
use ebbmark::instrument::bench_file::BenchFile;
use ebbmark::instrument::library;
use ebbmark::procedure::{Action, Event, Plan, Procedure, Progress};
use ebbmark::profile::Profile;
use ebbmark::record::{BenchUsed, BoardUnderTest, Finished, Log, ProfileUsed, Subject, now};
use ebbmark::sim::bench::{Options, SimulatedBench};
use ebbmark::sim::device::Kind;
use ebbmark::sim::{Condition, Setup};
use ebbmark::verdict::{Outcome, judge};
use figures::{conclude, quantile};
use spans::{Span, Union};
use std::collections::BTreeMap;
use std::error::Error;
use std::path::Path;
use std::process::ExitCode;
use std::time::Duration;

const PROFILE: &str = "profiles/river-node.toml";

/// Largest own share of a run.
const BAR: f64 = 0.05;

/// Boards tested; the median share counts.
const RUNS: u64 = 7;

fn main() -> Result<ExitCode, Box<dyn Error>> {
    let profile = Profile::read(PROFILE, include_str!("../../profiles/river-node.toml"))?;
    let runs = (0..RUNS).map(|seed| Run::of(&profile, seed)).collect::<Result<Vec<_>, _>>()?;
    let shares: Vec<f64> = runs.iter().map(Run::own_share).collect();
    println!("{RUNS} runs of {PROFILE} over pseudo-terminals in real time\n");
    println!("mean of a run             times   wall ms    own ms   own µs each   own % of run");
    table(&runs, |part| part.what);
    println!();
    table(&runs, |part| part.stage);
    let percent = |share| quantile(&shares, share) * 100.0;
    let figure = format!(
        "own share {:.2} % in the middle, {:.2} % to {:.2} % of {RUNS} runs",
        percent(0.5),
        percent(0.0),
        percent(1.0)
    );
    let holds = quantile(&shares, 0.5) <= BAR;
    Ok(conclude(&figure, &format!("at most {:.0} %", BAR * 100.0), holds))
}

/// One line for each `key`, in the order of their first parts, and one for the whole.
fn table(runs: &[Run], key: impl Fn(&Part) -> &'static str) {
    let mut lines: BTreeMap<usize, Line> = BTreeMap::new();
    let mut places: BTreeMap<&str, usize> = BTreeMap::new();
    let mut whole = Line { what: "the whole run", ..Line::default() };
    for run in runs {
        for part in &run.parts {
            let next = places.len();
            let place = *places.entry(key(part)).or_insert(next);
            let line = lines.entry(place).or_insert(Line { what: key(part), ..Line::default() });
            for line in [line, &mut whole] {
                line.times += 1;
                line.wall += part.span.length();
                line.own += run.own(part.span);
            }
        }
    }
    for line in lines.values().chain([&whole]) {
        line.print(runs.len() as f64, whole.wall);
    }
}

#[derive(Clone, Copy, Debug, Default)]
struct Line {
    what: &'static str,
    times: u32,
    wall: Duration,
    own: Duration,
}

impl Line {
    fn print(&self, runs: f64, whole: Duration) {
        let milliseconds = |time: Duration| time.as_secs_f64() * 1e3 / runs;
        println!(
            "{:24} {:6.1} {:9.1} {:9.2} {:13.0} {:14.2}",
            self.what,
            f64::from(self.times) / runs,
            milliseconds(self.wall),
            milliseconds(self.own),
            self.own.as_secs_f64() * 1e6 / f64::from(self.times),
            self.own.as_secs_f64() / whole.as_secs_f64() * 100.0,
        );
    }
}

/// A run, cut into parts without gaps between them.
struct Run {
    parts: Vec<Part>,
    /// When it waited for something that is not the program.
    waited: Union,
}

/// A part of a run.
#[derive(Clone, Copy, Debug)]
struct Part {
    what: &'static str,
    stage: &'static str,
    span: Span,
}

impl Run {
    /// Tests one simulated board.
    fn of(profile: &Profile, seed: u64) -> Result<Self, Box<dyn Error>> {
        let clock = Clock::real();
        let setup = Setup::new(profile, Condition::Good, seed);
        let simulated = SimulatedBench::start(&setup, Options { clock, ..Options::default() })?;
        let find = |name: &str| library::find(name, Path::new("."));
        let file = BenchFile::read("simulated bench", &simulated.bench_file(), &find)?;
        let logs = tempfile::tempdir()?;
        let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
        let mut course = Course { clock, last: clock.now(), parts: Vec::new(), waits: Vec::new() };
        let outcome = runtime.block_on(test(profile, &file, logs.path(), &mut course))?;
        if outcome != Outcome::Pass {
            return Err(format!("seed {seed}: {outcome:?}, wanted a board that passes").into());
        }
        let mut waits = course.waits;
        for kind in [Kind::Supply, Kind::Ammeter, Kind::Voltmeter, Kind::LoadVoltmeter] {
            let exchanges = simulated.take_exchanges(kind).into_iter();
            waits.extend(exchanges.map(|exchange| Span { from: exchange.from, until: exchange.until }));
        }
        Ok(Self { parts: course.parts, waited: Union::of(waits) })
    }

    fn own(&self, span: Span) -> Duration {
        span.length().saturating_sub(self.waited.within(span))
    }

    fn own_share(&self) -> f64 {
        let wall: Duration = self.parts.iter().map(|part| part.span.length()).sum();
        let own: Duration = self.parts.iter().map(|part| self.own(part.span)).sum();
        own.as_secs_f64() / wall.as_secs_f64()
    }
}

/// From the scan to the kept record, with the bench let go again.
async fn test(
    profile: &Profile,
    file: &BenchFile,
    logs: &Path,
    course: &mut Course,
) -> Result<Outcome, Box<dyn Error>> {
    let mut log = Log::open(logs, "benchmark", &now())?.log;
    course.passed("open the log", "before");

    let opened = course.clock.now();
    let mut bench = connect(file, profile.supply.maximum, course.clock).await?;
    // The settling of each port runs on a thread of its own, all at the same time.
    let settle =
        file.instruments().iter().map(|seat| seat.definition.serial.settle).min().unwrap_or_default();
    course.waits.push(Span { from: opened, until: opened + settle });
    bench.begin_run().await?;
    course.passed("connect and begin", "before");

    log.start(subject(profile, file), now())?;
    course.passed("mark the run", "before");

    let plan = Plan::new(profile, &file.ability(profile.supply.maximum));
    let claims = file.claims(&profile.supply);
    let mut timed = Timed { bench, course };
    let mut stages = Stages::default();
    let abort = async {
        let _ = tokio::signal::ctrl_c().await;
    };
    let trace = drive(Procedure::new(plan), &mut timed, claims, &mut stages, abort).await;
    let Timed { bench, course } = timed;
    for (part, stage) in course.parts.iter_mut().filter(|part| part.stage.is_empty()).zip(stages.0) {
        part.stage = stage;
    }
    course.passed("after the last action", "after");

    let verdict = judge(&analyse(&trace, profile), profile, &trace.ending);
    let outcome = verdict.outcome;
    course.passed("analyse and judge", "after");
    log.finish(&Finished { verdict, ended: now(), duration: bench.now() }, &trace)?;
    course.passed("keep the record", "after");
    drop(bench);
    course.passed("let the bench go", "after");
    Ok(outcome)
}

fn subject(profile: &Profile, file: &BenchFile) -> Subject {
    Subject {
        board: BoardUnderTest {
            board: profile.board.clone(),
            revision: profile.revision.clone(),
            serial_number: "RN000123".to_owned(),
            batch: None,
            work_order: None,
        },
        profile: ProfileUsed {
            path: PROFILE.to_owned(),
            sha256: profile.hash.clone(),
            limits: profile.limits.clone(),
        },
        bench: BenchUsed { name: file.name.clone(), instruments: Vec::new(), simulated: None },
        operator: None,
        occasion: ebbmark::record::Occasion::Production,
    }
}

/// What has passed of a run.
struct Course {
    clock: Clock,
    /// The end of the last part.
    last: Duration,
    parts: Vec<Part>,
    waits: Vec<Span>,
}

impl Course {
    /// All since the end of the last part was `what`.
    fn passed(&mut self, what: &'static str, stage: &'static str) {
        let span = Span { from: self.last, until: self.clock.now() };
        self.last = span.until;
        self.parts.push(Part { what, stage, span });
    }
}

/// A bench whose actions are timed, each with the procedure's thoughts that led to it.
struct Timed<'c> {
    bench: SerialBench,
    course: &'c mut Course,
}

impl Bench for Timed<'_> {
    fn now(&self) -> Duration {
        self.bench.now()
    }

    async fn perform(&mut self, action: &Action) -> Event {
        if let Action::WaitUntil(until) = action {
            let from = self.course.clock.now();
            let left = until.saturating_sub(self.bench.now());
            self.course.waits.push(Span { from, until: from + left });
        }
        let event = self.bench.perform(action).await;
        self.course.passed(described(action), "");
        event
    }
}

fn described(action: &Action) -> &'static str {
    match action {
        Action::Protect { .. } => "protect",
        Action::LimitCurrent(_) => "limit the current",
        Action::SetVolts(_) => "set the voltage",
        Action::OutputOn => "output on",
        Action::OutputOff => "output off",
        Action::Range(_) => "range",
        Action::Read => "read",
        Action::WaitUntil(_) => "wait",
        Action::Burst => "burst",
        Action::Finish(_) => "finish",
    }
}

/// The stage of each action.
#[derive(Default)]
struct Stages(Vec<&'static str>);

impl Watch for Stages {
    fn saw(&mut self, _: Duration, progress: Progress, _: &Action, _: &Event) {
        self.0.push(progress.stage.title());
    }
}
