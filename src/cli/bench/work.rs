//! Carries out work on a bench: connected, guarded, and ended with the output off.

use crate::bench::serial::SerialBench;
use crate::cli::station::Station;
use crate::cli::stop::listen;
use crate::cli::{Exit, Failure, guard, who};
use crate::procedure::{BenchWork, Procedure};
use crate::profile::Supply;
use crate::record::Instrument;
use crate::report::OUTPUT_MAY_BE_ON;
use crate::trace::{OutputState, Stop, Trace};
use crate::units::Volts;

/// A bench that is connected for work on it.
pub(super) struct Connected<'s, 'b> {
    station: &'s Station<'b>,
    bench: SerialBench,
    maximum: Volts,
}

impl<'s, 'b> Connected<'s, 'b> {
    /// Connects the bench for work in which no voltage exceeds `maximum`.
    pub(super) fn new(station: &'s Station<'b>, maximum: Volts) -> Result<Self, Failure> {
        Ok(Self { station, bench: station.connect(maximum)?, maximum })
    }

    /// The instruments as they named themselves.
    pub(super) fn instruments(&self) -> Vec<Instrument> {
        who::instruments(self.station.bench, &self.bench)
    }

    /// Carries out some work. However it ends, a panic and the operator's stop included, the output was commanded off.
    pub(super) fn carry_out(&mut self, work: BenchWork) -> Result<Trace, Failure> {
        let runtime = &self.station.runtime;
        let asked_to_stop = listen(runtime)?;
        let maximum = self.maximum;
        let supply = Supply { start: maximum, floor: maximum, maximum, current_limit: work.current_limit };
        let claims = self.station.bench.claims(&supply);
        let procedure = Procedure::on_bench(work);
        let mut trace = guard::driven(procedure, &mut self.bench, claims, &mut (), asked_to_stop, runtime);
        if trace.ending.stop == Stop::Completed
            && let Err(fault) = runtime.block_on(self.bench.end_run())
        {
            trace.ending.stop = Stop::Fault(fault);
        }
        Ok(trace)
    }
}

/// The exit code of a look at a bench. That the output may be on outweighs everything else, and is said aloud.
pub(super) fn exit(traces: &[Trace], is_good: bool) -> Exit {
    if traces.iter().any(|trace| trace.ending.output == OutputState::MayBeOn) {
        anstream::eprintln!("{OUTPUT_MAY_BE_ON}");
        Exit::OutputMayBeOn
    } else if traces.iter().any(|trace| trace.ending.stop == Stop::Aborted) {
        Exit::Aborted
    } else if is_good {
        Exit::Pass
    } else {
        Exit::Invalid
    }
}
