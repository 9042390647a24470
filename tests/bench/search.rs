//! A search against a staircase of the same uncertainty: set-points and time a board, and how near the search comes to the
//! least there can be.
//!
//! Both limits are 400 mV wide, cells and steps 1 mV. The staircase is the program's own and takes every step from the
//! start to the floor and up again. Beside it stands one that knows the windows as well as the search does, takes no step
//! outside them and confirms nothing: the best a staircase could do.

#![expect(clippy::print_stdout, reason = "a benchmark prints its figures")]

mod figures;
mod optimum;
mod probe_cost;
mod tally;

use ebbmark::analysis::{Analysis, analyse};
use ebbmark::bench::serial::connect;
use ebbmark::bench::{VirtualBench, drive, run_ready};
use ebbmark::clock::Clock;
use ebbmark::instrument::bench_file::BenchFile;
use ebbmark::instrument::library;
use ebbmark::procedure::{Plan, Procedure};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::bench::{Options, SimulatedBench};
use ebbmark::sim::{Condition, Setup};
use ebbmark::trace::Trace;
use ebbmark::units::Volts;
use figures::{conclude, quantile};
use optimum::optimum;
use probe_cost::probe_cost;
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::error::Error;
use std::path::Path;
use std::process::ExitCode;
use std::time::Duration;
use tally::Tally;

/// Least ratio of a staircase's set-points and time to a search's.
const FEWER: f64 = 15.0;
const SOONER: f64 = 10.0;

/// Set-points of a search, and its time, against the least there can be; set-points with confirmation.
const NEAR_OPTIMUM: (f64, f64) = (1.03, 1.15);

/// Boards in virtual time: searched, and put through a staircase as well.
const SEARCHED: u64 = 2000;
const CLIMBED: u64 = 40;

/// Boards over pseudo-terminals, by search and by staircase.
const REALLY_SEARCHED: u64 = 5;
const REALLY_CLIMBED: u64 = 1;

/// Cells in each window.
const CELLS: usize = 400;

const PROFILE: &str = r#"
schema = 1
board = "SB-400"
revision = "A"
title = "Search benchmark, two windows of 400 mV"
serial_number = "[0-9]+"
[supply]
start = "6.90 V"
floor = "5.40 V"
maximum = "8.40 V"
current_limit = "350 mA"
[load]
resistance = "55 ohm"
tolerance = "1 %"
rating = "3 W"
[timing]
detect_delay = "5 ms"
release_delay = "20 ms"
[ramp]
mode = "search"
step = "1 mV"
resolution = "1 mV"
[limits]
trip = { min = "5.60 V", max = "6.00 V" }
re_enable = { min = "6.30 V", max = "6.70 V" }
off_current = { at = "5.50 V", min = "1.0 uA", max = "4.0 uA" }
"#;

fn main() -> Result<ExitCode, Box<dyn Error>> {
    let search = Profile::read("search", PROFILE)?;
    let staircase = Profile::read("staircase", &PROFILE.replace("\"search\"", "\"staircase\""))?;
    let holds = [
        against_the_optimum(&search),
        in_virtual_time(&search, &staircase),
        over_pseudo_terminals(&search, &staircase)?,
    ];
    let figure = format!("{} of {} parts hold", holds.iter().filter(|holds| **holds).count(), holds.len());
    Ok(conclude(&figure, "all", holds.iter().all(|holds| *holds)))
}

/// A good board whose thresholds lie anywhere in their windows.
fn board(profile: &Profile, seed: u64) -> Setup {
    let mut rng = ChaCha8Rng::seed_from_u64(seed);
    let mut setup = Setup::new(profile, Condition::Good, seed);
    let trip = rng.random_range(5.6..6.0);
    let re_enable: f64 = rng.random_range(6.3..6.7);
    (setup.board.trip, setup.board.hysteresis) = (Volts(trip), Volts(re_enable - trip));
    setup
}

/// What one run took.
struct Run {
    tally: Tally,
    seconds: f64,
    uncertainty: f64,
}

impl Run {
    fn new(tally: Tally, duration: Duration, trace: &Trace, profile: &Profile) -> Self {
        let found: Analysis = analyse(trace, profile);
        let trip = found.quantities.iter().find(|quantity| quantity.name == QuantityName::Trip);
        let uncertainty = trip.map_or(f64::NAN, |trip| trip.standard_uncertainty);
        Self { tally, seconds: duration.as_secs_f64(), uncertainty }
    }

    fn set_points(&self) -> f64 {
        f64::from(self.tally.all)
    }
}

fn virtually(profile: &Profile, setup: &Setup) -> Run {
    let mut bench = VirtualBench::new(setup, setup.ability());
    let procedure = Procedure::new(Plan::new(profile, &setup.ability()));
    let mut tally = Tally::default();
    let forever = std::future::pending();
    let trace = run_ready(drive(procedure, &mut bench, setup.claims(), &mut tally, forever));
    Run::new(tally, ebbmark::bench::Bench::now(&bench), &trace, profile)
}

