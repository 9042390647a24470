//! Which supply an earlier run may have left on: that supply alone can be found to be off, and no other in its place.

use super::Failure;
use crate::instrument::bench_file::BenchFile;
use crate::instrument::definition::Role;
use crate::instrument::scpi;
use crate::record::{Identity, Instrument, Leftover};
use std::path::Path;

/// A supply that an earlier run may have left on.
pub(super) struct LeftOn<'l> {
    run: &'l Identity,
    supply: &'l Instrument,
    /// The file that says so.
    mark: &'l Path,
}

impl<'l> LeftOn<'l> {
    /// The supplies of runs that never ended, as far as they are known. Simulated ones went with their program.
    pub(super) fn by(leftovers: &'l [Leftover], mark: &'l Path) -> impl Iterator<Item = Self> {
        let runs = leftovers.iter().filter_map(Leftover::identity);
        runs.filter(|run| run.bench.simulated.is_none()).filter_map(move |run| {
            let is_source =
                |instrument: &&Instrument| instrument.roles.iter().any(|role| role == Role::Source.key());
            Some(Self { run, supply: run.bench.instruments.iter().find(is_source)?, mark })
        })
    }

    /// Sends nothing to a bench that is another by its name or by the port of its supply.
    pub(super) fn refuse_other_bench(&self, bench: &BenchFile) -> Result<(), Failure> {
        let port = bench.player(Role::Source).map_or("", |supply| &supply.port);
        if bench.name == self.run.bench.name && port == self.supply.port {
            return Ok(());
        }
        Err(self.refused(&format!("this is bench \"{}\" with its supply on {port}", bench.name)))
    }

    /// Another supply on the same port does not stand for the one left on, even though it has been switched off.
    pub(super) fn refuse_other_supply(&self, found: &scpi::Identity) -> Result<(), Failure> {
        let Instrument { maker, model, serial_number, .. } = self.supply;
        if (&found.maker, &found.model, &found.serial) == (maker, model, serial_number) {
            return Ok(());
        }
        Err(self.refused(&format!("on this port answers {found}")))
    }

    fn refused(&self, what_is_here: &str) -> Failure {
        let Instrument { maker, model, serial_number, port, .. } = self.supply;
        let serial_number = serial_number.as_deref().unwrap_or("without a serial number");
        Failure::output_may_be_on(format!(
            "run {} left its output on or unconfirmed: bench \"{}\", supply {maker} {model} {serial_number} on \
             {port}; but {what_is_here}, which is another one. Start once with that bench, which switches its supply \
             off and reads it back; or switch that supply off by hand, then remove the file {}",
            self.run.run,
            self.run.bench.name,
            self.mark.display()
        ))
    }
}
