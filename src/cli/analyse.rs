//! `analyse`: judges traces made elsewhere.

use super::show::print_sheet;
use super::{Exit, Failure, Format, files};
use crate::analysis::{analyse, from_rates};
use crate::report::Sheet;
use crate::trace::{Ending, OutputState, Stop, Trace, csv};
use crate::verdict::judge;
use clap::Args;
use std::path::PathBuf;

#[derive(Debug, Args)]
#[command(after_help = "\
A trace is CSV with the header time_s,set_v,sense_v,current_a and, where known, load_v, range_a
and limit. Several traces are continuous ramps of one board at different rates: together they
give its thresholds at zero rate and its delays.

Example:
  ebbmark analyse trace.csv --profile profiles/river-node.toml")]
pub(super) struct Arguments {
    /// One trace, or several ramps of one board at different rates.
    #[arg(required = true, value_name = "TRACE.csv")]
    traces: Vec<PathBuf>,
    /// Profile of the board.
    #[arg(long, value_name = "FILE")]
    profile: PathBuf,
    /// Serial number, where it is known.
    #[arg(long, value_name = "NUMBER")]
    serial_number: Option<String>,
    /// How the result is written to standard output.
    #[arg(long, value_enum, default_value_t)]
    format: Format,
    /// Add the uncertainty budget of every quantity to the text; JSON always has it.
    #[arg(long)]
    budget: bool,
}

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        let profile = files::profile(&self.profile)?;
        let read = |path: &PathBuf| -> Result<Trace, Failure> {
            Ok(csv::read(&path.display().to_string(), &files::text(path)?)?)
        };
        let traces = self.traces.iter().map(read).collect::<Result<Vec<_>, _>>()?;
        let analysis = match traces.as_slice() {
            [trace] => analyse(trace, &profile),
            several => from_rates(several, &profile),
        };
        // A file says nothing of an output; nothing of ours was switched on.
        let ending = Ending { stop: Stop::Completed, output: OutputState::Off };
        let verdict = judge(&analysis, &profile, &ending);
        let sheet = Sheet::of_trace(&profile, self.serial_number.as_deref(), &verdict, ending.output);
        print_sheet(&sheet, self.format, self.budget)?;
        Ok(Exit::of_run(verdict.outcome, &ending))
    }
}
