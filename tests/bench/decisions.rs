//! Wrong decisions: boards from a production that spreads beyond its limits, tested in virtual time, accepted and
//! rejected, and held against what JCGM 106:2012, 9.5, predicts for such a process and such a measurement.
//!
//! The first argument is the number of boards; 20,000 without one.

#![expect(clippy::print_stdout, reason = "a study prints its table")]

mod figures;

use ebbmark::analysis::analyse;
use ebbmark::bench::{VirtualBench, drive, run_ready};
use ebbmark::procedure::{Plan, Procedure};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::{Condition, Setup};
use ebbmark::statistics::coverage::Spread;
use ebbmark::statistics::distribution::{Distribution, Normal};
use ebbmark::statistics::risk::{Interval, nonconformance};
use ebbmark::units::Volts;
use ebbmark::verdict::{Decision, Judged, judge};
use figures::{conclude, quantile};
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::error::Error;
use std::process::ExitCode;
use std::thread;

/// Boards tested.
const BOARDS: u64 = 20_000;

/// Mean and standard deviation of the trips of the production, V.
const PRODUCTION: (f64, f64) = (6.0, 0.02);

/// Limits of the trip, V: every seventh board lies outside.
const LIMITS: (f64, f64) = (5.97, 6.03);

/// Standard deviations of a count by which it may differ from the prediction.
const SAMPLING: f64 = 3.0;

/// Cells of the integral over the production.
const CELLS: u32 = 10_000;

/// Budgets that the prediction is averaged over, spread over the boards tested.
const BUDGETS: usize = 200;

/// Probability of the expanded uncertainty.
const COVERAGE: f64 = 0.95;

/// Standard deviations of the production that the integral covers.
const REACH: f64 = 6.0;

/// One board: whether it is inside, whether it was accepted by each rule, and the guard band of the second.
struct Tested {
    conforms: bool,
    inside: bool,
    inside_by_guard: bool,
    expanded: f64,
    spread: Option<Spread>,
}

fn main() -> Result<ExitCode, Box<dyn Error>> {
    let arguments = std::env::args().skip(1);
    let boards = arguments.filter_map(|argument| argument.parse().ok()).next().unwrap_or(BOARDS);
    let tested = test(boards)?;
    let expanded: Vec<f64> = tested.iter().map(|board| board.expanded).collect();
    let each = (tested.len() / BUDGETS).max(1);
    let spreads: Vec<&Spread> =
        tested.iter().step_by(each).filter_map(|board| board.spread.as_ref()).collect();
    let judged = tested.len();
    println!("{boards} boards, seeds 0 to {}, {judged} of them judged", boards.saturating_sub(1));
    println!("trip {} V ± {} V, limits {LIMITS:?} V", PRODUCTION.0, PRODUCTION.1);
    println!("U of a board mostly {:.3} mV\n", quantile(&expanded, 0.5) * 1e3);
    println!("rule             wrong decision     predicted      seen   standard deviations apart");
    let mut farthest = 0.0_f64;
    for (rule, of_expanded) in [("simple", 0.0), ("guard band of U", 1.0)] {
        let accepted = |board: &&Tested| if of_expanded > 0.0 { board.inside_by_guard } else { board.inside };
        let wrongly_in = tested.iter().filter(|board| !board.conforms && accepted(board)).count();
        let wrongly_out = tested.iter().filter(|board| board.conforms && !accepted(board)).count();
        let (consumer, producer) = predicted(&spreads, of_expanded).ok_or("a budget without a U")?;
        for (name, risk, seen) in
            [("false acceptance", consumer, wrongly_in), ("false rejection", producer, wrongly_out)]
        {
            let expected = risk * judged as f64;
            // A count of nothing expected still may be one.
            let apart = (seen as f64 - expected) / expected.max(1.0).sqrt();
            println!("{rule:16} {name:16} {expected:11.1} {seen:9} {apart:+8.2}");
            farthest = farthest.max(apart.abs());
        }
    }
    Ok(conclude(
        &format!("farthest from the prediction by {farthest:.2} standard deviations"),
        &format!("at most {SAMPLING}"),
        farthest <= SAMPLING,
    ))
}

