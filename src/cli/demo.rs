//! `demo`: two simulated boards, one good and one not, tested over real serial ports.

use super::again::Again;
use super::show::{print, print_result};
use super::simulated::{Simulation, speed};
use super::test::{Keeping, on_simulation};
use super::{Exit, Failure, Format, files};
use crate::report::CAUTIONS;
use crate::sim::Condition;
use crate::sim::bench::Arrangement;
use crate::verdict::Outcome;
use clap::Args;
use std::path::PathBuf;

#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  ebbmark demo

The instruments are simulated and speak SCPI on pseudo-terminals; the program side is what a real bench gets.")]
pub(super) struct Arguments {
    /// Folder of the logs.
    #[arg(long, value_name = "FOLDER", default_value = "logs")]
    logs: PathBuf,
    /// Let simulated time run so many times faster than the clock on the wall.
    #[arg(
        long,
        default_value_t = 1.0,
        value_name = "FACTOR",
        value_parser = speed,
        allow_negative_numbers = true
    )]
    speed: f64,
}

/// The boards shown: serial number, condition, and what they must come out as.
const BOARDS: [(&str, Condition, Outcome); 2] =
    [("RN000001", Condition::Good, Outcome::Pass), ("RN000002", Condition::LeakingSwitch, Outcome::Fail)];

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        let profile = files::river_node()?;
        let keeping = Keeping {
            logs: self.logs,
            station: Some("demo".to_owned()),
            operator: None,
            batch: None,
            work_order: None,
        };
        print(&format!("{CAUTIONS}\nThis bench is simulated; the serial ports and the program are not.\n"))?;
        let mut exit = Exit::Pass;
        for (serial_number, condition, expected) in BOARDS {
            print(&format!("\n{}, {serial_number}: {}\n\n", profile.title, condition.description()))?;
            let simulation = Simulation { condition: vec![condition], seed: None, speed: self.speed };
            let board = keeping.board(&profile, serial_number)?;
            let path = files::RIVER_NODE.0.to_owned();
            let kept = on_simulation(
                &simulation,
                &profile,
                path,
                Arrangement::Separate,
                board,
                &keeping,
                Again::Shown,
            )?;
            let outcome = print_result(&kept, Format::Text, false)?;
            if matches!(outcome, Exit::Aborted | Exit::OutputMayBeOn) {
                return Ok(outcome);
            }
            if kept.run.outcome != expected {
                exit = outcome;
            }
        }
        print(
            "\nTest one yourself: ebbmark test profiles/river-node.toml --bench sim --serial-number RN000123\n",
        )?;
        Ok(exit)
    }
}
