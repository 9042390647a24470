//! A whole bench of simulated instruments around one board, each on a pseudo-terminal of its own.
//!
//! Whoever tests over these ports uses the very code that drives a real bench: a bench file names the ports, and
//! nothing but SCPI goes over them. The world behind stays readable, so that a test can see what is really the case.

use super::device::{Device, Kind};
use super::link_faults::{LinkFault, LinkFaults, When};
use super::terminal::{Exchange, Pace, Terminal};
use super::{BoardModel, LoadWiring, PullUp, Setup, SharedWorld, SimulationClock, Switch, World, lock};
use crate::clock::Clock;
use crate::units::{Amps, Farads, Ohms, Siemens};
use std::fmt::Write;
use std::io;
use std::path::{Path, PathBuf};
use std::sync::{Arc, Mutex};
use std::time::Duration;

/// How a simulated bench is set up.
#[derive(Clone, Debug)]
pub struct Options {
    /// Which instruments there are.
    pub arrangement: Arrangement,
    /// Where the ports appear, created if need be; `None` for a fresh directory that goes with the bench.
    pub directory: Option<PathBuf>,
    /// The clock of instruments and board.
    pub clock: Clock,
    /// How fast the instruments and their lines are.
    pub pace: Pace,
    /// What will go wrong.
    pub faults: Vec<LinkFault>,
    /// What is in the fixture.
    pub in_fixture: InFixture,
}

/// What is in the fixture.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub enum InFixture {
    /// The board of the setup.
    #[default]
    Board,
    /// Nothing, but what leaks in any fixture.
    Nothing,
    /// A resistor in the place of the board.
    Resistor(Ohms),
}

/// What leaks in a clean fixture: some gigaohms are common practice for good insulation at moderate humidity.
const CLEAN_FIXTURE: Ohms = Ohms(5e9);

/// What cables and fixture have between their leads.
const CABLE_CAPACITANCE: Farads = Farads(1e-9);

/// Which instruments stand on the bench.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Arrangement {
    /// Supply, ammeter, voltmeter and load voltmeter, each on its port.
    #[default]
    Separate,
    /// A source-measure unit for all at the board's input, in place of the setup's instruments there, and a load
    /// voltmeter.
    SourceMeasureUnit,
}

/// A bench that answers until it is dropped.
pub struct SimulatedBench {
    world: SharedWorld,
    faults: Arc<Mutex<LinkFaults>>,
    terminals: Vec<Terminal>,
    /// Removes the ports' directory, last of all, when nobody named one.
    _directory: Option<tempfile::TempDir>,
}

/// What the bench file says of an instrument, besides its port and identity.
struct Entry {
    name: &'static str,
    definition: &'static str,
    roles: &'static [&'static str],
}

impl Default for Options {
    fn default() -> Self {
        Self {
            arrangement: Arrangement::default(),
            directory: None,
            clock: Clock::real(),
            pace: Pace { response: Duration::from_millis(2), baud: Some(115_200) },
            faults: Vec::new(),
            in_fixture: InFixture::default(),
        }
    }
}

impl SimulatedBench {
    /// Switches on the board and bench of `setup`: output off, every instrument as after power came on.
    ///
    /// # Errors
    /// The directory cannot be used, a port of that name exists already, or the system has no pseudo-terminal for it.
    pub fn start(setup: &Setup, options: Options) -> io::Result<Self> {
        let (path, directory) = match options.directory {
            Some(path) => {
                std::fs::create_dir_all(&path).map_err(|error| about(&path, &error))?;
                (path, None)
            }
            None => {
                let directory = tempfile::Builder::new().prefix("ebbmark-sim-").tempdir()?;
                (directory.path().to_owned(), Some(directory))
            }
        };
        let setup = match options.arrangement {
            Arrangement::Separate => setup.clone(),
            Arrangement::SourceMeasureUnit => setup.with_source_measure_unit(),
        };
        let setup = options.in_fixture.in_place_of_board(setup);
        let world = SharedWorld::new(World::new(&setup), Arc::new(options.clock));
        let own = setup.link_faults.iter().map(|fault| options.arrangement.befalls(fault));
        let faults = Arc::new(Mutex::new(LinkFaults::new(own.chain(options.faults).collect())));
        let mut terminals = Vec::new();
        for kind in options.arrangement.kinds() {
            let device = Device::new(*kind, &setup);
            let port = path.join(Entry::of(*kind).name);
            let terminal = Terminal::start(device, &port, &world, options.pace, faults.clone());
            terminals.push(terminal.map_err(|error| about(&port, &error))?);
        }
        Ok(Self { world, faults, terminals, _directory: directory })
    }