/// Consumer's and producer's risk of the process: JCGM 106:2012, equations 17 and 18, over the errors of these budgets, each
/// with a guard band that is a multiple of its own expanded uncertainty.
fn predicted(spreads: &[&Spread], of_expanded: f64) -> Option<(f64, f64)> {
    let (mean, deviation) = PRODUCTION;
    let limits = Interval { min: Some(LIMITS.0), max: Some(LIMITS.1) };
    let accepted = |spread: &Spread| Some(limits.guarded(of_expanded * spread.half_width(COVERAGE)?));
    let accepted = spreads.iter().map(|spread| accepted(spread)).collect::<Option<Vec<Interval>>>()?;
    let (mut consumer, mut producer) = (0.0, 0.0);
    let width = 2.0 * REACH / f64::from(CELLS);
    for cell in 0..CELLS {
        let from = -REACH + width * f64::from(cell);
        let share = Normal.lower(from + width) - Normal.lower(from);
        let trip = mean + deviation * (from + width / 2.0);
        let rejected = spreads
            .iter()
            .zip(&accepted)
            .map(|(spread, accepted)| nonconformance(trip, spread, *accepted))
            .sum::<f64>()
            / spreads.len() as f64;
        if (LIMITS.0..=LIMITS.1).contains(&trip) {
            producer += share * rejected;
        } else {
            consumer += share * (1.0 - rejected);
        }
    }
    Some((consumer, producer))
}

/// Tests all boards, shared among the cores.
fn test(boards: u64) -> Result<Vec<Tested>, Box<dyn Error>> {
    let river = std::fs::read_to_string(concat!(env!("CARGO_MANIFEST_DIR"), "/profiles/river-node.toml"))?;
    let text =
        river.replace("{ min = \"5.88 V\", max = \"6.12 V\" }", "{ min = \"5.97 V\", max = \"6.03 V\" }");
    Profile::read("river-node.toml", &text)?;
    let cores = thread::available_parallelism()?.get() as u64;
    let share = |core: u64| -> Vec<Tested> {
        let profile = Profile::read("river-node.toml", &text).unwrap_or_else(|problems| panic!("{problems}"));
        (core..boards).step_by(cores as usize).filter_map(|seed| board(&profile, seed)).collect()
    };
    let tested: Vec<Tested> = thread::scope(|scope| {
        let workers: Vec<_> = (0..cores).map(|core| scope.spawn(move || share(core))).collect();
        // A worker that panicked takes the study with it: boards that are missing would look like good decisions.
        let joined = |worker: thread::ScopedJoinHandle<'_, Vec<Tested>>| {
            worker.join().unwrap_or_else(|panic| std::panic::resume_unwind(panic))
        };
        workers.into_iter().flat_map(joined).collect()
    });
    Ok(tested)
}

fn board(profile: &Profile, seed: u64) -> Option<Tested> {
    let mut setup = Setup::new(profile, Condition::Good, seed);
    let normal: f64 = Normal.quantile(ChaCha8Rng::seed_from_u64(seed).random_range(1e-12..1.0))?;
    setup.board.trip = Volts(PRODUCTION.0 + PRODUCTION.1 * normal);
    let mut bench = VirtualBench::new(&setup, setup.ability());
    let procedure = Procedure::new(Plan::new(profile, &setup.ability()));
    let trace = run_ready(drive(procedure, &mut bench, setup.claims(), &mut (), std::future::pending()));
    let verdict = judge(&analyse(&trace, profile), profile, &trace.ending);
    let judged: &Judged = verdict.judged.iter().find(|judged| judged.quantity.name == QuantityName::Trip)?;
    Some(Tested {
        conforms: (LIMITS.0..=LIMITS.1).contains(&setup.board.trip.0),
        inside: matches!(judged.decision, Some(Decision::Pass | Decision::ConditionalPass)),
        inside_by_guard: judged.decision == Some(Decision::Pass),
        expanded: judged.expanded_uncertainty(),
        spread: Spread::new(&judged.quantity.influences()),
    })
}
