//! How often the expanded uncertainty covers the truth: many boards a condition in virtual time, each on a bench whose
//! instruments' errors are drawn from what their makers claim.
//!
//! Prints, for every quantity, the share of boards whose true value lies inside U, and the mean error in U. The first
//! argument is the number of boards a condition, 10,000 without one; the second a profile, the river node without one.

#![expect(clippy::print_stdout, reason = "a study prints its table")]

mod conditions;
mod figures;

use conditions::all;
use ebbmark::analysis::analyse;
use ebbmark::bench::{VirtualBench, drive, run_ready};
use ebbmark::procedure::{Plan, Procedure};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::{Condition, Setup, Truth};
use ebbmark::units::prefixed;
use ebbmark::verdict::judge;
use figures::{conclude, quantile};
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use std::collections::BTreeMap;
use std::error::Error;
use std::panic::resume_unwind;
use std::process::ExitCode;
use std::thread;

/// Boards of each condition.
const BOARDS: u64 = 10_000;

/// Shares of the truth inside U that a statement of 95 % allows.
const COVERED: (f64, f64) = (0.94, 0.97);

/// Largest mean error of a threshold, in U.
const BIAS: f64 = 0.1;

/// Share of the boards of which every quantity must be seen: a board in doubt has none.
const SEEN: f64 = 0.9;

/// Boards are told apart by their seed; each condition has its own.
const SEEDS_APART: u64 = 1_000_000;

/// What was seen of one quantity.
#[derive(Clone, Debug, Default)]
struct Seen {
    inside: u64,
    /// Sum of the errors, in U.
    errors: f64,
    /// U of each board, in the unit of the quantity.
    expanded: Vec<f64>,
}

impl Seen {
    fn add(&mut self, other: Self) {
        self.inside += other.inside;
        self.errors += other.errors;
        self.expanded.extend(other.expanded);
    }

    fn covered(&self) -> f64 {
        self.inside as f64 / self.expanded.len() as f64
    }

    fn bias(&self) -> f64 {
        self.errors / self.expanded.len() as f64
    }
}

/// What a study does to a good board on a good bench.
type Vary = fn(&mut Setup, &Profile);

type Table = BTreeMap<QuantityName, Seen>;

fn main() -> Result<ExitCode, Box<dyn Error>> {
    let arguments: Vec<String> = std::env::args().skip(1).filter(|argument| argument != "--bench").collect();
    let boards = arguments.first().map_or(Ok(BOARDS), |count| count.parse())?;
    let river = concat!(env!("CARGO_MANIFEST_DIR"), "/profiles/river-node.toml").to_owned();
    let path = arguments.get(1).unwrap_or(&river);
    let profile = std::fs::read_to_string(path)?;
    Profile::read(path, &profile)?;
    println!("{boards} boards a condition; share with the truth inside U of 95 %, and mean error in U\n");
    let (mut least, mut most, mut bias) = (1.0_f64, 0.0_f64, 0.0_f64);
    for (index, studied) in all().iter().enumerate() {
        let first = index as u64 * SEEDS_APART;
        let table = study(&studied.profile(&profile)?, studied.vary, first, boards)?;
        let claim = if studied.claimed { "" } else { " (outside the claim)" };
        println!("{}{claim}, seeds from {first}", studied.name);
        if table.len() < studied.quantities() {
            return Err(
                format!("{} quantities were seen, wanted {}", table.len(), studied.quantities()).into()
            );
        }
        for (quantity, seen) in &table {
            if (seen.expanded.len() as f64) < SEEN * boards as f64 {
                return Err(format!("{}: seen of {} boards", quantity.title(), seen.expanded.len()).into());
            }
            println!(
                "  {:22} {:6.2} %  {:+.3} U  {:6} boards, U mostly {}",
                quantity.title(),
                seen.covered() * 100.0,
                seen.bias(),
                seen.expanded.len(),
                prefixed(quantile(&seen.expanded, 0.5), quantity.unit())
            );
            if !studied.claimed {
                continue;
            }
            (least, most) = (least.min(seen.covered()), most.max(seen.covered()));
            if matches!(quantity, QuantityName::Trip | QuantityName::ReEnable) {
                bias = bias.max(seen.bias().abs());
            }
        }
    }
    Ok(conclude(
        &format!(
            "{:.2} to {:.2} % covered, thresholds off by at most {bias:.3} U",
            least * 100.0,
            most * 100.0
        ),
        &format!("{} to {} %, {BIAS} U", COVERED.0 * 100.0, COVERED.1 * 100.0),
        least >= COVERED.0 && most <= COVERED.1 && bias < BIAS,
    ))
}

/// All boards of one condition, shared among the cores.
fn study(profile: &str, vary: Vary, first: u64, boards: u64) -> Result<Table, Box<dyn Error>> {
    let cores = thread::available_parallelism()?.get() as u64;
    let share = |core: u64| {
        let profile =
            Profile::read("river-node.toml", profile).unwrap_or_else(|problems| panic!("{problems}"));
        let mut table = Table::new();
        for seed in (first + core..first + boards).step_by(cores as usize) {
            board(&profile, vary, seed, &mut table);
        }
        table
    };
    let tables: Vec<Table> = thread::scope(|scope| {
        let workers: Vec<_> = (0..cores).map(|core| scope.spawn(move || share(core))).collect();
        workers.into_iter().map(|worker| worker.join().unwrap_or_else(|panic| resume_unwind(panic))).collect()
    });
    let mut all = Table::new();
    for (name, seen) in tables.into_iter().flatten() {
        all.entry(name).or_default().add(seen);
    }
    Ok(all)
}

/// Tests one board and holds every quantity against its truth.
fn board(profile: &Profile, vary: Vary, seed: u64, table: &mut Table) {
    let mut setup = Setup::new(profile, Condition::Good, seed);
    vary(&mut setup, profile);
    let mut bench = VirtualBench::new(&setup, setup.ability());
    let procedure = Procedure::new(Plan::new(profile, &setup.ability()));
    let trace = run_ready(drive(procedure, &mut bench, setup.claims(), &mut (), std::future::pending()));
    let truth = bench.world().truth();
    for judged in judge(&analyse(&trace, profile), profile, &trace.ending).judged {
        let name = judged.quantity.name;
        let truth = match name {
            QuantityName::StorageTime => stored(&truth, profile, seed),
            _ => truth.value(name, profile),
        };
        let Some(truth) = truth else { continue };
        let (error, expanded) = (judged.quantity.value - truth, judged.expanded_uncertainty());
        let inside = u64::from(error.abs() <= expanded);
        table.entry(name).or_default().add(Seen {
            inside,
            errors: error / expanded,
            expanded: vec![expanded],
        });
    }
}

/// How long the battery of this board truly lasts: what it holds and loses by itself is anywhere within the tolerance that
/// the profile states.
fn stored(truth: &Truth, profile: &Profile, seed: u64) -> Option<f64> {
    let mut battery = ChaCha8Rng::seed_from_u64(seed);
    let mut battery_of =
        |stated: f64, tolerance: f64| stated * (1.0 + tolerance * battery.random_range(-1.0..=1.0));
    let storage = profile.pack.storage?;
    let at = storage.at.or(profile.limits.get(&QuantityName::OffCurrent)?.at)?;
    let remaining = battery_of(storage.remaining.0, storage.tolerance);
    let self_discharge = battery_of(storage.self_discharge.0, storage.tolerance);
    Some(remaining / (truth.off_current(at).0 + self_discharge))
}
