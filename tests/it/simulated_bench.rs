//! Instruments on pseudo-terminals, spoken to as any program would: over a serial port, in SCPI.

#![expect(clippy::expect_used, reason = "a test fails by panicking")]

use ebbmark::clock::Clock;
use ebbmark::profile::Profile;
use ebbmark::sim::bench::{Arrangement, Options, SimulatedBench};
use ebbmark::sim::device::{Kind, ScpiError};
use ebbmark::sim::link_faults::{Effect, Lasting, LinkFault, When};
use ebbmark::sim::terminal::Pace;
use ebbmark::sim::{Condition, Setup};
use serialport::SerialPort;
use std::io::{ErrorKind, Read, Write};
use std::path::Path;
use std::time::Duration;

/// Simulated seconds in a second of the wall.
const SPEED: f64 = 50.0;

/// Far longer than any reply takes, so that only a reply that never comes runs into it.
const PATIENCE: Duration = Duration::from_secs(5);

/// Far longer than any reply takes, and far shorter than a late one.
const IMPATIENCE: Duration = Duration::from_millis(40);

/// How late a late reply is, on the wall.
const LATE: Duration = Duration::from_millis(300);

pub(crate) fn setup() -> Setup {
    let text = include_str!("../../profiles/river-node.toml");
    let profile = Profile::read("river-node.toml", text).expect("a sound profile");
    Setup::new(&profile, Condition::Good, 1)
}

fn options() -> Options {
    Options { clock: Clock::faster(SPEED), ..Options::default() }
}

fn start() -> SimulatedBench {
    SimulatedBench::start(&setup(), options()).expect("pseudo-terminals")
}

/// A program at the other end of the line.
struct Client {
    port: Box<dyn SerialPort>,
    received: Vec<u8>,
}

impl Client {
    fn open(port: &Path) -> Self {
        let port = serialport::new(port.to_string_lossy(), 9600).timeout(PATIENCE).open().expect("a port");
        Self { port, received: Vec::new() }
    }

    fn of(bench: &SimulatedBench, kind: Kind) -> Self {
        Self::open(bench.port(kind).expect("on this bench"))
    }

    fn tell(&mut self, line: &str) {
        self.port.write_all(format!("{line}\n").as_bytes()).expect("a port that takes bytes");
    }

    /// One line with its terminator, or what kept it from coming.
    fn hear(&mut self, patience: Duration) -> Result<String, ErrorKind> {
        self.port.set_timeout(patience).expect("a timeout");
        loop {
            if let Some(end) = self.received.iter().position(|byte| *byte == b'\n') {
                let line: Vec<u8> = self.received.drain(..=end).collect();
                return Ok(String::from_utf8_lossy(&line).into_owned());
            }
            self.receive()?;
        }
    }

    /// Takes what is there, or the first that comes.
    fn receive(&mut self) -> Result<(), ErrorKind> {
        let mut buffer = [0; 64];
        let count = self.port.read(&mut buffer).map_err(|error| error.kind())?;
        self.received.extend(&buffer[..count]);
        Ok(())
    }

    fn ask(&mut self, line: &str) -> String {
        self.tell(line);
        self.hear(PATIENCE).expect("a reply").trim_end().to_owned()
    }

    fn number(&mut self, line: &str) -> f64 {
        self.ask(line).parse().expect("a number")
    }
}

fn befall(bench: &SimulatedBench, instrument: Kind, text: &str, effect: Effect) {
    let when = When::Containing(text.to_owned());
    bench.inject(LinkFault { instrument, when, lasting: Lasting::Once, effect });
}

/// Returns when an instrument has dealt with this many messages more.
fn await_exchanges(bench: &SimulatedBench, kind: Kind, wanted: usize) {
    let mut seen = 0;
    while seen < wanted {
        std::thread::sleep(Duration::from_millis(1));
        seen += bench.take_exchanges(kind).len();
    }
}

