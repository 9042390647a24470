//! A trace of a million samples through `ebbmark analyse`: time from start to exit, and the most memory it took.
//!
//! Two shapes of the same run: a staircase read many times at each step, and a ramp that hardly ever stands still, where
//! almost every sample is a set-point of its own. Both hold all that a trace can: the voltage at the load, the ammeter's
//! range, and the off current on a small one, so that nothing of the analysis is left out.

#![expect(clippy::print_stdout, reason = "a benchmark prints its figures")]

mod figures;

use ebbmark::clock::Clock;
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::{Condition, Setup, World};
use ebbmark::units::Volts;
use figures::{conclude, quantile};
use std::error::Error;
use std::fmt::Write as _;
use std::fs;
use std::path::Path;
use std::process::{Child, Command, ExitCode, Stdio};
use std::thread;
use std::time::Duration;

/// Samples of a trace.
const SAMPLES: u32 = 1_000_000;

/// Longest time allowed, s.
const TIME_BAR: f64 = 1.5;

/// Most memory allowed, MB.
const MEMORY_BAR: f64 = 200.0;

/// Times each file is analysed; the median counts.
const ROUNDS: usize = 5;

/// Time between two samples of the trace.
const EVERY: Duration = Duration::from_millis(2);

/// Samples for which the ramp stops at the voltage of the off current: ten seconds.
const HELD: u32 = 5_000;

/// Time until the board is on, before the first sample.
const ARMED: Duration = Duration::from_millis(200);

const PROFILE: &str = concat!(env!("CARGO_MANIFEST_DIR"), "/profiles/river-node.toml");

fn main() -> Result<ExitCode, Box<dyn Error>> {
    let folder = tempfile::tempdir()?;
    let profile_path = Path::new(PROFILE);
    let profile = Profile::read(PROFILE, &fs::read_to_string(profile_path)?)?;
    println!("a trace of {SAMPLES} samples through `ebbmark analyse`, {ROUNDS} rounds\n");
    println!("shape                   file    time (best to worst)      memory");
    let (mut slowest, mut largest) = (0.0_f64, 0.0_f64);
    for (shape, standing) in [("staircase", 1000), ("ramp", 1)] {
        let path = folder.path().join(format!("{shape}.csv"));
        fs::write(&path, trace(&profile, standing)?)?;
        let rounds = (0..ROUNDS).map(|_| analyse(&path, profile_path)).collect::<Result<Vec<_>, _>>()?;
        let times: Vec<f64> = rounds.iter().map(|round| round.seconds).collect();
        let memory = rounds.iter().map(|round| round.megabytes).fold(0.0, f64::max);
        let time = quantile(&times, 0.5);
        println!(
            "{shape:18} {:6.1} MB  {time:6.2} s ({:.2} to {:.2})  {memory:6.0} MB",
            fs::metadata(&path)?.len() as f64 / 1e6,
            quantile(&times, 0.0),
            quantile(&times, 1.0),
        );
        (slowest, largest) = (slowest.max(time), largest.max(memory));
    }
    Ok(conclude(
        &format!("{slowest:.2} s, {largest:.0} MB"),
        &format!("under {TIME_BAR} s and {MEMORY_BAR} MB"),
        slowest < TIME_BAR && largest < MEMORY_BAR,
    ))
}

/// A good board, down and back up once, as CSV; each set-point stands for `standing` samples. On the way down the ramp
/// stops where the off current is limited, and at and below that voltage the ammeter is on its smallest range.
fn trace(profile: &Profile, standing: u32) -> Result<String, Box<dyn Error>> {
    let mut setup = Setup::new(profile, Condition::Good, 1);
    // What a voltmeter draws would stand in the off current: a trace from elsewhere does not tell of it.
    setup.voltmeter.input_resistance = None;
    let smallest = setup.ability().ranges.first().copied().ok_or("no range")?;
    let off_at = profile.limits.get(&QuantityName::OffCurrent).and_then(|limit| limit.at);
    let off_at = off_at.ok_or("no limit on the off current")?;
    let mut world = World::new(&setup);
    world.set_current_limit(profile.supply.current_limit);
    let large = world.set_range(profile.supply.current_limit);
    world.set_volts(profile.supply.start);
    world.set_output(true);
    world.advance_to(ARMED);
    let (top, span) = (profile.supply.start, profile.supply.start - profile.supply.floor);
    let steps = (SAMPLES - HELD) / standing;
    let mut text = "time_s,set_v,sense_v,current_a,load_v,range_a\n".to_owned();
    let (mut moved, mut held, mut set_last, mut began) = (0, 0, None, ARMED);
    for index in 0..SAMPLES {
        let at = f64::from(moved / standing) / f64::from(steps) * 2.0;
        let set = Volts(((top - span * at.min(2.0 - at)).0 * 1e5).round() / 1e5);
        if set_last != Some(set) {
            world.set_volts(set);
            set_last = Some(set);
        }
        let wanted = if set <= off_at { smallest } else { large };
        if wanted != world.range() {
            world.set_range(wanted);
            began += setup.ammeter.range_settle;
            world.advance_to(began + EVERY * index);
        }
        // Held once, on the first set-point that low.
        if set <= off_at && held < HELD {
            held += 1;
        } else {
            moved += 1;
        }
        let mark = world.mark();
        world.advance_to(began + EVERY * (index + 1));
        let (sense, current, load) =
            (world.read_sense(&mark), world.read_current(&mark), world.read_load(&mark));
        let current = current.amps().ok_or("an overload")?.0;
        let at = (world.now() - ARMED - EVERY / 2).as_secs_f64();
        let _ = writeln!(text, "{at:.3},{},{},{current:e},{},{:e}", set.0, sense.0, load.0, world.range().0);
    }
    Ok(text)
}

struct Round {
    seconds: f64,
    megabytes: f64,
}

fn analyse(trace: &Path, profile: &Path) -> Result<Round, Box<dyn Error>> {
    let clock = Clock::real();
    let begun = clock.now();
    let mut child = Command::new(env!("CARGO_BIN_EXE_ebbmark"))
        .args(["analyse", "--format", "json", "--profile"])
        .args([profile, trace])
        .stdout(Stdio::null())
        .spawn()?;
    let megabytes = watch(&mut child)?;
    let seconds = (clock.now() - begun).as_secs_f64();
    match child.wait()?.code() {
        Some(0) => Ok(Round { seconds, megabytes }),
        code => Err(format!("analyse ended with {code:?}, wanted a good board").into()),
    }
}

/// Follows the peak of the memory that a process holds until it is gone.
fn watch(child: &mut Child) -> Result<f64, Box<dyn Error>> {
    let status = format!("/proc/{}/status", child.id());
    let mut peak = 0.0;
    while child.try_wait()?.is_none() {
        let text = fs::read_to_string(&status).unwrap_or_default();
        let line = text.lines().find_map(|line| line.strip_prefix("VmHWM:"));
        let kilobytes: Option<f64> = line.and_then(|line| line.trim().trim_end_matches(" kB").parse().ok());
        peak = kilobytes.map_or(peak, |kilobytes| kilobytes * 1024.0 / 1e6);
        thread::sleep(Duration::from_millis(1));
    }
    Ok(peak)
}