fn mean(runs: &[Run], value: impl Fn(&Run) -> f64) -> f64 {
    runs.iter().map(value).sum::<f64>() / runs.len() as f64
}

/// How near the search comes to the least there can be.
fn against_the_optimum(profile: &Profile) -> bool {
    let clock = Clock::real();
    let runs: Vec<Run> = (0..SEARCHED).map(|seed| virtually(profile, &board(profile, seed))).collect();
    let each = clock.now().as_secs_f64() * 1e3 / SEARCHED as f64;
    let (down, up) = probe_cost(&board(profile, 0).ability(), profile);
    let least = optimum(CELLS, CELLS, down, up);
    let narrowing = mean(&runs, |run| f64::from(run.tally.narrowing));
    let confirmed = mean(&runs, |run| f64::from(run.tally.narrowing + run.tally.confirming));
    let seconds = mean(&runs, |run| run.tally.narrowing_s);
    println!("{SEARCHED} boards searched in virtual time, {each:.2} ms each on one core\n");
    println!("                          found     least     ratio");
    let line = |what, found: f64, least: f64| {
        println!("{what:22} {found:8.2}  {least:8.2}  {:8.3}", found / least);
    };
    line("set-points to narrow", narrowing, least.probes);
    line("... and to confirm", confirmed, least.probes);
    line("seconds to narrow", seconds, least.cost);
    let worst = quantile(&runs.iter().map(|run| f64::from(run.tally.narrowing)).collect::<Vec<_>>(), 1.0);
    println!("most set-points to narrow a board's windows: {worst:.0}");
    // Of the time only the ratio is shown: the table counts every way as long as the average one.
    narrowing / least.probes <= NEAR_OPTIMUM.0 && confirmed / least.probes <= NEAR_OPTIMUM.1
}

fn in_virtual_time(search: &Profile, staircase: &Profile) -> bool {
    let boards = || (0..CLIMBED).map(|seed| board(search, seed));
    let searched: Vec<Run> = boards().map(|setup| virtually(search, &setup)).collect();
    let climbed: Vec<Run> = boards().map(|setup| virtually(staircase, &setup)).collect();
    println!("\n{CLIMBED} boards in virtual time, whole runs");
    // Half of each window on average, and the first step into it.
    let windows_only = 2.0 * (CELLS as f64 / 2.0) + 1.0;
    let confirmed = mean(&searched, |run| f64::from(run.tally.narrowing + run.tally.confirming));
    let ratio = windows_only / confirmed;
    println!(
        "a staircase that knew the windows: {windows_only:.0} set-points against {confirmed:.1}, {ratio:.1} times as many"
    );
    compare(&searched, &climbed) && ratio >= FEWER
}

fn compare(searched: &[Run], climbed: &[Run]) -> bool {
    println!("                         search   staircase   ratio");
    let line = |what, value: fn(&Run) -> f64| {
        let (search, staircase) = (mean(searched, value), mean(climbed, value));
        println!("{what:20} {search:10.2}  {staircase:10.2}  {:6.1}", staircase / search);
        staircase / search
    };
    let fewer = line("set-points", Run::set_points);
    let sooner = line("seconds", |run| run.seconds);
    let alike = line("u of the trip, mV", |run| run.uncertainty * 1e3);
    fewer >= FEWER && sooner >= SOONER && alike >= 0.8
}

/// The same over real ports and real time.
fn over_pseudo_terminals(search: &Profile, staircase: &Profile) -> Result<bool, Box<dyn Error>> {
    println!(
        "\nover pseudo-terminals in real time, whole runs, {REALLY_SEARCHED} and {REALLY_CLIMBED} boards"
    );
    let run = |profile, seed| really(profile, &board(search, seed));
    let searched = (0..REALLY_SEARCHED).map(|seed| run(search, seed)).collect::<Result<Vec<_>, _>>()?;
    let climbed = (0..REALLY_CLIMBED).map(|seed| run(staircase, seed)).collect::<Result<Vec<_>, _>>()?;
    Ok(compare(&searched, &climbed))
}

fn really(profile: &Profile, setup: &Setup) -> Result<Run, Box<dyn Error>> {
    let clock = Clock::real();
    let simulated = SimulatedBench::start(setup, Options { clock, ..Options::default() })?;
    let find = |name: &str| library::find(name, Path::new("."));
    let file = BenchFile::read("simulated bench", &simulated.bench_file(), &find)?;
    let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
    runtime.block_on(async {
        let maximum = profile.supply.maximum;
        let mut bench = connect(&file, maximum, clock).await?;
        bench.begin_run().await?;
        let begun = clock.now();
        let procedure = Procedure::new(Plan::new(profile, &file.ability(maximum)));
        let mut tally = Tally::default();
        let abort = async {
            // An interrupt switches off.
            let _ = tokio::signal::ctrl_c().await;
        };
        let trace = drive(procedure, &mut bench, file.claims(&profile.supply), &mut tally, abort).await;
        Ok(Run::new(tally, clock.now() - begun, &trace, profile))
    })
}
