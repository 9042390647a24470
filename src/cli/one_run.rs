//! One board, from the mark in the log to the kept record.

use super::again::{self, Again};
use super::due::{self, BenchState};
use super::live::Live;
use super::station::Station;
use super::stop::listen;
use super::{Failure, earlier, files, guard, ratio, who};
use crate::bench::Bench;
use crate::bench::serial::SerialBench;
use crate::procedure::{Plan, Procedure, inrush, swing};
use crate::profile::Profile;
use crate::record::{
    BenchUsed, BoardUnderTest, Finished, Occasion, ProfileUsed, Run, Simulated, Subject, now,
};
use crate::report::OUTPUT_MAY_BE_ON;
use crate::trace::{OutputState, Stop};
use crate::units::Celsius;
use std::path::PathBuf;

/// What is to be tested.
pub(super) struct Order<'o> {
    pub(super) profile: &'o Profile,
    pub(super) profile_path: String,
    pub(super) simulated: Option<Simulated>,
    pub(super) board: BoardUnderTest,
    pub(super) operator: Option<String>,
    /// Temperature at the board, where a thermometer in the fixture tells it.
    pub(super) fixture: Option<Celsius>,
    /// What becomes of a board that has passed already.
    pub(super) again: Again,
    /// A reference board shows whether the bench is in order, so it is measured whatever is overdue.
    pub(super) is_reference: bool,
}

/// A run that is on disk, and the folder of its log.
pub(super) struct Kept {
    pub(super) run: Run,
    pub(super) folder: PathBuf,
}

impl Order<'_> {
    /// Tests the board. A bench that is not fit for a run ends this before the run starts, with nothing in the log: the
    /// output was never on, and the board was not touched.
    pub(super) fn carry_out(&self, mut station: Station<'_>) -> Result<Kept, Failure> {
        files::fit(self.profile, station.bench)?;
        ratio::check(self.profile, station.bench)?;
        if let Some(inrush) = inrush(self.profile) {
            anstream::eprintln!("note: {inrush}");
        }
        station.note_calibration();
        if !self.is_reference {
            due::refuse_overdue_calibration(self.profile, station.bench)?;
        }
        let occasion = if self.is_reference { Occasion::Reference } else { again::occasion(self, &station)? };
        let maximum = self.profile.supply.maximum;
        let mut bench = station.connect(maximum)?;

        let asked_to_stop = listen(&station.runtime)?;
        let state = BenchState::of(&station, &who::instruments(station.bench, &bench))?;
        let source = state.source_resistance().filter(|_| self.simulated.is_none());
        let swing = source.and_then(|source| swing(self.profile, source));
        files::refuse(self.profile, station.bench, swing.as_slice())?;
        match self.simulated {
            Some(_) => state.note_exempt(&self.profile.bench),
            None if self.is_reference => {}
            None => state.refuse_overdue(self.profile)?,
        }
        let subject = self.subject(&station, &bench, occasion);
        let prior = earlier::prior(station.log.folder(), &subject.profile, self.simulated.is_some());
        station.log.start(subject, now())?;
        let plan = Plan::new(self.profile, &station.bench.ability(maximum)).with_prior(prior);
        let mut claims = station.bench.claims(&self.profile.supply);
        claims.zero = state.zeros();
        claims.fixture = self.fixture;
        claims.doubts = station.bench.doubts(now().date());
        let mut live = Live::new(self.profile.load.resistance);
        let procedure = Procedure::new(plan);
        let runtime = &station.runtime;
        let mut trace = guard::driven(procedure, &mut bench, claims, &mut live, asked_to_stop, runtime);
        live.finish();
        // A run that stopped early keeps its first reason. Whatever comes of this, what is known of the output stays.
        if trace.ending.stop == Stop::Completed
            && let Err(fault) = runtime.block_on(bench.end_run())
        {
            trace.ending.stop = Stop::Fault(fault);
        }

        let verdict = guard::judged(&trace, self.profile);
        let finished = Finished { verdict, ended: now(), duration: bench.now() };
        let may_be_on = trace.ending.output == OutputState::MayBeOn;
        let run = station
            .log
            .finish(&finished, &trace)
            .map_err(|error| if may_be_on { Failure::output_may_be_on(error) } else { error.into() })?;
        if may_be_on {
            // Standard output may go to a program; whoever stands at the bench reads this.
            anstream::eprintln!("{OUTPUT_MAY_BE_ON}");
        }
        Ok(Kept { run, folder: station.log.folder().path().to_owned() })
    }

    fn subject(&self, station: &Station<'_>, bench: &SerialBench, occasion: Occasion) -> Subject {
        Subject {
            board: self.board.clone(),
            profile: ProfileUsed {
                path: self.profile_path.clone(),
                sha256: self.profile.hash.clone(),
                limits: self.profile.limits.clone(),
            },
            bench: BenchUsed {
                name: station.bench.name.clone(),
                instruments: who::instruments(station.bench, bench),
                simulated: self.simulated.clone(),
            },
            operator: self.operator.clone(),
            occasion,
        }
    }
}
