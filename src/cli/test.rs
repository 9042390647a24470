//! `test`: one board on a bench, from scan to kept record.

use super::again::Again;
use super::one_run::{Kept, Order};
use super::show::print_result;
use super::simulated::{Simulation, bench_file};
use super::station::Station;
use super::{Exit, Failure, Format, files, room::room};
use crate::clock::Clock;
use crate::profile::Profile;
use crate::record::BoardUnderTest;
use crate::report::CAUTIONS;
use crate::sim::bench::Arrangement;
use crate::units::Celsius;
use clap::Args;
use std::io::IsTerminal;
use std::path::{Path, PathBuf};

#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  ebbmark test profiles/river-node.toml --bench sim --serial-number RN000123

A search begins where the newest boards that passed at this station had their thresholds. That saves time and
changes no result: a board unlike them takes some set-points more.

The exit code is the outcome: 0 pass, 1 fail, 3 invalid, 4 aborted, 5 the output may still be on.
Standard output stays empty when no run began; standard error says why.")]
pub(super) struct Arguments {
    /// Profile of the board.
    profile: PathBuf,
    /// Bench file, or `sim` for a simulated bench, or `sim-smu` for one with a source-measure unit.
    #[arg(long, value_name = "FILE|sim|sim-smu")]
    bench: PathBuf,
    /// Serial number, as scanned.
    #[arg(long, value_name = "NUMBER")]
    serial_number: String,
    /// How the result is written to standard output.
    #[arg(long, value_enum, default_value_t)]
    format: Format,
    /// Temperature of the room, such as "24 degC"; as the bench file says when left out.
    #[arg(long, value_name = "TEMPERATURE", value_parser = room)]
    temperature: Option<Celsius>,
    /// Add the uncertainty budget of every quantity to the text; JSON always has it.
    #[arg(long)]
    budget: bool,
    /// Test a board that has passed already, without asking; the record names the run in which it did.
    #[arg(long)]
    again: bool,
    #[command(flatten)]
    keeping: Keeping,
    #[command(flatten)]
    simulation: Simulation,
}

/// What goes into the record, and where that goes.
#[derive(Debug, Args)]
pub(super) struct Keeping {
    /// Folder of the logs.
    #[arg(long, value_name = "FOLDER", default_value = "logs")]
    pub(super) logs: PathBuf,
    /// Where the bench stands; the name of the bench when left out.
    #[arg(long, value_name = "NAME")]
    pub(super) station: Option<String>,
    /// Who tests.
    #[arg(long, value_name = "NAME")]
    pub(super) operator: Option<String>,
    /// Batch the board came from.
    #[arg(long, value_name = "NAME")]
    pub(super) batch: Option<String>,
    /// Order it is built under.
    #[arg(long, value_name = "NAME")]
    pub(super) work_order: Option<String>,
}

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        let kept = match arrangement(&self.bench) {
            Some(arrangement) => self.on_simulation(arrangement)?,
            None => self.on_bench()?,
        };
        print_result(&kept, self.format, self.budget)
    }

    /// The station comes before profile and board: what an earlier run left on goes off even when this one is refused.
    fn on_bench(&self) -> Result<Kept, Failure> {
        self.simulation.refuse_on_real_bench()?;
        let mut bench = files::bench(&self.bench)?;
        if let Some(room) = self.temperature {
            bench.set_room(room);
        }
        let name = self.keeping.station.as_deref().unwrap_or(&bench.name);
        let station = Station::open(&bench, Clock::real(), &self.keeping.logs, name)?;
        let profile = files::profile(&self.profile)?;
        let board = self.keeping.board(&profile, &self.serial_number)?;
        if self.format == Format::Text && std::io::stderr().is_terminal() {
            anstream::eprintln!("{CAUTIONS}");
        }
        Order {
            profile: &profile,
            profile_path: self.profile.display().to_string(),
            simulated: None,
            board,
            operator: self.keeping.operator.clone(),
            fixture: None,
            again: self.again(),
            is_reference: false,
        }
        .carry_out(station)
    }

    fn again(&self) -> Again {
        if self.again { Again::Wanted } else { Again::Ask }
    }

    fn on_simulation(&self, arrangement: Arrangement) -> Result<Kept, Failure> {
        if self.temperature.is_some() {
            let error = "--temperature goes with a real bench; simulated instruments stand in a room they are stated for";
            return Err(anyhow::anyhow!(error).into());
        }
        let profile = files::profile(&self.profile)?;
        let path = self.profile.display().to_string();
        let board = self.keeping.board(&profile, &self.serial_number)?;
        on_simulation(&self.simulation, &profile, path, arrangement, board, &self.keeping, self.again())
    }
}

/// Tests one simulated board over pseudo-terminals.
pub(super) fn on_simulation(
    simulation: &Simulation,
    profile: &Profile,
    profile_path: String,
    arrangement: Arrangement,
    board: BoardUnderTest,
    keeping: &Keeping,
    again: Again,
) -> Result<Kept, Failure> {
    let simulated = simulation.of_board(&board.serial_number);
    let instruments = simulation.start(profile, &simulated, arrangement)?;
    let bench = bench_file(&instruments)?;
    let name = keeping.station.as_deref().unwrap_or("simulated");
    let station = Station::open(&bench, simulation.clock(), &keeping.logs, name)?;
    let operator = keeping.operator.clone();
    let simulated = Some(simulated);
    let fixture = Some(instruments.world().with(|world| world.temperature()));
    Order { profile, profile_path, simulated, board, operator, fixture, again, is_reference: false }
        .carry_out(station)
}

impl Keeping {
    /// The board's identity; its serial number must be one of the profile's.
    pub(super) fn board(&self, profile: &Profile, serial_number: &str) -> Result<BoardUnderTest, Failure> {
        if !profile.matches(serial_number) {
            let error = anyhow::anyhow!(
                "serial number \"{serial_number}\" is none of board {}: wanted one like {}; \
                 scan again, or choose the profile of this board",
                profile.board,
                profile.serial_numbers()
            );
            return Err(error.into());
        }
        Ok(BoardUnderTest {
            board: profile.board.clone(),
            revision: profile.revision.clone(),
            serial_number: serial_number.to_owned(),
            batch: self.batch.clone(),
            work_order: self.work_order.clone(),
        })
    }
}

/// Which simulated bench is named, if one is.
pub(super) fn arrangement(bench: &Path) -> Option<Arrangement> {
    match bench.to_str() {
        Some("sim") => Some(Arrangement::Separate),
        Some("sim-smu") => Some(Arrangement::SourceMeasureUnit),
        _ => None,
    }
}
