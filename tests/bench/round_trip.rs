//! What one question through an instrument's session costs more than a bare loop over `serialport`.
//!
//! Both ask the same instrument, which answers at once, over pseudo-terminals; their blocks take turns, so that
//! whatever else the machine does strikes both alike.

#![expect(clippy::print_stdout, reason = "a benchmark prints its figures")]

mod figures;

use ebbmark::clock::Clock;
use ebbmark::instrument::definition::{Definition, builtin};
use ebbmark::instrument::error::Place;
use ebbmark::instrument::port::Instrument;
use ebbmark::instrument::serial_port;
use ebbmark::instrument::session::Session;
use figures::{conclude, quantile};
use rustix::pty::{OpenptFlags, grantpt, openpt, ptsname, unlockpt};
use rustix::termios::{OptionalActions, tcgetattr, tcsetattr};
use serialport::SerialPort;
use std::error::Error;
use std::fs::{File, OpenOptions};
use std::io::{Read, Write};
use std::process::ExitCode;
use std::sync::Arc;
use std::time::Duration;

/// The most a round trip may take longer in the middle, in microseconds.
const BAR: f64 = 35.0;

/// Round trips on each path.
const ROUND_TRIPS: usize = 20_000;

/// Round trips in a block.
const BLOCK: usize = 500;

const QUESTION: &str = "MEAS:VOLT?";
const ANSWER: &[u8] = b"+6.00000E+00\n";
const BAUD: u32 = 115_200;

fn main() -> Result<ExitCode, Box<dyn Error>> {
    let (bare, ours) = (Echo::start()?, Echo::start()?);
    let mut bare = Bare::open(&bare.port)?;
    let instrument = instrument(&ours.port)?;
    let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
    let clock = Clock::real();
    let mut times = [Vec::with_capacity(ROUND_TRIPS), Vec::with_capacity(ROUND_TRIPS)];
    for _ in 0..ROUND_TRIPS / BLOCK {
        for _ in 0..BLOCK {
            let begun = clock.now();
            bare.ask()?;
            times[0].push(microseconds(clock.now() - begun));
        }
        runtime.block_on(async {
            for _ in 0..BLOCK {
                let begun = clock.now();
                instrument.ask(|session| session.query(QUESTION)).wait().await?;
                times[1].push(microseconds(clock.now() - begun));
            }
            Ok::<(), Box<dyn Error>>(())
        })?;
    }
    Ok(table(&times))
}

fn microseconds(time: Duration) -> f64 {
    time.as_secs_f64() * 1e6
}

fn table([bare, ours]: &[Vec<f64>; 2]) -> ExitCode {
    println!("{ROUND_TRIPS} round trips of {QUESTION} on each path, in blocks of {BLOCK} by turns\n");
    println!("path                    p50 µs    p90 µs    p99 µs");
    for (path, times) in [("bare serialport loop", bare), ("through a session", ours)] {
        let [p50, p90, p99] = [0.5, 0.9, 0.99].map(|share| quantile(times, share));
        println!("{path:20} {p50:9.1} {p90:9.1} {p99:9.1}");
    }
    let more = quantile(ours, 0.5) - quantile(bare, 0.5);
    conclude(&format!("{more:.1} µs more at p50"), &format!("at most {BAR:.0} µs"), more <= BAR)
}

/// The shortest program that asks a question over a serial port.
struct Bare {
    port: Box<dyn SerialPort>,
    line: String,
    buffer: [u8; 64],
}

impl Bare {
    fn open(port: &str) -> Result<Self, serialport::Error> {
        let port = serialport::new(port, BAUD).timeout(Duration::from_secs(1)).open()?;
        Ok(Self { port, line: format!("{QUESTION}\n"), buffer: [0; 64] })
    }

    fn ask(&mut self) -> std::io::Result<()> {
        self.port.write_all(self.line.as_bytes())?;
        let mut count = 0;
        while count == 0 || self.buffer[count - 1] != b'\n' {
            count += self.port.read(&mut self.buffer[count..])?;
        }
        Ok(())
    }
}

/// The program's own path, as a bench connects it; the greeting is left out.
fn instrument(port: &str) -> Result<Instrument, Box<dyn Error>> {
    let text = builtin("programmable-supply").ok_or("no such definition")?;
    let definition = Definition::read("programmable-supply", text)?;
    let place = Arc::new(Place { instrument: "echo".to_owned(), port: port.to_owned() });
    let stream = serial_port::open(&place, &definition.serial)?;
    Ok(Instrument::start(Session::new(stream, place, &definition, Clock::real()))?)
}

/// An instrument that gives the same answer to every question, from a thread that lives as long as the process.
struct Echo {
    port: String,
    /// Kept open, so that the instrument's end outlives its clients.
    _far_end: File,
}

impl Echo {
    fn start() -> Result<Self, Box<dyn Error>> {
        let master = openpt(OpenptFlags::RDWR | OpenptFlags::NOCTTY)?;
        grantpt(&master)?;
        unlockpt(&master)?;
        let port = ptsname(&master, Vec::new())?.into_string()?;
        let far_end = OpenOptions::new().read(true).write(true).open(&port)?;
        let mut settings = tcgetattr(&far_end)?;
        settings.make_raw();
        tcsetattr(&far_end, OptionalActions::Now, &settings)?;
        let mut master = File::from(master);
        std::thread::Builder::new().name("echo".to_owned()).spawn(move || {
            let mut buffer = [0; 64];
            while let Ok(count) = master.read(&mut buffer) {
                for _ in buffer[..count].iter().filter(|byte| **byte == b'\n') {
                    if master.write_all(ANSWER).is_err() {
                        return;
                    }
                }
            }
        })?;
        Ok(Self { port, _far_end: far_end })
    }
}
