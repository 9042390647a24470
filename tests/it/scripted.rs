//! A small instrument on a pseudo-terminal that does what a test tells it to, mistakes included.

#![expect(clippy::expect_used, reason = "helpers of tests fail as tests do")]

use ebbmark::clock::Clock;
use ebbmark::instrument::definition::{
    DataBits, Definition, FlowControl, Parity, Role, SerialSettings, StopBits, Terminator, Timing,
};
use ebbmark::instrument::error::{InstrumentError, Place};
use ebbmark::instrument::serial_port;
use ebbmark::instrument::session::{Session, SwitchOff};
use rustix::fs::{Mode, OFlags};
use rustix::pty::{OpenptFlags, grantpt, openpt, ptsname, unlockpt};
use rustix::termios::{OptionalActions, tcgetattr, tcsetattr};
use std::collections::{BTreeMap, BTreeSet};
use std::fs::File;
use std::io::{Read, Write};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex};
use std::thread::JoinHandle;
use std::time::Duration;

/// How long a reply is waited for; even a busy machine is sooner.
pub(crate) const DEADLINE: Duration = Duration::from_secs(1);

/// The same where a test is about a reply that does not come, or comes late.
pub(crate) const SILENCE: Duration = Duration::from_millis(300);

/// What the instrument does next on its side of the line.
#[derive(Clone, Debug)]
pub(crate) enum Act {
    /// Sends these characters, terminator included.
    Say(String),
    /// Does nothing for a while.
    Wait(Duration),
    /// Closes its side: the cable is pulled.
    HangUp,
}

/// One line with its terminator.
pub(crate) fn say(line: &str) -> Vec<Act> {
    vec![Act::Say(format!("{line}\n"))]
}

/// A well-behaved supply and meter: settings are kept by the header that sets them.
#[derive(Debug)]
pub(crate) struct Device {
    pub(crate) identity: String,
    pub(crate) settings: BTreeMap<String, String>,
    pub(crate) readings: BTreeMap<String, String>,
    pub(crate) errors: Vec<String>,
    pub(crate) event_status: u8,
}

impl Default for Device {
    fn default() -> Self {
        let pairs = |pairs: &[(&str, &str)]| {
            pairs.iter().map(|(header, value)| ((*header).to_owned(), (*value).to_owned())).collect()
        };
        Self {
            identity: "EXAMPLE,PS-30,SN0042,1.0".to_owned(),
            settings: pairs(&[
                ("VOLT", "0"),
                ("CURR", "0.1"),
                ("VOLT:PROT", "30"),
                ("OUTP", "0"),
                ("SENS:CURR:RANG", "1"),
                ("SENS:CURR:NPLC", "10"),
                ("SENS:VOLT:RANG", "1000"),
                ("SENS:VOLT:NPLC", "10"),
                ("*ESE", "0"),
            ]),
            readings: pairs(&[
                ("MEAS:CURR", "+1.250000E-01"),
                ("MEAS:VOLT", "+5.960000E+00"),
                ("STAT:QUES:COND", "0"),
                ("STAT:QUES", "0"),
                ("*STB", "0"),
            ]),
            errors: Vec::new(),
            event_status: 128,
        }
    }
}

impl Device {
    /// Obeys one line, as IEEE 488.2 and SCPI-1999 want it.
    pub(crate) fn obey(&mut self, line: &str) -> Vec<Act> {
        match line {
            "*IDN?" => say(&self.identity),
            "*ESR?" => say(&std::mem::take(&mut self.event_status).to_string()),
            "SYST:ERR?" if self.errors.is_empty() => say("0,\"No error\""),
            "SYST:ERR?" => say(&self.errors.remove(0)),
            "*CLS" => {
                self.errors.clear();
                self.event_status = 0;
                Vec::new()
            }
            "*RST" | "SYST:REM" | "SYST:LOC" => Vec::new(),
            question if question.ends_with('?') => {
                let header = question.trim_end_matches('?');
                match self.readings.get(header).or_else(|| self.settings.get(header)) {
                    Some(value) => say(value),
                    None => self.fail("-113,\"Undefined header\""),
                }
            }
            command => match command.split_once(' ') {
                Some((header, value)) if self.settings.contains_key(header) => {
                    let value = match value {
                        "ON" => "1",
                        "OFF" => "0",
                        number => number,
                    };
                    self.settings.insert(header.to_owned(), value.to_owned());
                    Vec::new()
                }
                _ => self.fail("-113,\"Undefined header\""),
            },
        }
    }

    /// Puts an error in the queue and answers nothing.
    pub(crate) fn fail(&mut self, error: &str) -> Vec<Act> {
        self.errors.push(error.to_owned());
        Vec::new()
    }
}

/// An instrument at work on a pseudo-terminal of its own.
pub(crate) struct Scripted {
    pub(crate) place: Arc<Place>,
    /// How long its sessions wait for a reply.
    patience: Duration,
    log: Arc<Mutex<Vec<String>>>,
    stop: Arc<AtomicBool>,
    /// Keeps the line open between clients, and wakes the thread at the end.
    slave: File,
    thread: Option<JoinHandle<()>>,
}

impl Scripted {
    /// One that only behaves well.
    pub(crate) fn well_behaved() -> Self {
        Self::start(Device::default(), |device, line| device.obey(line))
    }

