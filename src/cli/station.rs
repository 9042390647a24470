//! A station about to work: its log open, and whatever an earlier run left on switched off.

use super::Failure;
use super::left_on::LeftOn;
use crate::bench::serial::{ConnectError, SerialBench, connect, make_safe};
use crate::clock::Clock;
use crate::instrument::bench_file::BenchFile;
use crate::record::{Leftover, Log, now};
use crate::units::Volts;
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
    /// anything else, whatever becomes of the next run. Another supply than that one cannot stand for it.
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
            station.switch_off(&opened.leftovers)?;
        }
        Ok(station)
    }

    fn switch_off(&mut self, leftovers: &[Leftover]) -> Result<(), Failure> {
        let mark = self.log.mark();
        let left_on = || LeftOn::by(leftovers, &mark);
        left_on().try_for_each(|left_on| left_on.refuse_other_bench(self.bench))?;
        let switching_off = make_safe(self.bench, self.clock);
        let supply = self.runtime.block_on(switching_off).map_err(Failure::output_may_be_on)?;
        left_on().try_for_each(|left_on| left_on.refuse_other_supply(&supply))?;
        self.log.confirm_output_off()?;
        anstream::eprintln!("note: the output was commanded off and reads back as off");
        Ok(())
    }

    /// Connects the bench, made fit for a run in which no voltage exceeds `maximum`.
    pub(super) fn connect(&self, maximum: Volts) -> Result<SerialBench, Failure> {
        let connecting = connect(self.bench, maximum, self.clock);
        let mut bench = self.runtime.block_on(connecting).map_err(|error| match &error {
            ConnectError::Instruments { errors } if errors.iter().any(|error| self.bench.stays_on(error)) => {
                Failure::output_may_be_on(error)
            }
            _ => Failure::bench(error),
        })?;
        self.runtime.block_on(bench.begin_run()).map_err(Failure::bench)?;
        Ok(bench)
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
