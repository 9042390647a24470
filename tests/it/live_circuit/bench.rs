//! A bench whose board is a circuit in a running ngspice: each action alters the source or lets simulated time pass.

#![expect(clippy::expect_used, reason = "a test stops at what it cannot do without")]

use ebbmark::bench::Bench;
use ebbmark::procedure::{Ability, Action, Event};
use ebbmark::trace::{Current, Sample, Slew};
use ebbmark::units::{Amps, Volts};
use std::fmt::Write as _;
use std::io::{BufRead, BufReader, Write};
use std::process::{Child, ChildStdin, ChildStdout, Command, Stdio};
use std::time::Duration;

/// A board with an undervoltage cut-off, behind leads.
#[derive(Clone, Copy, Debug)]
pub(super) struct Board {
    /// At the terminals, V.
    pub(super) trip: f64,
    /// At the terminals, V.
    pub(super) re_enable: f64,
    /// Of the detection, s; the release takes eleven times as long, through 110 kohm.
    pub(super) delay: f64,
    /// Resistance of the leads, ohm.
    pub(super) leads: f64,
    /// Resistance of the pull-up, ohm.
    pub(super) pull_up: f64,
    /// What the detector draws, A.
    pub(super) detector: f64,
}

impl Board {
    pub(super) fn good() -> Self {
        Self { trip: 6.0037, re_enable: 6.4121, delay: 1e-3, leads: 0.08, pull_up: 3.3e6, detector: 0.9e-6 }
    }

    /// The off current by Ohm's law: pull-up, detector, and the open switch of 50 Mohm in series with the load.
    pub(super) fn off_current(&self, volts: f64) -> f64 {
        volts / self.pull_up + self.detector + volts / (OPEN_SWITCH + LOAD)
    }

    /// The net list. The detector's output is an open drain, as of most real ones: below the trip it discharges the delay's
    /// capacitor through 10 kohm, else a pull-up charges it towards 1 V through 10 kohm and 100 kohm in series. The switch
    /// follows at half of it, after ln 2 time constants.
    fn circuit(&self) -> String {
        let Self { trip, re_enable, leads, pull_up, detector, .. } = self;
        let capacitor = self.delay / (10e3 * std::f64::consts::LN_2);
        format!(
            "a board with an undervoltage cut-off\n\
             Vs src 0 DC 0\n\
             Rlead src meter {leads}\n\
             Vam meter vin 0\n\
             Cin vin 0 1u\n\
             Vref ref 0 1\n\
             Sdet det 0 0 vin detector ON\n\
             Rdet ref det 100k\n\
             Rdel det gate 10k\n\
             Cdel gate 0 {capacitor:e}\n\
             Spass vin out gate 0 pass OFF\n\
             Rload out 0 {LOAD}\n\
             Rpu vin 0 {pull_up}\n\
             Iq vin 0 {detector:e}\n\
             .model detector sw vt=-{} vh={} ron=1 roff=1e12\n\
             .model pass sw vt=0.5 vh=0 ron=0.05 roff={OPEN_SWITCH}\n\
             .options method=gear reltol=1e-6 abstol=1e-13 vntol=1e-8\n\
             .end\n",
            f64::midpoint(*trip, *re_enable),
            (re_enable - trip) / 2.0,
        )
    }
}

const LOAD: f64 = 55.0;
const OPEN_SWITCH: f64 = 50e6;

/// Time one reading takes.
const READING: Duration = Duration::from_millis(20);
/// Time a setting takes.
const SETTING: Duration = Duration::from_millis(2);

/// A circuit simulator with its clock, and what is set on the bench around it.
pub(super) struct CircuitBench {
    ngspice: Child,
    commands: ChildStdin,
    answers: BufReader<ChildStdout>,
    now: Duration,
    set: Volts,
    output: bool,
    range: Amps,
    averaging: bool,
    _folder: tempfile::TempDir,
}

impl CircuitBench {
    /// Starts ngspice on the board's circuit, with the source at 0 V.
    pub(super) fn start(board: &Board) -> Self {
        let folder = tempfile::tempdir().expect("a folder");
        let path = folder.path().join("board.cir");
        std::fs::write(&path, board.circuit()).expect("a net list");
        let mut ngspice = Command::new("ngspice")
            .arg("-p")
            .stdin(Stdio::piped())
            .stdout(Stdio::piped())
            .stderr(Stdio::null())
            .spawn()
            .expect("ngspice is needed for this test; tests/all installs it");
        let commands = ngspice.stdin.take().expect("piped");
        let answers = BufReader::new(ngspice.stdout.take().expect("piped"));
        let mut bench = Self {
            ngspice,
            commands,
            answers,
            now: Duration::ZERO,
            set: Volts::ZERO,
            output: false,
            range: Amps(3.0),
            averaging: false,
            _folder: folder,
        };
        let first = 1e-4;
        bench.tell(&format!(
            "source {}\nstop when time > {first}\ntran 100u 10000 0 100u uic\n",
            path.display()
        ));
        bench
    }