    /// One that answers each line as `script` says; `device` is there to be asked for the proper answer.
    pub(crate) fn start(
        mut device: Device,
        mut script: impl FnMut(&mut Device, &str) -> Vec<Act> + Send + 'static,
    ) -> Self {
        let master = openpt(OpenptFlags::RDWR | OpenptFlags::NOCTTY | OpenptFlags::CLOEXEC).expect("a pty");
        grantpt(&master).expect("granted");
        unlockpt(&master).expect("unlocked");
        let path = ptsname(&master, Vec::new()).expect("a name").into_string().expect("a plain path");
        let slave = rustix::fs::open(&path, OFlags::RDWR | OFlags::NOCTTY | OFlags::CLOEXEC, Mode::empty())
            .expect("open");
        let mut termios = tcgetattr(&slave).expect("a terminal");
        termios.make_raw();
        tcsetattr(&slave, OptionalActions::Now, &termios).expect("raw");
        let log = Arc::new(Mutex::new(Vec::new()));
        let stop = Arc::new(AtomicBool::new(false));
        let (seen, stopped, mut master) = (Arc::clone(&log), Arc::clone(&stop), File::from(master));
        let thread = std::thread::spawn(move || {
            let mut pending = Vec::new();
            let mut buffer = [0; 256];
            while let Ok(count) = master.read(&mut buffer) {
                pending.extend_from_slice(&buffer[..count]);
                while let Some(end) = pending.iter().position(|byte| *byte == b'\n') {
                    let line: Vec<u8> = pending.drain(..=end).collect();
                    let line = String::from_utf8_lossy(&line).trim().to_owned();
                    if stopped.load(Ordering::Relaxed) {
                        return;
                    }
                    if line.is_empty() {
                        continue;
                    }
                    seen.lock().expect("no panic").push(line.clone());
                    for act in script(&mut device, &line) {
                        match act {
                            Act::Say(text) => master.write_all(text.as_bytes()).expect("room"),
                            Act::Wait(span) => std::thread::sleep(span),
                            Act::HangUp => return,
                        }
                    }
                }
            }
        });
        let place = Arc::new(Place { instrument: "supply".to_owned(), port: path });
        Self { place, patience: DEADLINE, log, stop, slave: File::from(slave), thread: Some(thread) }
    }

    /// The same, waited for no longer than [`SILENCE`].
    pub(crate) fn impatiently(mut self) -> Self {
        self.patience = SILENCE;
        self
    }

    /// The lines received so far.
    pub(crate) fn heard(&self) -> Vec<String> {
        self.log.lock().expect("no panic").clone()
    }

    /// The lines received up to and with `last`, which may still be under way.
    pub(crate) fn heard_up_to(&self, last: &str) -> Vec<String> {
        for _ in 0..1000 {
            if self.heard().last().is_some_and(|line| line == last) {
                return self.heard();
            }
            std::thread::sleep(Duration::from_millis(2));
        }
        panic!("{last:?} was never sent: {:?}", self.heard());
    }

    /// How often a line was received.
    pub(crate) fn count(&self, line: &str) -> usize {
        self.heard().iter().filter(|heard| *heard == line).count()
    }

    /// A session with it, not yet greeted.
    pub(crate) fn session(&self) -> Session {
        self.try_session().expect("the port opens")
    }

    /// As [`Scripted::session`], where the port may not open.
    pub(crate) fn try_session(&self) -> Result<Session, InstrumentError> {
        let mut definition = definition();
        definition.timing.reply_deadline = self.patience;
        let stream = serial_port::open(&self.place, &definition.serial)?;
        Ok(Session::new(stream, Arc::clone(&self.place), &definition, Clock::real()))
    }

    /// A session that has been greeted, and so is in step.
    pub(crate) fn greeted(&self) -> Session {
        let mut session = self.session();
        session.greet(&Default::default()).expect("a well-behaved greeting");
        session
    }
}

impl Drop for Scripted {
    fn drop(&mut self) {
        self.stop.store(true, Ordering::Relaxed);
        // The line end wakes the thread; after a hang-up nobody listens any more.
        let _ = self.slave.write_all(b"\n");
        if let Some(thread) = self.thread.take() {
            let ended = thread.join();
            assert!(ended.is_ok() || std::thread::panicking(), "the scripted instrument panicked");
        }
    }
}

/// An instrument whose `n`-th answer to `question` is replaced by `acts`, and which is not waited for long.
pub(crate) fn spoiling(question: &'static str, n: usize, acts: Vec<Act>) -> Scripted {
    let mut asked = 0;
    Scripted::start(Device::default(), move |device, line| {
        asked += usize::from(line == question);
        if line == question && asked == n { acts.clone() } else { device.obey(line) }
    })
    .impatiently()
}

/// What switches the output of a [`Device`] off.
pub(crate) fn off() -> SwitchOff {
    SwitchOff { commands: vec!["VOLT 0".to_owned(), "OUTP OFF".to_owned()], question: "OUTP?".to_owned() }
}

/// A definition without roles: what a session needs.
pub(crate) fn definition() -> Definition {
    Definition {
        name: "scripted".to_owned(),
        title: "Scripted instrument".to_owned(),
        roles: BTreeSet::<Role>::new(),
        cannot: Vec::new(),
        serial: SerialSettings {
            baud: 115_200,
            data_bits: DataBits::Eight,
            parity: Parity::None,
            stop_bits: StopBits::One,
            flow: FlowControl::None,
            terminator: Terminator::Lf,
            gap: Duration::ZERO,
            settle: Duration::ZERO,
        },
        timing: Timing {
            reply_deadline: DEADLINE,
            reset_deadline: DEADLINE,
            range_deadline: DEADLINE,
            response: Duration::from_millis(1),
        },
        setup: Vec::new(),
        local: vec!["SYST:LOC".to_owned()],
        source: None,
        ammeter: None,
        voltmeter: None,
    }
}
