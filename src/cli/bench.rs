//! `bench`: looks at a bench without testing a board.

mod check;
mod list;
mod place;
mod reference;
mod standard;
mod work;
mod zero;

use super::{Exit, Failure};
use clap::{Args, Subcommand};

#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  ebbmark bench check instruments/benches/first-bench.toml")]
pub(super) struct Arguments {
    #[command(subcommand)]
    command: Command,
}

#[derive(Debug, Subcommand)]
enum Command {
    /// Check each instrument of a bench, and the bench as a whole; the output stays off unless asked for.
    Check(check::Arguments),
    /// Take the zeros of the ammeter with nothing in the fixture.
    Zero(zero::Arguments),
    /// List the instrument definitions that come with the program, and the serial ports of this computer.
    List(list::Arguments),
}

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        match self.command {
            Command::Check(arguments) => arguments.run(),
            Command::Zero(arguments) => arguments.run(),
            Command::List(arguments) => arguments.run(),
        }
    }
}
