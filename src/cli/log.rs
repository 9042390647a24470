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
    /// Name of one run, or an ending of it that no other has, such as 0008: shows that run in full.
    run: Option<String>,
    /// Folder of the logs.
    #[arg(long, value_name = "FOLDER", default_value = "logs")]
    logs: PathBuf,
    /// Only this station.
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
    /// For programs: one JSON object a line, one line a run.
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
        if let Some(name) = &self.run {
            return self.one(name);
        }
        let filter = Filter { serial_number: self.serial_number.clone(), last: self.last };
        let mut all = Vec::new();
        for station in self.stations()? {
            let found = filter.apply(readable(&LogFolder::new(&self.logs, &station)?)?);
            if self.format == Layout::Text {
                print(&format!("station {station}\n{}", report::list(&found)))?;
            } else {
                all.extend(found);
            }
        }
        if self.format == Layout::Text { Ok(Exit::Pass) } else { write(&all, self.format, report::run_json) }
    }

    /// One run in full, by its name or an ending of it that no other run has.
    fn one(&self, name: &str) -> Result<Exit, Failure> {
        let mut found = Vec::new();
        for station in self.stations()? {
            let folder = LogFolder::new(&self.logs, &station)?;
            let matching = readable(&folder)?.filter(|run| run.identity.run.as_str().ends_with(name));
            found.extend(matching.map(|run| (run, folder.path().to_owned())));
        }
        match found.as_slice() {
            [(run, folder)] => {
                write(std::slice::from_ref(run), self.format, |run| report::full(run, folder, paint()))
            }
            [] => Err(anyhow::anyhow!(
                "no run in {} has a name that ends in \"{name}\"; `ebbmark log show` lists them, \
                 `--serial-number` finds the runs of a board",
                self.logs.display()
            )
            .into()),
            several => {
                let names: Vec<&str> = several.iter().map(|(run, _)| run.identity.run.as_str()).collect();
                Err(anyhow::anyhow!(
                    "several runs end in \"{name}\": {}; give more of the name, or `--station`",
                    names.join(", ")
                )
                .into())
            }
        }
    }

    /// The station named, or all there are.
    fn stations(&self) -> Result<Vec<String>, Failure> {
        if let Some(station) = &self.station {
            return Ok(vec![station.clone()]);
        }
        let entries = std::fs::read_dir(&self.logs).with_context(|| {
            let logs = self.logs.display();
            format!("cannot read the folder of logs {logs}; test a board first, or name it with `--logs`")
        })?;
        let mut stations: Vec<String> = entries
            .filter_map(|entry| entry.ok().filter(|entry| entry.path().is_dir()))
            .map(|entry| entry.file_name().to_string_lossy().into_owned())
            .collect();
        stations.sort();
        if stations.is_empty() {
            return Err(anyhow::anyhow!("{} holds no logs; test a board first", self.logs.display()).into());
        }
        Ok(stations)
    }
}

/// The runs of a log; what cannot be read is said and left out.
fn readable(folder: &LogFolder) -> Result<impl Iterator<Item = Run>, Failure> {
    let told = |error| anstream::eprintln!("note: {error}");
    Ok(folder.runs()?.filter_map(move |run| run.map_err(told).ok()))
}

fn write(runs: &[Run], layout: Layout, text: impl Fn(&Run) -> String) -> Result<Exit, Failure> {
    let written = match layout {
        Layout::Text => runs.iter().map(text).collect(),
        Layout::Json => report::runs_json(runs),
        Layout::Csv => {
            let mut bytes = Vec::new();
            report::runs_csv(runs, &mut bytes)?;
            String::from_utf8(bytes)?
        }
    };
    print(&written)?;
    Ok(Exit::Pass)
}