    /// The same bench with meters that average over the whole reading, as real ones do; others read its last instant.
    pub(super) fn averaging(mut self) -> Self {
        self.averaging = true;
        self
    }

    pub(super) fn ability() -> Ability {
        let ranges = [1e-4, 1e-3, 1e-2, 0.1, 1.0, 3.0];
        Ability {
            voltmeter: true,
            load_voltmeter: true,
            short_readings: None,
            slew: Slew::default(),
            ranges: ranges.map(Amps).to_vec(),
            range_settle: Duration::from_millis(5),
            max_voltage: Volts(32.0),
            max_current: Amps(3.0),
            min_current: Amps(1e-3),
            set_step: Volts(1e-3),
            settle: Duration::from_millis(5),
            overshoot: 0.0,
            read_time: READING,
            arrival_tolerance: Volts(5e-3),
            zero_uncertainties: ranges.map(|range| Amps(range * 1e-5)).to_vec(),
        }
    }

    fn tell(&mut self, commands: &str) {
        self.commands.write_all(commands.as_bytes()).expect("ngspice listens");
        self.commands.flush().expect("ngspice listens");
    }

    /// The last values of the vectors named, in their order.
    fn ask<const N: usize>(&mut self, vectors: [&str; N]) -> [f64; N] {
        let mut question = String::new();
        for vector in vectors {
            let _ = writeln!(question, "print {vector}[length(time)-1]");
        }
        self.tell(&question);
        vectors.map(|vector| {
            let mut line = String::new();
            loop {
                line.clear();
                let read = self.answers.read_line(&mut line).expect("an answer");
                assert!(read > 0, "ngspice ended before it told {vector}");
                if let Some((name, value)) = line.split_once(" = ")
                    && name.trim().starts_with(vector)
                {
                    return value.trim().parse().unwrap_or_else(|_| panic!("{vector}: read {line:?}"));
                }
            }
        })
    }

    /// Means of the vectors named since `from`, to six digits.
    fn means<const N: usize>(&mut self, vectors: [&str; N], from: Duration) -> [f64; N] {
        vectors.map(|vector| {
            let (from, to) = (from.as_secs_f64(), self.now.as_secs_f64());
            self.tell(&format!("meas tran mean avg {vector} from={from} to={to}\n"));
            let mut line = String::new();
            loop {
                line.clear();
                let read = self.answers.read_line(&mut line).expect("an answer");
                assert!(read > 0, "ngspice ended before it told the mean of {vector}");
                if let Some((name, value)) = line.split_once('=')
                    && name.trim().ends_with("mean")
                {
                    let number = value.split_whitespace().next().unwrap_or_default();
                    return number.parse().unwrap_or_else(|_| panic!("mean of {vector}: read {line:?}"));
                }
            }
        })
    }

    /// Lets simulated time pass.
    fn advance_to(&mut self, until: Duration) {
        if until > self.now {
            self.tell(&format!("delete all\nstop when time > {}\nresume\n", until.as_secs_f64()));
            self.now = until;
        }
    }

    fn drive_source(&mut self) {
        let volts = if self.output { self.set.0 } else { 0.0 };
        self.tell(&format!("alter vs dc = {volts}\n"));
    }

    fn read(&mut self) -> Sample {
        self.advance_to(self.now + READING);
        let vectors = ["v(vin)", "v(out)", "i(vam)"];
        let [vin, out, amps] =
            if self.averaging { self.means(vectors, self.now - READING) } else { self.ask(vectors) };
        Sample {
            at: self.now - READING / 2,
            set: self.set,
            sense: Some(Volts(vin)),
            current: if amps.abs() > 1.2 * self.range.0 {
                Current::OVERLOAD
            } else {
                Current::Value(Amps(amps))
            },
            load: Some(Volts(out)),
            range: Some(self.range),
            limited: Some(false),
            was_limited: None,
        }
    }
}

impl Bench for CircuitBench {
    fn now(&self) -> Duration {
        self.now
    }

    async fn perform(&mut self, action: &Action) -> Event {
        match action {
            Action::SetVolts(volts) => self.set = *volts,
            Action::OutputOn => self.output = true,
            Action::OutputOff => (self.set, self.output) = (Volts::ZERO, false),
            Action::Range(current) => {
                let holds = |range: &Amps| *range >= *current;
                self.range = Self::ability().ranges.into_iter().find(holds).unwrap_or(Amps(3.0));
            }
            Action::Read => return Event::Reading(self.read()),
            Action::WaitUntil(until) => {
                self.advance_to(*until);
                return Event::Done;
            }
            Action::Burst | Action::Protect { .. } | Action::LimitCurrent(_) | Action::Finish(_) => {}
        }
        self.drive_source();
        self.advance_to(self.now + SETTING);
        Event::Done
    }
}

impl Drop for CircuitBench {
    fn drop(&mut self) {
        let _ = self.ngspice.kill();
        let _ = self.ngspice.wait();
    }
}
