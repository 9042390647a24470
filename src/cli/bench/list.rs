//! `bench list`: what comes with the program, and the ports there are.

use crate::cli::show::print;
use crate::cli::{Exit, Failure};
use crate::instrument::definition::{Definition, Role, builtin_names};
use crate::instrument::library;
use crate::instrument::serial_port::ports_present;
use clap::Args;
use std::fmt::Write;
use std::path::Path;

#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  ebbmark bench list")]
pub(super) struct Arguments {}

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
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
