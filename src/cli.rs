//! The command line: one file a command, each arguments and the glue to the rooms.

mod again;
mod analyse;
mod ask;
mod bench;
mod characterise;
mod demo;
mod due;
mod earlier;
mod exit;
mod files;
mod guard;
mod left_on;
mod limits;
mod live;
mod log;
mod one_run;
mod ratio;
mod room;
mod show;
mod sim;
mod simulated;
mod station;
mod stop;
mod test;
mod who;

pub use exit::{Exit, Failure};

use crate::report::OUTPUT_MAY_BE_ON;
use clap::{Parser, Subcommand, ValueEnum};
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::process::ExitCode;

/// Tests boards with an undervoltage cut-off: drives a programmable supply down and back up over serial SCPI, finds
/// trip, re-enable, hysteresis and off current with their uncertainty, judges them, and keeps the record.
#[derive(Debug, Parser)]
#[command(version, max_term_width = 100, after_help = AFTER_HELP)]
pub struct Cli {
    /// Write what passes over the wire to standard error.
    #[arg(short, long, global = true)]
    verbose: bool,
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Watch two simulated boards being tested over real serial ports.
    Demo(demo::Arguments),
    /// Test one board.
    Test(test::Arguments),
    /// Cycle a few boards many times: thresholds, jitter, drift, temperature, delays, limits that follow.
    Characterise(characterise::Arguments),
    /// Judge a trace (CSV) made elsewhere.
    Analyse(analyse::Arguments),
    /// Look at a bench: check its instruments, list what is known.
    Bench(bench::Arguments),
    /// Start a simulated bench and keep it up for other programs.
    Sim(sim::Arguments),
    /// Read the log of tested boards.
    Log(log::Arguments),
    /// Work out limits from the tolerances of a board's parts.
    Limits(limits::Arguments),
}

/// How a result is written to standard output.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
enum Format {
    /// For people.
    #[default]
    Text,
    /// For programs: one JSON object.
    Json,
}

const AFTER_HELP: &str = "\
Example:
  ebbmark demo

Exit codes:
  0  pass, or conditional pass
  1  fail, or conditional fail
  2  usage, profile, definition or file error
  3  invalid: the bench could not judge the board
  4  aborted
  5  the output may still be on";

/// Runs the command of `arguments` and returns the exit code of the process.
pub fn run<T: Into<std::ffi::OsString> + Clone>(arguments: impl IntoIterator<Item = T>) -> ExitCode {
    let cli = match Cli::try_parse_from(arguments) {
        Ok(cli) => cli,
        Err(error) => {
            // clap prints help to standard output and mistakes to standard error; a closed pipe is nobody's fault.
            let _ = error.print();
            return if error.use_stderr() { Exit::Usage } else { Exit::Pass }.into();
        }
    };
    start_diagnostics(cli.verbose);
    let drives_a_supply = matches!(
        cli.command,
        Command::Demo(_) | Command::Test(_) | Command::Characterise(_) | Command::Bench(_)
    );
    match catch_unwind(AssertUnwindSafe(|| cli.command.run())) {
        Ok(Ok(exit)) => exit.into(),
        Ok(Err(failure)) => {
            anstream::eprintln!("{}", headed(&format!("{:#}", failure.error)));
            failure.exit.into()
        }
        Err(_) => after_panic(drives_a_supply).into(),
    }
}

impl Command {
    fn run(self) -> Result<Exit, Failure> {
        match self {
            Command::Demo(arguments) => arguments.run(),
            Command::Test(arguments) => arguments.run(),
            Command::Characterise(arguments) => arguments.run(),
            Command::Analyse(arguments) => arguments.run(),
            Command::Bench(arguments) => arguments.run(),
            Command::Sim(arguments) => arguments.run(),
            Command::Log(arguments) => arguments.run(),
            Command::Limits(arguments) => arguments.run(),
        }
    }
}

/// A message as an error. Those about places in a file have their heading already.
fn headed(message: &str) -> String {
    const HEADING: &str = "error: ";
    if message.starts_with(HEADING) { message.to_owned() } else { format!("{HEADING}{message}") }
}

/// The last resort, for a panic outside the run itself, which has a guard of its own. Unwinding has ended every
/// session, and with it switched off what was on; but nobody is left who could say whether that was confirmed.
fn after_panic(drives_a_supply: bool) -> Exit {
    anstream::eprintln!("error: the program itself failed; please report what stands above");
    if drives_a_supply {
        anstream::eprintln!("{OUTPUT_MAY_BE_ON}");
        return Exit::OutputMayBeOn;
    }
    Exit::Invalid
}

fn start_diagnostics(verbose: bool) {
    let level = if verbose { tracing::Level::TRACE } else { tracing::Level::WARN };
    tracing_subscriber::fmt()
        .with_max_level(level)
        .with_writer(std::io::stderr)
        .without_time()
        .with_target(false)
        .init();
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_program_that_failed_never_looks_like_one_that_did_its_work() {
        assert_eq!(after_panic(true), Exit::OutputMayBeOn);
        assert_eq!(after_panic(false), Exit::Invalid);
    }
}