#[test]
fn a_supply_is_set_and_read_back_and_the_meters_see_its_board() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    assert_eq!(supply.ask("*IDN?").split(',').count(), 4);
    supply.tell("VOLT 7.6");
    supply.tell("CURR 0.35;:OUTP ON");
    assert_eq!(supply.ask("VOLT?;CURR?;:OUTP?"), "+7.6000000E+00;+3.5000000E-01;1");
    assert!(bench.output());

    let mut voltmeter = Client::of(&bench, Kind::Voltmeter);
    let mut load_voltmeter = Client::of(&bench, Kind::LoadVoltmeter);
    let mut ammeter = Client::of(&bench, Kind::Ammeter);
    ammeter.tell("CONF:CURR 1");
    bench.world().pass(Duration::from_secs(1));
    let (volts, load) = (voltmeter.number("READ?"), load_voltmeter.number("READ?"));
    let amps = ammeter.number("READ?");
    assert!((volts - 7.6).abs() < 0.1, "terminals {volts} V");
    assert!((load - volts).abs() < 0.1, "load {load} V");
    assert!((amps * 55.0 - load).abs() < 0.02 * load, "{amps} A");
    assert_eq!(ammeter.ask("SYST:ERR?"), "0,\"No error\"");
}

#[test]
fn a_current_above_the_range_reads_as_infinity() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    supply.ask("VOLT 7.6;:OUTP ON;*OPC?");
    bench.world().pass(Duration::from_secs(1));
    let mut ammeter = Client::of(&bench, Kind::Ammeter);
    ammeter.tell("CONF:CURR 1E-3");
    assert_eq!(ammeter.ask("READ?"), "+9.9000000E+37");
}

#[test]
fn a_value_out_of_range_leaves_the_old_one_and_an_error() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    supply.tell("VOLT 5");
    supply.tell("VOLT 5000");
    assert_eq!(supply.ask("VOLT?"), "+5.0000000E+00");
    assert_eq!(supply.ask("SYST:ERR?"), "-222,\"Data out of range\"");
    supply.tell(&"X".repeat(300));
    assert_eq!(supply.ask("SYST:ERR?"), "-363,\"Input buffer overrun\"");
}

#[test]
fn a_lost_reply_never_comes_although_the_message_was_obeyed() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    befall(&bench, Kind::Supply, "VOLT?", Effect::NoReply);
    supply.tell("VOLT 5;VOLT?");
    assert_eq!(supply.hear(IMPATIENCE), Err(ErrorKind::TimedOut));
    assert_eq!(supply.ask("VOLT?"), "+5.0000000E+00");
}

#[test]
fn a_late_reply_answers_the_next_question_of_a_careless_client() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    befall(&bench, Kind::Supply, "VOLT?", Effect::LateReply(LATE.mul_f64(SPEED)));
    supply.tell("VOLT?");
    assert_eq!(supply.hear(IMPATIENCE), Err(ErrorKind::TimedOut));
    assert_eq!(supply.ask("*ESR?"), "+0.0000000E+00");
    assert_eq!(supply.hear(PATIENCE).as_deref(), Ok("128\n"));
}

#[test]
fn a_cut_reply_comes_in_two_parts() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    befall(&bench, Kind::Supply, "VOLT?", Effect::CutReply(LATE.mul_f64(SPEED)));
    supply.tell("VOLT?");
    supply.receive().expect("half a reply");
    assert_eq!(supply.received, b"+0.0000");
    assert_eq!(supply.hear(IMPATIENCE), Err(ErrorKind::TimedOut));
    assert_eq!(supply.hear(PATIENCE).as_deref(), Ok("+0.0000000E+00\n"));
}

#[test]
fn garbage_comes_in_place_of_a_reply() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    befall(&bench, Kind::Supply, "VOLT?", Effect::Garbage(b"\xff\x00+6.0\n".to_vec()));
    assert_eq!(supply.ask("VOLT?"), "\u{fffd}\0+6.0");
    assert_eq!(supply.ask("VOLT?"), "+0.0000000E+00");
}

#[test]
fn an_echo_comes_before_every_reply() {
    let fault = LinkFault {
        instrument: Kind::Supply,
        when: When::Message(1),
        lasting: Lasting::Always,
        effect: Effect::Echo,
    };
    let bench =
        SimulatedBench::start(&setup(), Options { faults: vec![fault], ..options() }).expect("a bench");
    let mut supply = Client::of(&bench, Kind::Supply);
    assert_eq!(supply.ask("VOLT 5"), "VOLT 5");
    assert_eq!(supply.ask("VOLT?"), "VOLT?");
    assert_eq!(supply.hear(PATIENCE).as_deref(), Ok("+5.0000000E+00\n"));
}