    /// The port of an instrument; `None` when this bench has no such instrument.
    pub fn port(&self, kind: Kind) -> Option<&Path> {
        self.terminal(kind).map(Terminal::port)
    }

    /// The text of a bench file that names these ports.
    pub fn bench_file(&self) -> String {
        let mut text = "schema = 1\nname = \"sim\"\ntitle = \"Simulated bench\"\n".to_owned();
        for terminal in &self.terminals {
            let entry = Entry::of(terminal.kind());
            let quoted = |text: &str| toml::Value::from(text).to_string();
            let roles: Vec<String> = entry.roles.iter().map(|role| quoted(role)).collect();
            let identity: Vec<String> = ["maker", "model", "serial"]
                .iter()
                .zip(terminal.identity().split(','))
                .map(|(key, field)| format!("{key} = {}", quoted(field)))
                .collect();
            // Writing to a string cannot fail.
            let _ = write!(
                text,
                "\n[[instrument]]\nname = {}\ndefinition = {}\nport = {}\nroles = [{}]\nidentity = {{ {} }}\n",
                quoted(entry.name),
                quoted(entry.definition),
                quoted(&terminal.port().to_string_lossy()),
                roles.join(", "),
                identity.join(", "),
            );
        }
        text
    }

    /// Ports, identities, and how to talk to them, for somebody at a shell.
    pub fn describe(&self) -> String {
        let mut text = "Simulated instruments, each on a serial port of its own:\n\n".to_owned();
        for terminal in &self.terminals {
            let entry = Entry::of(terminal.kind());
            let (port, roles) = (terminal.port().display(), entry.roles.join(", "));
            let _ = writeln!(text, "  {port}\n    {}, plays {roles}", terminal.identity());
        }
        if let Some(first) = self.terminals.first() {
            let _ = write!(
                text,
                "\nThey understand SCPI, one message a line. To ask one who it is, in a shell:\n\n  \
                 exec 3<>{}; echo '*IDN?' >&3; head -n 1 <&3\n",
                first.port().display()
            );
        }
        text
    }

    /// The board and bench themselves.
    pub fn world(&self) -> &SharedWorld {
        &self.world
    }

    /// Whether the supply's output is on in truth, whatever anybody was told.
    pub fn output(&self) -> bool {
        self.world.with(|world| world.output())
    }

    /// Adds something that will go wrong.
    pub fn inject(&self, fault: LinkFault) {
        lock(&self.faults).add(fault);
    }

    /// Power fails at an instrument and comes back at once. Does nothing when this bench has no such instrument.
    pub fn restart(&self, kind: Kind) {
        if let Some(terminal) = self.terminal(kind) {
            terminal.restart();
        }
    }

    /// Pulls an instrument's plug out of the computer; the instrument itself goes on as it stands.
    pub fn hang_up(&mut self, kind: Kind) {
        if let Some(terminal) = self.terminals.iter_mut().find(|terminal| terminal.kind() == kind) {
            terminal.hang_up();
        }
    }

    /// Takes the messages an instrument has dealt with since this was last asked, in simulated time, oldest first.
    pub fn take_exchanges(&self, kind: Kind) -> Vec<Exchange> {
        self.terminal(kind).map(Terminal::take_exchanges).unwrap_or_default()
    }

    fn terminal(&self, kind: Kind) -> Option<&Terminal> {
        self.terminals.iter().find(|terminal| terminal.kind() == kind)
    }
}

