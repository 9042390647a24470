//! `bench check`: each instrument by itself, the meters at rest, and on demand the supply against the voltmeter, the
//! leads, and a reference board.

use super::place::{Found, Place, allowed};
use super::reference;
use super::standard::Standard;
use super::work::{Connected, exit};
use super::zero::volts;
use crate::bench::serial::{Report, check};
use crate::cli::show::print;
use crate::cli::station::Station;
use crate::cli::{Exit, Failure, Format};
use crate::instrument::bench_file::BenchInstrument;
use crate::instrument::error::InstrumentError;
use crate::procedure::{BenchWork, Task};
use crate::profile::Profile;
use crate::record::{BenchEntry, BenchFound, CheckFound, InstrumentFound, now};
use crate::report;
use crate::sim::bench::InFixture;
use crate::trace::Trace;
use crate::units::{Amps, Ohms, Volts, Watts, parse_fraction};
use crate::verification::{KnownLoad, leads, rest, steps};
use clap::Args;
use jiff::civil::Date;
use std::path::PathBuf;

#[derive(Debug, Args)]
#[command(after_help = "\
Example:
  ebbmark bench check instruments/benches/first-bench.toml

With a load resistor, a known large resistor, or a reference board in the fixture:
  ebbmark bench check my-bench.toml --energise --load \"55 ohm\" --profile profiles/river-node.toml --test-voltage \"7.6 V\"
  ebbmark bench check my-bench.toml --energise --standard \"1 Mohm\" --standard-tolerance \"1 %\"
  ebbmark bench check my-bench.toml --profile profiles/river-node.toml --reference my-reference.toml

Without --energise or --reference the output is never switched on. The exit code is 0 when everything is in order and 3
when something is not.")]
pub(super) struct Arguments {
    #[command(flatten)]
    place: Place,
    /// Switch the output on at a low voltage with the lowest current limit, and compare set-point and voltmeter.
    #[arg(long)]
    energise: bool,
    /// Voltage of that comparison; when left out 1 V, or 3 V with --standard.
    #[arg(long, value_name = "VOLTAGE", value_parser = volts)]
    test_voltage: Option<Volts>,
    /// A resistor of this value is in the fixture in place of a board, such as "55 ohm": the leads are measured too.
    #[arg(long, value_name = "RESISTANCE", value_parser = ohms, requires = "energise")]
    load: Option<Ohms>,
    /// Tolerance of that resistor.
    #[arg(long, value_name = "SHARE", default_value = "1 %", value_parser = share)]
    load_tolerance: f64,
    #[command(flatten)]
    standard: Standard,
    /// A reference board is in the fixture, described in this file: it is tested, and compared with what is known of it.
    #[arg(long, value_name = "FILE", requires = "profile", conflicts_with_all = ["load", "standard"])]
    reference: Option<PathBuf>,
}

pub(super) fn ohms(text: &str) -> Result<Ohms, String> {
    Ohms::parse(text)
        .map_err(|error| error.to_string())
        .and_then(|load| if load > Ohms::ZERO { Ok(load) } else { Err("wanted more than 0 ohm".to_owned()) })
}

pub(super) fn share(text: &str) -> Result<f64, String> {
    parse_fraction(text).map_err(|error| error.to_string()).and_then(|share| {
        if (0.0..=0.2).contains(&share) { Ok(share) } else { Err("wanted 0 % to 20 %".to_owned()) }
    })
}

/// What the mark in the log says meanwhile.
const NAME: &str = "bench check";

/// The lowest current limit of most supplies lies below this; a load of its own gets what it draws.
const LITTLE_CURRENT: Amps = Amps(1e-3);

/// Current limit above what a known load draws.
const CURRENT_MARGIN: f64 = 1.5;

/// What the smallest usual resistor bears.
const SMALL_RESISTOR: Watts = Watts(0.25);

/// Steps of the voltage with a load in place.
const STEPS: u32 = 4;

/// What a check has found so far.
#[derive(Default)]
struct Findings {
    check: CheckFound,
    problems: Vec<String>,
    traces: Vec<Trace>,
}