#[test]
fn a_swallowed_message_sets_nothing_and_queues_nothing() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    befall(&bench, Kind::Supply, "VOLT 6", Effect::Swallow);
    supply.tell("VOLT 5");
    supply.tell("VOLT 6");
    assert_eq!(supply.ask("VOLT?;:SYST:ERR?"), "+5.0000000E+00;0,\"No error\"");
}

#[test]
fn a_refused_message_sets_nothing_and_queues_its_error() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    befall(&bench, Kind::Supply, "OUTP ON", Effect::Refuse(ScpiError::SETTINGS_CONFLICT));
    supply.tell("OUTP ON");
    assert_eq!(supply.ask("OUTP?;:SYST:ERR?"), "0;-221,\"Settings conflict\"");
}

#[test]
fn an_instrument_that_restarts_forgets_the_message_and_its_settings() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    supply.tell("VOLT 7.6;:OUTP ON;*CLS");
    assert_eq!(supply.ask("*ESR?"), "0");
    assert!(bench.output());
    befall(&bench, Kind::Supply, "VOLT?", Effect::Restart(Duration::from_millis(100)));
    bench.take_exchanges(Kind::Supply);
    supply.tell("VOLT?");
    await_exchanges(&bench, Kind::Supply, 1);
    assert!(!bench.output());
    assert_eq!(supply.hear(IMPATIENCE), Err(ErrorKind::TimedOut));
    assert_eq!(supply.ask("*ESR?;VOLT?"), "128;+0.0000000E+00");

    supply.ask("OUTP ON;*OPC?");
    bench.restart(Kind::Supply);
    assert!(!bench.output());
    assert_eq!(supply.ask("*ESR?"), "128");
}

#[test]
fn a_port_that_hangs_up_is_gone_and_the_output_stays_as_it_was() {
    let mut bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    supply.ask("VOLT 5;:OUTP ON;*OPC?");
    befall(&bench, Kind::Supply, "VOLT?", Effect::HangUp);
    supply.tell("VOLT?");
    assert_eq!(supply.hear(PATIENCE), Err(ErrorKind::BrokenPipe));
    assert!(bench.output());
    assert!(!bench.port(Kind::Supply).expect("a name").exists());

    let mut ammeter = Client::of(&bench, Kind::Ammeter);
    ammeter.ask("*OPC?");
    bench.hang_up(Kind::Ammeter);
    assert_eq!(ammeter.hear(PATIENCE), Err(ErrorKind::BrokenPipe));
}

#[test]
fn an_instrument_can_turn_out_to_be_another_one() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    befall(&bench, Kind::Supply, "*IDN?", Effect::Identity("OTHER,METER,2,3".to_owned()));
    assert_eq!(supply.ask("*IDN?"), "OTHER,METER,2,3");
    assert_eq!(supply.ask("*IDN?"), "OTHER,METER,2,3");
}

#[test]
fn the_true_output_can_be_seen_after_the_client_has_gone() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    supply.ask("OUTP ON;*OPC?");
    drop(supply);
    assert!(bench.output());
    Client::of(&bench, Kind::Supply).ask("OUTP OFF;*OPC?");
    assert!(!bench.output());
}

#[test]
fn a_source_measure_unit_plays_three_roles_on_one_port() {
    let arrangement = Arrangement::SourceMeasureUnit;
    let bench = SimulatedBench::start(&setup(), Options { arrangement, ..options() }).expect("a bench");
    assert_eq!(bench.port(Kind::Supply), None);
    let mut unit = Client::of(&bench, Kind::SourceMeasureUnit);
    unit.tell("SENS:CURR:RANG 1E-5");
    assert_eq!(unit.ask("SENS:CURR:RANG?"), "+1.0000000E-05");
    unit.ask("VOLT 7.6;:SENS:CURR:RANG 1;:OUTP ON;*OPC?");
    bench.world().pass(Duration::from_secs(1));
    assert!((unit.number("MEAS:VOLT?") - 7.6).abs() < 0.1);
    assert!((unit.number("MEAS:CURR?") - 7.6 / 55.0).abs() < 0.01);
    assert!((Client::of(&bench, Kind::LoadVoltmeter).number("READ?") - 7.6).abs() < 0.1);
}

