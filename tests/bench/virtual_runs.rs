//! Runs a second in virtual time on one core: procedure, simulated bench, analysis and verdict of staircase runs.
//!
//! A staircase ends where the board comes back on, so the step is chosen such that a good board is set to at least
//! 480 voltages.

#![expect(clippy::print_stdout, reason = "a benchmark prints its figures")]

mod figures;

use ebbmark::analysis::analyse;
use ebbmark::bench::{Bench, VirtualBench, drive, run_ready};
use ebbmark::clock::Clock;
use ebbmark::procedure::{Action, Event, Plan, Procedure};
use ebbmark::profile::Profile;
use ebbmark::sim::{Condition, Setup};
use ebbmark::verdict::judge;
use figures::{conclude, quantile};
use std::error::Error;
use std::hint::black_box;
use std::process::ExitCode;
use std::time::Duration;

/// Least runs a second with a good board.
const BAR: f64 = 500.0;

/// Voltages a good board must be set to in each run.
const SET_POINTS: usize = 480;

/// Step of the staircase in place of the profile's.
const STEP: &str = "4 mV";

/// Boards in a round; each round has the same boards.
const BOARDS: u64 = 100;

/// Rounds of each condition; the median one counts.
const ROUNDS: usize = 5;

fn main() -> Result<ExitCode, Box<dyn Error>> {
    let profile = Profile::read("a staircase", &staircase())?;
    println!(
        "virtual runs on one core, staircase of {STEP} steps, {BOARDS} boards a round, {ROUNDS} rounds\n"
    );
    println!("condition          set-points  readings    runs/s (worst to best)     analysis");
    let mut good = 0.0;
    for condition in Condition::ALL {
        let rounds: Vec<Round> = (0..ROUNDS).map(|_| Round::of(&profile, condition)).collect();
        let rates: Vec<f64> = rounds.iter().map(Round::rate).collect();
        let (set_points, readings) =
            rounds.first().map_or((0, 0), |round| (round.set_points, round.readings));
        println!(
            "{:18} {set_points:10}  {readings:8}  {:8.0} ({:.0} to {:.0}) {:10.0} %",
            condition.key(),
            quantile(&rates, 0.5),
            quantile(&rates, 0.0),
            quantile(&rates, 1.0),
            rounds.iter().map(Round::analysis_share).sum::<f64>() / ROUNDS as f64 * 100.0,
        );
        if condition == Condition::Good {
            good = quantile(&rates, 0.5);
            if set_points < SET_POINTS {
                return Err(format!("{set_points} set-points a run, wanted {SET_POINTS}").into());
            }
        }
    }
    let figure = format!("good boards: {good:.0} runs/s of at least {SET_POINTS} set-points");
    Ok(conclude(&figure, &format!("at least {BAR:.0}"), good >= BAR))
}

fn staircase() -> String {
    let text = include_str!("../../profiles/river-node.toml");
    text.replace("\"search\"", "\"staircase\"").replace("\"10 mV\"", &format!("\"{STEP}\""))
}

/// What a round of boards took. Counts are the fewest of any board.
struct Round {
    wall: Duration,
    analysing: Duration,
    set_points: usize,
    readings: usize,
}

impl Round {
    fn of(profile: &Profile, condition: Condition) -> Self {
        let clock = Clock::real();
        let mut round = Self {
            wall: Duration::ZERO,
            analysing: Duration::ZERO,
            set_points: usize::MAX,
            readings: usize::MAX,
        };
        for seed in 0..BOARDS {
            let setup = Setup::new(profile, condition, seed);
            let mut bench = Counting { bench: VirtualBench::new(&setup, setup.ability()), set_points: 0 };
            let procedure = Procedure::new(Plan::new(profile, &setup.ability()));
            let trace =
                run_ready(drive(procedure, &mut bench, setup.claims(), &mut (), std::future::pending()));
            let measured = clock.now();
            black_box(judge(&analyse(&trace, profile), profile, &trace.ending));
            round.analysing += clock.now() - measured;
            round.set_points = round.set_points.min(bench.set_points);
            round.readings = round.readings.min(trace.samples.len());
        }
        round.wall = clock.now();
        round
    }

    fn rate(&self) -> f64 {
        BOARDS as f64 / self.wall.as_secs_f64()
    }

    fn analysis_share(&self) -> f64 {
        self.analysing.as_secs_f64() / self.wall.as_secs_f64()
    }
}

/// Counts the voltages that are set.
struct Counting {
    bench: VirtualBench,
    set_points: usize,
}

impl Bench for Counting {
    fn now(&self) -> Duration {
        self.bench.now()
    }

    async fn perform(&mut self, action: &Action) -> Event {
        self.set_points += usize::from(matches!(action, Action::SetVolts(_)));
        self.bench.perform(action).await
    }
}