impl Arguments {
    pub(super) fn run(self) -> Result<Exit, Failure> {
        let profile = self.place.profile()?;
        let in_fixture = self.load.or(self.standard.resistance).map_or(InFixture::Board, InFixture::Resistor);
        let found = self.place.find(profile.as_ref(), in_fixture)?;
        self.is_allowed(profile.as_ref(), &found)?;
        let reference = self.reference.as_deref().map(reference::read).transpose()?;

        let (entry, mut outcome) = self.check(&found)?;
        let mut entries = vec![entry];
        if let (Some(reference), Some(profile), Exit::Pass) = (&reference, &profile, outcome) {
            let (entry, after) = reference::measure(reference, profile, &self.place, &found)?;
            entries.push(entry);
            outcome = after;
        }
        print(&match self.place.format {
            Format::Text => entries.iter().map(report::bench_text).collect::<Vec<_>>().join("\n"),
            Format::Json => report::bench_json(&entries.iter().collect::<Vec<_>>()) + "\n",
        })?;
        Ok(outcome)
    }

    /// All that needs no board, kept in the log.
    fn check(&self, found: &Found) -> Result<(BenchEntry, Exit), Failure> {
        let mut station = Station::open(&found.file, found.clock, &self.place.logs, &found.station)?;
        let mut findings = Findings::default();
        let reports = station.runtime.block_on(check(&found.file, Volts::ZERO, found.clock));
        let stays_on =
            reports.iter().filter_map(|report| report.as_ref().err()).any(|error| found.file.stays_on(error));
        let today = now().date();
        for (seat, report) in found.file.instruments().iter().zip(&reports) {
            findings.take_instrument(seat, report, today);
        }
        let mut used = found.used(Vec::new());
        if reports.iter().all(Result::is_ok) {
            match Connected::new(&mut station, found, self.test_voltage()) {
                Ok(mut bench) => {
                    used = bench.used();
                    self.read(found, &mut bench, &mut findings)?;
                }
                Err(failure) if failure.exit == Exit::Invalid => {
                    findings.problems.push(format!("{:#}", failure.error));
                }
                Err(failure) => return Err(failure),
            }
        }
        let Findings { check, problems, traces } = findings;
        let mut entry = BenchEntry::new(&found.station, now(), used, BenchFound::Check(check), problems);
        entry.operator.clone_from(&self.place.operator);
        entry.traces = traces;
        let mut exit = exit(&entry.traces, entry.is_good());
        if stays_on && exit != Exit::OutputMayBeOn {
            anstream::eprintln!("{}", report::OUTPUT_MAY_BE_ON);
            exit = Exit::OutputMayBeOn;
        }
        match station.log.keep(&entry) {
            Err(error) if exit == Exit::OutputMayBeOn => Err(Failure::output_may_be_on(error)),
            kept => Ok(kept.map(|()| (entry, exit))?),
        }
    }

    /// The readings: at rest, and with the output on where that is asked for.
    fn read(
        &self,
        found: &Found,
        bench: &mut Connected<'_, '_>,
        findings: &mut Findings,
    ) -> Result<(), Failure> {
        let test_voltage = self.test_voltage();
        let (ability, readings) = (found.file.ability(test_voltage), self.place.readings());
        let (current_limit, voltages) = self.energised();
        let work = |task| BenchWork::new(&ability, test_voltage, current_limit, readings, task);
        let at_rest = bench.carry_out(NAME, work(Task::Rest))?;
        let (at_rest_found, problems) = rest(&at_rest, readings);
        findings.check.rest = at_rest_found;
        findings.problems.extend(problems);
        findings.traces.push(at_rest);
        if !self.energise || !findings.problems.is_empty() {
            return Ok(());
        }
        let steps_up = work(Task::Steps(voltages));
        let burden = found.file.burden(steps_up.large_range);
        let trace = bench.carry_out(NAME, steps_up)?;
        let (found_steps, problems) = steps(&trace, readings);
        findings.problems.extend(problems);
        if found_steps.is_empty() && findings.problems.is_empty() {
            findings.problems.push(
                "no voltmeter at the terminals: set-point and leads cannot be compared with anything"
                    .to_owned(),
            );
        }
        if let Some(resistance) = self.load {
            let load = KnownLoad { resistance, tolerance: self.load_tolerance };
            let (found_leads, found_load, problems) = leads(&found_steps, &trace.claims, load, burden);
            (findings.check.leads, findings.check.load) = (found_leads, found_load);
            findings.problems.extend(problems);
        }
        findings.check.steps = found_steps;
        findings.traces.push(trace);
        if findings.problems.is_empty()
            && let Some(resistor) = self.standard.resistor()
        {
            let work = work(Task::SmallRanges(vec![test_voltage]));
            let (trace, found, problems) = Standard::read(resistor, work, bench, NAME)?;
            findings.check.standard = found;
            findings.problems.extend(problems);
            findings.traces.push(trace);
        }
        Ok(())
    }

