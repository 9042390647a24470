//! A station about to work: its log open, and whatever an earlier run left on switched off.

use super::{Exit, Failure};
use crate::bench::clock::Clock;
use crate::bench::serial::make_safe;
use crate::instrument::bench_file::BenchFile;
use crate::record::{Log, now};
use crate::report::OUTPUT_MAY_BE_ON;
use std::path::Path;

/// A bench, the clock it keeps, and the log of where it stands.
pub(super) struct Station<'b> {
    pub(super) bench: &'b BenchFile,
    pub(super) clock: Clock,
    pub(super) log: Log,
    pub(super) runtime: tokio::runtime::Runtime,
}

impl<'b> Station<'b> {
    /// Opens the log called `name`. When an earlier run never ended, its supply is commanded off and read back before
    /// anything else, whatever becomes of the next run.
    pub(super) fn open(bench: &'b BenchFile, clock: Clock, logs: &Path, name: &str) -> Result<Self, Failure> {
        let opened = Log::open(logs, name, &now())?;
        let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
        let mut station = Self { bench, clock, log: opened.log, runtime };
        for torn in &opened.torn {
            anstream::eprintln!("note: {torn}");
        }
        for leftover in &opened.leftovers {
            anstream::eprintln!("note: {leftover}");
        }
        if !opened.leftovers.is_empty() {
            station.switch_off()?;
        }
        Ok(station)
    }

    fn switch_off(&mut self) -> Result<(), Failure> {
        self.runtime.block_on(make_safe(self.bench, self.clock)).map_err(|error| Failure {
            exit: Exit::OutputMayBeOn,
            error: anyhow::anyhow!("{OUTPUT_MAY_BE_ON}\n{error}"),
        })?;
        self.log.confirm_output_off()?;
        anstream::eprintln!("note: the output was commanded off and reads back as off");
        Ok(())
    }

    /// Says which instruments are past their calibration. They measure all the same.
    pub(super) fn note_calibration(&self) {
        let today = now().date();
        for seat in self.bench.instruments() {
            if let Some(due) = seat.overdue(today) {
                anstream::eprintln!(
                    "note: the calibration of {} was due {due}: its accuracy is no longer assured; have it \
                     calibrated, then put the next date into the bench file",
                    seat.name
                );
            }
        }
    }
}
