//! `sim`: a simulated bench that stays up for other programs.

use super::show::print;
use super::simulated::Simulation;
use super::stop::listen;
use super::{Exit, Failure, files};
use crate::sim::Condition;
use crate::sim::bench::Arrangement;
use anyhow::Context;
use clap::Args;
use std::path::PathBuf;

#[derive(Debug, Args)]
#[command(after_help = conditions())]
pub(super) struct Arguments {
    /// Profile of the simulated board; the river-level logger when left out.
    #[arg(long, value_name = "FILE")]
    profile: Option<PathBuf>,
    /// One source-measure unit in place of supply, ammeter and voltmeter.
    #[arg(long)]
    source_measure_unit: bool,
    /// Write a bench file for these ports, so that `ebbmark test --bench FILE` runs on them.
    #[arg(long, value_name = "FILE")]
    bench_file: Option<PathBuf>,
    #[command(flatten)]
    simulation: Simulation,
}

fn conditions() -> String {
    let lines: Vec<String> = Condition::ALL
        .iter()
        .map(|condition| format!("  {:22} {}", condition.key(), condition.description()))
        .collect();
    format!(
        "Conditions, several joined by + (a source-measure unit knows none of the supply's and the ammeter's own):\n\
         {}\n\nExample:\n  ebbmark sim --condition high-trip+no-sink",
        lines.join("\n")
    )
}

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        let profile = match &self.profile {
            Some(path) => files::profile(path)?,
            None => files::river_node()?,
        };
        let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
        let asked_to_stop = listen(&runtime)?;
        let simulated = self.simulation.of_board("");
        let arrangement =
            if self.source_measure_unit { Arrangement::SourceMeasureUnit } else { Arrangement::Separate };
        let bench = self.simulation.start(&profile, &simulated, arrangement)?;
        if let Some(path) = &self.bench_file {
            std::fs::write(path, bench.bench_file())
                .with_context(|| format!("cannot write {}", path.display()))?;
        }
        print(&format!("{}\nStop with Ctrl-C.\n", bench.describe()))?;
        runtime.block_on(asked_to_stop);
        Ok(Exit::Pass)
    }
}