    fn test_voltage(&self) -> Volts {
        self.test_voltage.unwrap_or_else(|| self.standard.usual_voltage())
    }

    /// Current limit and voltages of the comparison.
    fn energised(&self) -> (Amps, Vec<Volts>) {
        let test_voltage = self.test_voltage();
        let Some(load) = self.load else { return (LITTLE_CURRENT, vec![test_voltage]) };
        let current_limit = (test_voltage / load * CURRENT_MARGIN).max(LITTLE_CURRENT);
        let step = |step| test_voltage * (f64::from(step) / f64::from(STEPS));
        (current_limit, (1..=STEPS).map(step).collect())
    }

    fn is_allowed(&self, profile: Option<&Profile>, found: &Found) -> Result<(), Failure> {
        let test_voltage = self.test_voltage();
        allowed(test_voltage, profile, &found.file)?;
        self.standard.is_allowed(test_voltage, &found.file)?;
        let Some(load) = self.load else { return Ok(()) };
        let current = test_voltage / load;
        let power = test_voltage * current;
        let bears = profile.map_or(SMALL_RESISTOR, |profile| profile.load.rating);
        if power > bears {
            return Err(anyhow::anyhow!(
                "{load} takes {power} at {}, more than the {bears} of {}; lower --test-voltage",
                test_voltage,
                if profile.is_some() {
                    "the profile's load"
                } else {
                    "a small resistor; --profile names a larger one"
                }
            )
            .into());
        }
        let most = profile
            .map_or(found.file.ability(test_voltage).max_current, |profile| profile.supply.current_limit);
        if current * CURRENT_MARGIN > most {
            return Err(anyhow::anyhow!(
                "{load} draws {current} at {test_voltage}; with its margin that is above the limit of {most}; lower --test-voltage"
            )
            .into());
        }
        Ok(())
    }
}

impl Findings {
    fn take_instrument(
        &mut self,
        seat: &BenchInstrument,
        report: &Result<Report, InstrumentError>,
        today: Date,
    ) {
        let due = seat.due();
        let days_left = due.and_then(|due| Some(today.until(due).ok()?.get_days()));
        let mut found = InstrumentFound {
            name: seat.name.clone(),
            roles: seat.roles.iter().map(|role| role.key().to_owned()).collect(),
            port: seat.port.clone(),
            identity: None,
            response_s: None,
            slowest_response_s: None,
            left_in_queue: Vec::new(),
            port_settings: None,
            calibration_due: due,
            calibration_days_left: days_left,
            not_ready: None,
        };
        match report {
            Ok(report) => {
                found.identity = Some(report.greeting.identity.to_string());
                found.response_s = Some(report.round_trip.as_secs_f64());
                found.slowest_response_s = Some(report.slowest.as_secs_f64());
                found.left_in_queue = report.greeting.old_errors.iter().map(ToString::to_string).collect();
                found.port_settings.clone_from(&report.port_settings);
            }
            Err(error) => {
                found.not_ready = Some(error.to_string());
                self.problems.push(error.to_string());
            }
        }
        if let Some(due) = seat.overdue(today) {
            self.problems.push(format!(
                "the calibration of {} was due {due}: have it calibrated, then put the next date into the bench file",
                seat.name
            ));
        }
        self.check.instruments.push(found);
    }
}
