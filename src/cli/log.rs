//! `log`: what has been tested.

use super::show::{paint, print};
use super::{Exit, Failure};
use crate::record::{LogFolder, Run};
use crate::report::{self, Filter};
use anyhow::Context;
use clap::{Args, Subcommand, ValueEnum};
use std::path::PathBuf;

#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  ebbmark log show --last 5")]
pub(super) struct Arguments {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Show the runs of a station, or one run in full.
    Show(Show),
}

#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  ebbmark log show --serial-number RN000123 --last 5")]
struct Show {
    /// Name of one run, to show it in full.
    run: Option<String>,
    /// Folder of the logs.
    #[arg(long, value_name = "FOLDER", default_value = "logs")]
    logs: PathBuf,
    /// Station; may be left out when there is only one.
    #[arg(long, value_name = "NAME")]
    station: Option<String>,
    /// Only runs of this board.
    #[arg(long, value_name = "NUMBER")]
    serial_number: Option<String>,
    /// Only the latest so many.
    #[arg(long, value_name = "COUNT")]
    last: Option<usize>,
    /// How it is written to standard output.
    #[arg(long, value_enum, default_value_t)]
    format: Layout,
}

/// How runs are written.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
enum Layout {
    /// For people.
    #[default]
    Text,
    /// For programs: one JSON object a run.
    Json,
    /// For spreadsheets: a line a run.
    Csv,
}

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        let Command::Show(show) = self.command;
        show.run()
    }
}

impl Show {
    fn run(self) -> Result<Exit, Failure> {
        let folder = LogFolder::new(&self.logs, &self.station()?)?;
        if let Some(name) = &self.run {
            return write(&[folder.run(name)?], self.format, |run| report::full(run, folder.path(), paint()));
        }
        let runs = folder.runs()?;
        let filter = Filter { serial_number: self.serial_number, last: self.last };
        let mut unreadable = Vec::new();
        let found = filter.apply(runs.filter_map(|run| run.map_err(|error| unreadable.push(error)).ok()));
        for error in unreadable {
            anstream::eprintln!("note: {error}");
        }
        match self.format {
            Layout::Text => print(&report::list(&found))?,
            other => return write(&found, other, report::run_json),
        }
        Ok(Exit::Pass)
    }

    /// The station named, or the only one there is.
    fn station(&self) -> Result<String, Failure> {
        if let Some(station) = &self.station {
            return Ok(station.clone());
        }
        let entries = std::fs::read_dir(&self.logs)
            .with_context(|| format!("cannot read the folder of logs {}", self.logs.display()))?;
        let mut stations: Vec<String> = entries
            .filter_map(|entry| entry.ok().filter(|entry| entry.path().is_dir()))
            .map(|entry| entry.file_name().to_string_lossy().into_owned())
            .collect();
        stations.sort();
        match stations.as_slice() {
            [only] => Ok(only.clone()),
            [] => Err(anyhow::anyhow!("{} holds no logs; test a board first", self.logs.display()).into()),
            several => Err(anyhow::anyhow!(
                "{} holds several stations; choose one with --station: {}",
                self.logs.display(),
                several.join(", ")
            )
            .into()),
        }
    }
}

fn write(runs: &[Run], layout: Layout, text: impl Fn(&Run) -> String) -> Result<Exit, Failure> {
    let written = match layout {
        Layout::Text => runs.iter().map(text).collect(),
        Layout::Json => report::runs_json(runs) + "\n",
        Layout::Csv => {
            let mut bytes = Vec::new();
            report::runs_csv(runs, &mut bytes)?;
            String::from_utf8(bytes)?
        }
    };
    print(&written)?;
    Ok(Exit::Pass)
}