#[test]
fn the_time_an_instrument_took_is_on_record() {
    let pace = Pace { response: Duration::from_millis(50), baud: Some(9600) };
    let bench = SimulatedBench::start(&setup(), Options { pace, ..options() }).expect("a bench");
    let mut ammeter = Client::of(&bench, Kind::Ammeter);
    ammeter.tell("CONF:CURR 1");
    ammeter.ask("READ?");
    let exchanges = bench.take_exchanges(Kind::Ammeter);
    assert_eq!(exchanges.iter().map(|exchange| exchange.replied).collect::<Vec<_>>(), [false, true]);
    // 6 characters there and 15 back at 9600 baud, the response and one line cycle.
    let expected = Duration::from_millis(50 + 20) + Duration::from_secs(1) * 210 / 9600;
    let took = exchanges[1].until - exchanges[1].from;
    assert!(took >= expected, "{took:?} < {expected:?}");
    assert_eq!(bench.take_exchanges(Kind::Ammeter), []);
}

/// IEEE 488.2, 6.3.1.7: what nobody fetches is thrown away, and the device goes on.
#[test]
fn a_client_that_never_reads_does_not_hold_the_instrument_up() {
    let bench = start();
    let mut supply = Client::of(&bench, Kind::Supply);
    for _ in 0..300 {
        supply.tell("VOLT?");
    }
    await_exchanges(&bench, Kind::Supply, 300);
    supply.port.clear(serialport::ClearBuffer::Input).expect("a buffer to clear");
    assert_eq!(supply.ask("SYST:ERR?"), "-430,\"Query DEADLOCKED\"");
}

#[test]
fn a_bench_takes_its_ports_with_it_and_another_can_take_their_names() {
    let directory = tempfile::tempdir().expect("a directory");
    let named = || Options { directory: Some(directory.path().to_owned()), ..options() };
    let bench = SimulatedBench::start(&setup(), named()).expect("a bench");
    let port = bench.port(Kind::Supply).expect("a port").to_owned();
    let error = SimulatedBench::start(&setup(), named()).err().expect("names taken");
    assert_eq!(error.kind(), ErrorKind::AlreadyExists);
    assert!(error.to_string().contains("supply"), "{error}");
    assert!(Client::open(&port).ask("*IDN?").contains("SUPPLY"), "the first bench lives on");
    drop(bench);
    assert!(!port.exists());
    let bench = SimulatedBench::start(&setup(), named()).expect("the same names again");
    assert_eq!(bench.port(Kind::Supply), Some(port.as_path()));
}

#[test]
fn the_bench_file_names_every_port_and_who_answers_there() {
    let bench = start();
    let file: toml::Table = bench.bench_file().parse().expect("TOML");
    assert_eq!(file["schema"].as_integer(), Some(1));
    let instruments = file["instrument"].as_array().expect("instruments");
    assert_eq!(instruments.len(), 4);
    for instrument in instruments {
        let port = instrument["port"].as_str().expect("a port");
        let reply = Client::open(Path::new(port)).ask("*IDN?");
        let fields = ["maker", "model", "serial"].map(|key| instrument["identity"][key].as_str());
        assert_eq!(reply.split(',').take(3).map(Some).collect::<Vec<_>>(), fields);
        assert!(bench.describe().contains(port));
    }
}

#[test]
fn the_shell_line_of_the_description_works() {
    let bench = start();
    let description = bench.describe();
    let line = description.lines().find(|line| line.trim().starts_with("exec")).expect("a line for a shell");
    let output = std::process::Command::new("sh").args(["-c", line]).output().expect("a shell");
    assert_eq!(String::from_utf8_lossy(&output.stdout), Client::of(&bench, Kind::Supply).ask("*IDN?") + "\n");
}
