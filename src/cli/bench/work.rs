//! Carries out work on a bench: connected, guarded, and ended with the output off.

use super::place::Found;
use crate::bench::serial::SerialBench;
use crate::cli::station::Station;
use crate::cli::stop::listen;
use crate::cli::{Exit, Failure, guard, who};
use crate::instrument::bench_file::BenchFile;
use crate::procedure::{BenchWork, Procedure};
use crate::profile::Supply;
use crate::record::{BenchUsed, BoardUnderTest, Occasion, ProfileUsed, Subject, now};
use crate::report::OUTPUT_MAY_BE_ON;
use crate::trace::{OutputState, Stop, Trace};
use crate::units::Volts;
use std::collections::BTreeMap;

/// A bench that is connected for work on it.
pub(super) struct Connected<'s, 'b> {
    station: &'s mut Station<'b>,
    bench: SerialBench,
    used: BenchUsed,
    maximum: Volts,
}

impl<'s, 'b> Connected<'s, 'b> {
    /// Connects the bench for work in which no voltage exceeds `maximum`.
    pub(super) fn new(station: &'s mut Station<'b>, found: &Found, maximum: Volts) -> Result<Self, Failure> {
        let bench = station.connect(maximum)?;
        let used = found.used(who::instruments(station.bench, &bench));
        Ok(Self { station, bench, used, maximum })
    }

    /// The bench, its instruments as they named themselves.
    pub(super) fn used(&self) -> BenchUsed {
        self.used.clone()
    }

    /// The bench's file.
    pub(super) fn file(&self) -> &BenchFile {
        self.station.bench
    }

    /// Carries out some work. However it ends, a panic and the operator's stop included, the output was commanded off.
    /// Should this computer die meanwhile, the mark in the log tells the next start which supply may be on.
    pub(super) fn carry_out(&mut self, what: &str, work: BenchWork) -> Result<Trace, Failure> {
        let runtime = &self.station.runtime;
        let asked_to_stop = listen(runtime)?;
        let maximum = self.maximum;
        let supply = Supply { start: maximum, floor: maximum, maximum, current_limit: work.current_limit };
        let claims = self.station.bench.claims(&supply);
        let procedure = Procedure::on_bench(work);
        self.station.log.start(subject(what, self.used.clone()), now())?;
        let mut trace = guard::driven(procedure, &mut self.bench, claims, &mut (), asked_to_stop, runtime);
        if trace.ending.stop == Stop::Completed
            && let Err(fault) = runtime.block_on(self.bench.end_run())
        {
            trace.ending.stop = Stop::Fault(fault);
        }
        let output = trace.ending.output;
        match self.station.log.end_work(output) {
            Err(error) if output == OutputState::MayBeOn => Err(Failure::output_may_be_on(error)),
            ended => Ok(ended.map(|()| trace)?),
        }
    }
}

/// What the mark in the log says while no board is tested.
fn subject(what: &str, bench: BenchUsed) -> Subject {
    Subject {
        board: BoardUnderTest {
            board: "(none)".to_owned(),
            revision: "-".to_owned(),
            serial_number: what.to_owned(),
            batch: None,
            work_order: None,
        },
        profile: ProfileUsed { path: String::new(), sha256: String::new(), limits: BTreeMap::new() },
        bench,
        operator: None,
        occasion: Occasion::Production,
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