impl InFixture {
    /// The setup with this in its fixture, across the terminals and nothing behind them: a voltmeter where the load was
    /// touches none of it.
    pub fn in_place_of_board(self, mut setup: Setup) -> Setup {
        let across = match self {
            Self::Board => return setup,
            Self::Nothing => CLEAN_FIXTURE,
            Self::Resistor(resistance) => Ohms(1.0 / (1.0 / resistance.0 + 1.0 / CLEAN_FIXTURE.0)),
        };
        setup.wiring.load = LoadWiring::Lifted;
        setup.board = BoardModel {
            switch: Switch::StuckOpen,
            on_resistance: Ohms::ZERO,
            pull_up: across,
            pull_up_conducts: PullUp::Always,
            divider: Siemens::ZERO,
            detector_current: Amps::ZERO,
            leakage: Amps::ZERO,
            leakage_conductance: Siemens::ZERO,
            input_capacitance: CABLE_CAPACITANCE,
            load_capacitance: CABLE_CAPACITANCE,
            deep_conduction: None,
            ..setup.board
        };
        setup
    }
}

impl Arrangement {
    /// The same fault of the instrument that plays the part here, and of the message that does.
    fn befalls(self, fault: &LinkFault) -> LinkFault {
        let instrument = match (self, fault.instrument) {
            (Self::SourceMeasureUnit, Kind::Supply | Kind::Ammeter | Kind::Voltmeter) => {
                Kind::SourceMeasureUnit
            }
            (_, instrument) => instrument,
        };
        let when = match (instrument, &fault.when) {
            (Kind::SourceMeasureUnit, When::Nth(number, text)) if text == "READ?" => {
                When::Nth(*number, "MEAS:CURR?".to_owned())
            }
            (_, when) => when.clone(),
        };
        LinkFault { instrument, when, ..fault.clone() }
    }

    fn kinds(self) -> &'static [Kind] {
        match self {
            Self::Separate => &[Kind::Supply, Kind::Ammeter, Kind::Voltmeter, Kind::LoadVoltmeter],
            Self::SourceMeasureUnit => &[Kind::SourceMeasureUnit, Kind::LoadVoltmeter],
        }
    }
}

impl Entry {
    fn of(kind: Kind) -> Self {
        let (name, definition, roles): (_, _, &[&str]) = match kind {
            Kind::Supply => ("supply", "programmable-supply", &["source"]),
            Kind::Ammeter => ("ammeter", "bench-meter-current", &["ammeter"]),
            Kind::Voltmeter => ("voltmeter", "bench-meter-voltage", &["voltmeter"]),
            Kind::LoadVoltmeter => ("load_voltmeter", "bench-meter-voltage", &["load_voltmeter"]),
            Kind::SourceMeasureUnit => {
                ("source_measure_unit", "source-measure-unit", &["source", "ammeter", "voltmeter"])
            }
        };
        Self { name, definition, roles }
    }
}

fn about(path: &Path, error: &io::Error) -> io::Error {
    io::Error::new(error.kind(), format!("simulated port {}: {error}", path.display()))
}

impl SimulationClock for Clock {
    fn now(&self) -> Duration {
        Self::now(self)
    }

    fn sleep_until(&self, time: Duration) {
        let left = time.saturating_sub(Self::now(self));
        std::thread::sleep(self.wall(left));
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sim::link_faults::{Effect, Lasting};

    #[test]
    fn what_befalls_a_meter_befalls_the_unit_that_stands_in_its_place() {
        let befallen = |arrangement: Arrangement, instrument| {
            let when = When::Message(1);
            let fault = LinkFault { instrument, when, lasting: Lasting::Once, effect: Effect::NoReply };
            arrangement.befalls(&fault).instrument
        };
        assert_eq!(befallen(Arrangement::Separate, Kind::Ammeter), Kind::Ammeter);
        assert_eq!(befallen(Arrangement::SourceMeasureUnit, Kind::Ammeter), Kind::SourceMeasureUnit);
        assert_eq!(befallen(Arrangement::SourceMeasureUnit, Kind::LoadVoltmeter), Kind::LoadVoltmeter);
    }
}
