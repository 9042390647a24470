//! `bench check --standard`: a known resistor in the board's place shows whether the small ranges read what flows.

use super::check::{ohms, share};
use super::work::Connected;
use crate::cli::Failure;
use crate::instrument::bench_file::BenchFile;
use crate::procedure::{BenchWork, SMALL_CURRENT};
use crate::profile::Supply;
use crate::trace::Trace;
use crate::units::{Amps, Ohms, Volts};
use crate::verification::{KnownLoad, StandardFound, StandardTask, standard};
use clap::Args;

#[derive(Debug, Args)]
pub(super) struct Standard {
    /// A known resistor of this value is in the fixture in place of a board, such as "1 Mohm", which draws 3 µA at 3 V:
    /// the small ranges of the ammeter are compared with the current it must draw.
    #[arg(
        id = "standard",
        long = "standard",
        value_name = "RESISTANCE",
        value_parser = ohms,
        requires = "energise",
        conflicts_with = "load"
    )]
    pub(super) resistance: Option<Ohms>,
    /// Tolerance of that resistor.
    #[arg(long = "standard-tolerance", value_name = "SHARE", default_value = "1 %", value_parser = share)]
    tolerance: f64,
}

/// Where nothing else is asked for: safe for any resistor and fixture, and enough for microamperes.
const VOLTAGE: Volts = Volts(3.0);

/// Without a known resistor.
const LOW_VOLTAGE: Volts = Volts(1.0);

impl Standard {
    /// The resistor, where one is in the fixture.
    pub(super) fn resistor(&self) -> Option<KnownLoad> {
        self.resistance.map(|resistance| KnownLoad { resistance, tolerance: self.tolerance })
    }

    /// The voltage of a check where none is given.
    pub(super) fn usual_voltage(&self) -> Volts {
        if self.resistance.is_some() { VOLTAGE } else { LOW_VOLTAGE }
    }

    /// Refuses a resistor that would draw more than small ranges are used for.
    pub(super) fn is_allowed(&self, at: Volts, bench: &BenchFile) -> Result<(), Failure> {
        let Some(resistance) = self.resistance else { return Ok(()) };
        let draws = at / resistance + voltmeter(bench, at);
        if draws <= SMALL_CURRENT {
            return Ok(());
        }
        Err(anyhow::anyhow!(
            "{resistance} and the voltmeter draw {draws} at {at}; small ranges are used for at most {SMALL_CURRENT}: take a \
             larger resistor or lower --test-voltage; for a resistor like a load there is --load"
        )
        .into())
    }

    /// Reads `resistor` on the small ranges that carry what it draws.
    pub(super) fn read(
        resistor: KnownLoad,
        mut work: BenchWork,
        bench: &mut Connected<'_, '_>,
        what: &str,
    ) -> Result<(Trace, Vec<StandardFound>, Vec<String>), Failure> {
        let draws = work.maximum / resistor.resistance + voltmeter(bench.file(), work.maximum);
        work.small_ranges.retain(|range| *range >= draws);
        let task = StandardTask {
            resistor,
            readings: work.readings,
            large_range: work.large_range,
            arrival_tolerance: work.arrival_tolerance,
        };
        let trace = bench.carry_out(what, work)?;
        let (found, problems) = standard(&trace, &task);
        Ok((trace, found, problems))
    }
}

/// What the voltmeter draws through the ammeter.
fn voltmeter(bench: &BenchFile, at: Volts) -> Amps {
    let supply = Supply { start: at, floor: at, maximum: at, current_limit: SMALL_CURRENT };
    bench.claims(&supply).sense_resistance.map_or(Amps::ZERO, |input| at / input)
}
