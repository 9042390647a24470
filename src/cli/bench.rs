//! `bench`: looks at a bench without running a board.

use super::show::print;
use super::{Exit, Failure, files};
use crate::bench::serial::{Report, check};
use crate::clock::Clock;
use crate::instrument::definition::{Definition, Role, builtin_names};
use crate::instrument::library;
use crate::instrument::serial_port::ports_present;
use crate::report::OUTPUT_MAY_BE_ON;
use crate::units::Volts;
use clap::{Args, Subcommand};
use std::fmt::Write;
use std::path::{Path, PathBuf};

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
    /// Connect each instrument of a bench and report on it; the output stays off.
    Check(Check),
    /// List the instrument definitions that come with the program, and the serial ports of this computer.
    List(List),
}

#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  ebbmark bench check instruments/benches/first-bench.toml")]
struct Check {
    /// Bench file.
    bench: PathBuf,
}

#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  ebbmark bench list")]
struct List {}

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        match self.command {
            Command::Check(arguments) => arguments.run(),
            Command::List(List {}) => list(),
        }
    }
}

impl Check {
    fn run(self) -> Result<Exit, Failure> {
        let bench = files::bench(&self.bench)?;
        let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
        // Voltmeters are put on their lowest range: nothing is switched on.
        let reports = runtime.block_on(check(&bench, Volts::ZERO, Clock::real()));
        let today = crate::record::now();
        let mut page = String::new();
        let mut exit = Exit::Pass;
        for (seat, report) in bench.instruments().iter().zip(&reports) {
            let roles: Vec<&str> = seat.roles.iter().map(|role| role.key()).collect();
            let _ = writeln!(page, "{} ({}) on {}", seat.name, roles.join(", "), seat.port);
            match report {
                Ok(report) => page.push_str(&found(report)),
                Err(error) => {
                    if exit != Exit::OutputMayBeOn {
                        exit = if bench.stays_on(error) { Exit::OutputMayBeOn } else { Exit::Invalid };
                    }
                    let _ = writeln!(page, "  NOT READY     {error}");
                }
            }
            if let Some(due) = seat.calibration_due {
                let overdue = if seat.overdue(today.date()).is_some() { "  OVERDUE" } else { "" };
                let _ = writeln!(page, "  calibration   due {due}{overdue}");
            }
        }
        let _ = writeln!(
            page,
            "{}",
            if exit == Exit::Pass { "The bench is ready." } else { "The bench is not ready." }
        );
        print(&page)?;
        if exit == Exit::OutputMayBeOn {
            anstream::eprintln!("{OUTPUT_MAY_BE_ON}");
        }
        Ok(exit)
    }
}

fn found(report: &Report) -> String {
    let greeting = &report.greeting;
    let mut lines = format!(
        "  identity      {}\n  round trip    {:.1} ms\n",
        greeting.identity,
        report.round_trip.as_secs_f64() * 1e3
    );
    for error in &greeting.old_errors {
        let _ = writeln!(lines, "  left in queue {error}");
    }
    if let Some(settings) = &report.port_settings {
        let _ = writeln!(lines, "  port          {settings}");
    }
    lines
}

fn list() -> Result<Exit, Failure> {
    let mut page = "Instrument definitions that come with the program:\n".to_owned();
    for name in builtin_names() {
        let definition = library::find(name, Path::new("."))?;
        page.push_str(&described(&definition));
    }
    page.push_str("\nSimulated benches: sim (supply and meters), sim-smu (source-measure unit)\n");
    let ports = ports_present();
    let _ = if ports.is_empty() {
        writeln!(page, "\nSerial ports of this computer: none found")
    } else {
        writeln!(page, "\nSerial ports of this computer:\n  {}", ports.join("\n  "))
    };
    print(&page)?;
    Ok(Exit::Pass)
}

fn described(definition: &Definition) -> String {
    let roles: Vec<&str> = definition.roles.iter().map(|role: &Role| role.key()).collect();
    let mut lines =
        format!("\n  {}\n    {}\n    can be: {}\n", definition.name, definition.title, roles.join(", "));
    for cannot in &definition.cannot {
        let _ = writeln!(lines, "    cannot {cannot}");
    }
    lines
}
