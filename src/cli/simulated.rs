//! What is simulated, as the command line says it.

use super::Failure;
use crate::clock::Clock;
use crate::instrument::bench_file::BenchFile;
use crate::instrument::library;
use crate::profile::Profile;
use crate::record::Simulated;
use crate::sim::bench::{Arrangement, InFixture, Options, SimulatedBench};
use crate::sim::{Condition, Setup};
use anyhow::Context;
use clap::Args;
use sha2::{Digest, Sha256};
use std::path::Path;

#[derive(Clone, Debug, Args)]
pub(super) struct Simulation {
    /// Condition of the simulated board or bench, several joined by + or given repeatedly; `ebbmark sim --help` lists them.
    #[arg(
        long,
        value_name = "NAME",
        default_value = "good",
        value_delimiter = '+',
        help_heading = "Simulated bench"
    )]
    pub(super) condition: Vec<Condition>,
    /// Seed of the simulated board and its instruments; taken from the serial number when left out.
    #[arg(long, help_heading = "Simulated bench")]
    pub(super) seed: Option<u64>,
    /// Let simulated time run so many times faster than the clock on the wall.
    #[arg(
        long,
        default_value_t = 1.0,
        value_name = "FACTOR",
        value_parser = speed,
        allow_negative_numbers = true,
        help_heading = "Simulated bench"
    )]
    pub(super) speed: f64,
}

/// Reads how many times faster than the wall simulated time runs.
pub(super) fn speed(text: &str) -> Result<f64, String> {
    let speed = text.parse().ok().filter(|speed: &f64| speed.is_finite() && *speed > 0.0);
    speed.ok_or_else(|| {
        "wanted a number above 0, such as 1 for real time or 5 for five times as fast".to_owned()
    })
}

impl Simulation {
    /// True when anything but a good board in real time was asked for.
    pub(super) fn is_asked_for(&self) -> bool {
        #[expect(clippy::float_cmp, reason = "the default, as clap put it there")]
        let hurried = self.speed != 1.0;
        hurried || self.seed.is_some() || self.condition != [Condition::Good]
    }

    /// What is simulated has no place on a real bench.
    pub(super) fn refuse_on_real_bench(&self) -> Result<(), Failure> {
        if !self.is_asked_for() {
            return Ok(());
        }
        let error = "--condition, --seed and --speed go with --bench sim or sim-smu; real instruments are as they are";
        Err(anyhow::anyhow!(error).into())
    }

    /// The condition and the seed for the board called `serial_number`: the same board each time it is tested.
    pub(super) fn of_board(&self, serial_number: &str) -> Simulated {
        let seed = self.seed.unwrap_or_else(|| {
            let digest = Sha256::digest(serial_number.as_bytes());
            digest.iter().take(4).fold(0, |seed, byte| seed << 8 | u64::from(*byte))
        });
        let conditions: Vec<&str> = self.condition.iter().map(|condition| condition.key()).collect();
        Simulated { condition: conditions.join("+"), seed }
    }

    /// Starts instruments on pseudo-terminals, with a board drawn from the seed between them.
    pub(super) fn start(
        &self,
        profile: &Profile,
        simulated: &Simulated,
        arrangement: Arrangement,
    ) -> Result<SimulatedBench, Failure> {
        self.start_with(profile, simulated, arrangement, InFixture::Board)
    }

    /// The same with something else in the place of the board.
    pub(super) fn start_with(
        &self,
        profile: &Profile,
        simulated: &Simulated,
        arrangement: Arrangement,
        in_fixture: InFixture,
    ) -> Result<SimulatedBench, Failure> {
        self.start_setup(self.setup(profile, simulated), arrangement, in_fixture)
    }

    /// The board and bench drawn from the seed.
    pub(super) fn setup(&self, profile: &Profile, simulated: &Simulated) -> Setup {
        Setup::with(profile, &self.condition, simulated.seed)
    }

    /// Starts instruments around a board that was drawn before.
    pub(super) fn start_setup(
        &self,
        mut setup: Setup,
        arrangement: Arrangement,
        in_fixture: InFixture,
    ) -> Result<SimulatedBench, Failure> {
        setup.link_faults = setup.link_faults.into_iter().map(|fault| fault.at_speed(self.speed)).collect();
        let clock = Clock::faster(self.speed);
        let options = Options { arrangement, clock, in_fixture, ..Options::default() };
        Ok(SimulatedBench::start(&setup, options).context("the simulated bench cannot be started")?)
    }

    /// The clock of a simulated bench, for the program's side.
    pub(super) fn clock(&self) -> Clock {
        Clock::faster(self.speed)
    }
}

/// The bench file of a simulated bench, read like any other.
pub(super) fn bench_file(bench: &SimulatedBench) -> Result<BenchFile, Failure> {
    let find = |name: &str| library::find(name, Path::new("."));
    Ok(BenchFile::read("simulated bench", &bench.bench_file(), &find)?)
}
