//! One board, from the mark in the log to the kept record.

use super::live::Live;
use super::stop::asked_to_stop;
use super::{Exit, Failure, files};
use crate::analysis::analyse;
use crate::bench::clock::Clock;
use crate::bench::serial::{SerialBench, connect};
use crate::bench::{Bench, drive};
use crate::instrument::bench_file::BenchFile;
use crate::procedure::{Action, Event, Plan, Procedure};
use crate::profile::Profile;
use crate::record::{BenchUsed, BoardUnderTest, Finished, Log, ProfileUsed, Run, Simulated, Subject, now};
use crate::report::OUTPUT_MAY_BE_ON;
use crate::verdict::judge;
use std::path::PathBuf;

/// What is to be tested, and where its record goes.
pub(super) struct Order<'o> {
    pub(super) profile: &'o Profile,
    pub(super) profile_path: String,
    pub(super) bench: &'o BenchFile,
    pub(super) clock: Clock,
    pub(super) simulated: Option<Simulated>,
    pub(super) board: BoardUnderTest,
    pub(super) operator: Option<String>,
    pub(super) logs: PathBuf,
    pub(super) station: String,
}

/// A run that is on disk, and the folder of its log.
pub(super) struct Kept {
    pub(super) run: Run,
    pub(super) folder: PathBuf,
}

impl Order<'_> {
    /// Tests the board. What an earlier run left on is switched off before anything else.
    pub(super) fn carry_out(&self) -> Result<Kept, Failure> {
        files::fit(self.profile, self.bench)?;
        let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
        runtime.block_on(self.run())
    }

    async fn run(&self) -> Result<Kept, Failure> {
        let opened = Log::open(&self.logs, &self.station, &now())?;
        let mut log = opened.log;
        for torn in &opened.torn {
            anstream::eprintln!("note: {torn}");
        }
        let maximum = self.profile.supply.maximum;
        let mut bench = connect(self.bench, maximum, self.clock).await.map_err(Failure::bench)?;
        if !opened.leftovers.is_empty() {
            for leftover in &opened.leftovers {
                anstream::eprintln!("note: {leftover}");
            }
            switch_off_leftover(&mut bench).await?;
            log.confirm_output_off()?;
        }
        bench.begin_run().await.map_err(Failure::bench)?;

        log.start(self.subject(&bench), now())?;
        let plan = Plan::new(self.profile, &self.bench.ability(maximum));
        let claims = self.bench.claims(&self.profile.supply);
        let mut live = Live::new(self.profile.load.resistance);
        let trace = drive(Procedure::new(plan), &mut bench, claims, &mut live, asked_to_stop()).await;
        live.finish();

        let verdict = judge(&analyse(&trace, self.profile), self.profile, &trace.ending);
        let finished = Finished { verdict, ended: now(), duration: bench.now() };
        let run = log.finish(&finished, &trace)?;
        Ok(Kept { run, folder: log.folder().path().to_owned() })
    }

    fn subject(&self, bench: &SerialBench) -> Subject {
        Subject {
            board: self.board.clone(),
            profile: ProfileUsed {
                path: self.profile_path.clone(),
                sha256: self.profile.hash.clone(),
                limits: self.profile.limits.clone(),
            },
            bench: BenchUsed {
                name: self.bench.name.clone(),
                instruments: super::who::instruments(self.bench, bench),
                simulated: self.simulated.clone(),
            },
            operator: self.operator.clone(),
        }
    }
}

async fn switch_off_leftover(bench: &mut SerialBench) -> Result<(), Failure> {
    match bench.perform(&Action::OutputOff).await {
        Event::Done => {
            anstream::eprintln!("note: the output was commanded off and reads back as off");
            Ok(())
        }
        Event::Failed(fault) => {
            Err(Failure { exit: Exit::OutputMayBeOn, error: anyhow::anyhow!("{OUTPUT_MAY_BE_ON}\n{fault}") })
        }
        _ => Err(Failure { exit: Exit::OutputMayBeOn, error: anyhow::anyhow!(OUTPUT_MAY_BE_ON) }),
    }
}
