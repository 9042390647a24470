//! `bench zero`: the ammeter with nothing in the fixture.

use super::place::{Found, Place, allowed};
use super::work::{Connected, exit};
use crate::cli::show::print;
use crate::cli::station::Station;
use crate::cli::{Exit, Failure, Format};
use crate::procedure::{BenchWork, Task};
use crate::profile::{Profile, QuantityName};
use crate::record::{BenchEntry, BenchFound, now};
use crate::report;
use crate::sim::bench::InFixture;
use crate::units::{Amps, Volts};
use crate::verification::{ZeroTask, zeros};
use clap::Args;

#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  ebbmark bench zero my-bench.toml --fixture-empty --profile profiles/river-node.toml

The output is switched on, with the lowest current limit of the supply, at 0 V and at the voltage of the profile's off
current. `test` takes off what is found here until another zero is taken.")]
pub(super) struct Arguments {
    #[command(flatten)]
    place: Place,
    /// Confirms that nothing is in the fixture: the output is switched on.
    #[arg(long)]
    fixture_empty: bool,
    /// A voltage to take the zero at, besides 0 V; may be given several times. The voltage of the profile's off current
    /// when left out.
    #[arg(long, value_name = "VOLTAGE", value_parser = volts)]
    at: Vec<Volts>,
}

/// Reads a voltage such as `5.8 V`.
pub(super) fn volts(text: &str) -> Result<Volts, String> {
    Volts::parse(text).map_err(|error| error.to_string())
}

/// Enough for voltmeter and cables, and less than any load.
const LITTLE_CURRENT: Amps = Amps(5e-3);

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        if !self.fixture_empty {
            return Err(anyhow::anyhow!(
                "the zero is taken with the output on and nothing in the fixture: take the board out, then say so with \
                 --fixture-empty"
            )
            .into());
        }
        let profile = self.place.profile()?;
        let found = self.place.find(profile.as_ref(), InFixture::Nothing)?;
        let voltages = self.voltages(profile.as_ref(), &found)?;
        let highest = voltages.last().copied().unwrap_or(Volts::ZERO);
        let mut station = Station::open(&found.file, found.clock, &self.place.logs, &found.station)?;
        let mut bench = Connected::new(&mut station, &found, highest)?;

        let ability = found.file.ability(highest);
        let readings = self.place.readings();
        let work = BenchWork::new(&ability, highest, LITTLE_CURRENT, readings, Task::SmallRanges(voltages));
        let limit = profile.as_ref().and_then(|profile| profile.limits.get(&QuantityName::OffCurrent));
        let task = ZeroTask {
            readings,
            large_range: work.large_range,
            arrival_tolerance: work.arrival_tolerance,
            off_current: limit.and_then(|limit| limit.max).map(Amps),
        };
        let used = bench.used();
        let trace = bench.carry_out("bench zero", work)?;
        drop(bench);
        let (zeros, problems) = zeros(&trace, &task);

        let what = BenchFound::Zero { zeros };
        let mut entry = BenchEntry::new(&found.station, now(), used, what, problems);
        entry.operator.clone_from(&self.place.operator);
        entry.traces.push(trace);
        let exit = exit(&entry.traces, entry.is_good());
        let kept = station.log.keep(&entry);
        print(&match self.place.format {
            Format::Text => report::bench_text(&entry),
            Format::Json => report::bench_json(&[&entry]) + "\n",
        })?;
        kept.map_err(|error| {
            if exit == Exit::OutputMayBeOn { Failure::output_may_be_on(error) } else { error.into() }
        })?;
        Ok(exit)
    }

    /// 0 V, and what is asked for, from low to high.
    fn voltages(&self, profile: Option<&Profile>, found: &Found) -> Result<Vec<Volts>, Failure> {
        let off_current = profile.and_then(|profile| profile.limits.get(&QuantityName::OffCurrent)?.at);
        let mut voltages = vec![Volts::ZERO];
        if self.at.is_empty() {
            voltages.extend(off_current);
        } else {
            voltages.extend(&self.at);
        }
        for volts in &voltages {
            allowed(*volts, profile, &found.file)?;
        }
        voltages.sort_by(|a, b| a.0.total_cmp(&b.0));
        voltages.dedup();
        Ok(voltages)
    }
}
