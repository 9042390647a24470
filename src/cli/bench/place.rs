//! Which bench is meant, real or simulated, and where what is found of it is kept.

use crate::cli::room::room;
use crate::cli::simulated::{Simulation, bench_file};
use crate::cli::test::arrangement;
use crate::cli::{Failure, Format, files};
use crate::clock::Clock;
use crate::instrument::bench_file::BenchFile;
use crate::profile::Profile;
use crate::record::{BenchUsed, Instrument, Simulated};
use crate::sim::bench::{InFixture, SimulatedBench};
use crate::units::{Celsius, Volts};
use clap::Args;
use std::path::PathBuf;

#[derive(Debug, Args)]
pub(super) struct Place {
    /// Bench file, or `sim` for a simulated bench, or `sim-smu` for one with a source-measure unit.
    #[arg(value_name = "FILE|sim|sim-smu")]
    bench: PathBuf,
    /// Profile of the boards that are tested here: nothing goes above its maximum.
    #[arg(long, value_name = "FILE")]
    pub(super) profile: Option<PathBuf>,
    /// Readings for each mean.
    #[arg(long, value_name = "COUNT", default_value_t = 20, value_parser = clap::value_parser!(u16).range(5..=1000))]
    readings: u16,
    /// Folder of the logs.
    #[arg(long, value_name = "FOLDER", default_value = "logs")]
    pub(super) logs: PathBuf,
    /// Where the bench stands; the name of the bench when left out.
    #[arg(long, value_name = "NAME")]
    station: Option<String>,
    /// Who does it.
    #[arg(long, value_name = "NAME")]
    pub(super) operator: Option<String>,
    /// Temperature of the room, such as "24 degC"; as the bench file says when left out.
    #[arg(long, value_name = "TEMPERATURE", value_parser = room)]
    temperature: Option<Celsius>,
    /// How the result is written to standard output.
    #[arg(long, value_enum, default_value_t)]
    pub(super) format: Format,
    #[command(flatten)]
    simulation: Simulation,
}

/// A bench that can be looked at.
pub(super) struct Found {
    pub(super) file: BenchFile,
    pub(super) clock: Clock,
    pub(super) station: String,
    pub(super) simulated: Option<Simulated>,
    /// Answers as long as it is there.
    _instruments: Option<SimulatedBench>,
}

impl Place {
    /// The profile named, if one is.
    pub(super) fn profile(&self) -> Result<Option<Profile>, Failure> {
        self.profile.as_deref().map(files::profile).transpose()
    }

    pub(super) fn readings(&self) -> usize {
        usize::from(self.readings)
    }

    /// Reads the bench file, or starts a simulated bench with this in its fixture.
    pub(super) fn find(&self, profile: Option<&Profile>, in_fixture: InFixture) -> Result<Found, Failure> {
        let named = |name: &str| self.station.clone().unwrap_or_else(|| name.to_owned());
        let mut found = match arrangement(&self.bench) {
            Some(arrangement) => {
                let river_node = files::river_node()?;
                let simulated = self.simulation.of_board("");
                let profile = profile.unwrap_or(&river_node);
                let instruments = self.simulation.start_with(profile, &simulated, arrangement, in_fixture)?;
                Found {
                    file: bench_file(&instruments)?,
                    clock: self.simulation.clock(),
                    station: named("simulated"),
                    simulated: Some(simulated),
                    _instruments: Some(instruments),
                }
            }
            None => {
                self.simulation.refuse_on_real_bench()?;
                let file = files::bench(&self.bench)?;
                let station = named(&file.name);
                Found { file, clock: Clock::real(), station, simulated: None, _instruments: None }
            }
        };
        if let Some(room) = self.temperature {
            found.file.set_room(room);
        }
        Ok(found)
    }
}

impl Found {
    /// The bench for the record.
    pub(super) fn used(&self, instruments: Vec<Instrument>) -> BenchUsed {
        BenchUsed { name: self.file.name.clone(), instruments, simulated: self.simulated.clone() }
    }
}

/// Refuses a voltage that profile or supply, or the scope of this program, do not allow.
pub(super) fn allowed(volts: Volts, profile: Option<&Profile>, bench: &BenchFile) -> Result<(), Failure> {
    let supply = bench.ability(volts).max_voltage;
    let (most, why) = match profile {
        Some(profile) => (profile.supply.maximum, "the maximum of the profile"),
        None => (SCOPE, "the scope of this program"),
    };
    let (most, why) = if supply < most { (supply, "what the supply can be set to") } else { (most, why) };
    if Volts::ZERO <= volts && volts <= most {
        return Ok(());
    }
    Err(anyhow::anyhow!("{volts} is asked for; wanted 0 V to {most}, {why}").into())
}

/// The highest voltage without a profile: as in profiles.
const SCOPE: Volts = Volts(30.0);
