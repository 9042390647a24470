//! From a checked bench to instruments that are ready for a run.

use super::reading::readings;
use super::{Asked, Playing, SerialBench, settings};
use crate::clock::Clock;
use crate::instrument::bench_file::{BenchFile, BenchInstrument, Identity, RoleMissing};
use crate::instrument::definition::{Definition, Role};
use crate::instrument::error::{InstrumentError, Place};
use crate::instrument::port::{Answer, Instrument};
use crate::instrument::scpi;
use crate::instrument::serial_port;
use crate::instrument::session::{Greeting, Session, Setting, SwitchOff};
use crate::units::Volts;
use std::sync::Arc;
use std::time::Duration;

/// Why a bench cannot be used.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum ConnectError {
    /// No instrument plays a role that every bench needs.
    #[error(transparent)]
    Role(#[from] RoleMissing),
    /// Instruments that do not answer, or not as they should; never empty.
    #[error("{}", lines(.errors))]
    Instruments {
        /// One for each instrument that failed.
        errors: Vec<InstrumentError>,
    },
}

fn lines(errors: &[InstrumentError]) -> String {
    errors.iter().map(ToString::to_string).collect::<Vec<_>>().join("\n")
}

/// Opens all ports, finds out who is there, switches the output off, and sets the instruments up.
///
/// Voltmeters are put on the smallest range that holds `maximum`, or their largest; the ammeter on its largest. What
/// an earlier program left in an error queue is logged and forgotten. The bench's time runs on `clock`: real, unless
/// all instruments are simulated ones that keep the same time.
///
/// # Errors
/// Every instrument that failed. The others are let go again, with their front panels given back.
pub async fn connect(bench: &BenchFile, maximum: Volts, clock: Clock) -> Result<SerialBench, ConnectError> {
    let seats = bench.instruments();
    let opened: Vec<_> = seats.iter().map(|seat| (seat, open(seat, maximum, clock))).collect();
    let (mut ready, mut errors) = (Vec::new(), Vec::new());
    for (seat, opened) in opened {
        match greeted(opened).await {
            Ok((instrument, greeting)) => {
                for error in greeting.old_errors {
                    tracing::warn!("{}: left from before: {error}", instrument.place());
                }
                ready.push((seat, Arc::new(instrument), greeting.identity));
            }
            Err(error) => errors.push(error),
        }
    }
    if errors.is_empty() { seated(ready, clock) } else { Err(ConnectError::Instruments { errors }) }
}

/// An instrument that is being made ready, and what will come of it.
pub(super) type Opened = Result<(Instrument, Answer<Greeting>), InstrumentError>;

/// Opens one port and queues all that makes its instrument ready.
pub(super) fn open(seat: &BenchInstrument, maximum: Volts, clock: Clock) -> Opened {
    let place = Arc::new(Place { instrument: seat.name.clone(), port: seat.port.clone() });
    let preparation = Preparation::of(seat, maximum);
    let stream = serial_port::open(&place, &seat.definition.serial)?;
    let instrument = Instrument::start(Session::new(stream, place, &seat.definition, clock))?;
    let answer = instrument.ask(move |session| preparation.carry_out(session));
    Ok((instrument, answer))
}

/// Waits until an instrument is ready.
pub(super) async fn greeted(opened: Opened) -> Result<(Instrument, Greeting), InstrumentError> {
    let (instrument, answer) = opened?;
    let greeting = answer.wait().await?;
    Ok((instrument, greeting))
}

/// All that is sent to an instrument before its first run.
struct Preparation {
    expected: Identity,
    /// Of a source: before anything else, its output goes off.
    off: Option<SwitchOff>,
    commands: Vec<String>,
    ranges: Vec<Setting>,
    /// The longest any of the commands may keep the instrument from answering.
    deadline: Duration,
}

impl Preparation {
    fn of(seat: &BenchInstrument, maximum: Volts) -> Self {
        let (definition, roles) = (&seat.definition, &seat.roles);
        let source = definition.source.as_ref().filter(|_| roles.contains(&Role::Source));
        let ammeter = definition.ammeter.as_ref().filter(|_| roles.contains(&Role::Ammeter));
        let reads_volts = roles.contains(&Role::Voltmeter) || roles.contains(&Role::LoadVoltmeter);
        let voltmeter = definition.voltmeter.as_ref().filter(|_| reads_volts);

        let mut commands = definition.setup.clone();
        commands.extend(source.iter().flat_map(|part| part.setup.clone()));
        commands.extend(ammeter.iter().flat_map(|part| part.setup.clone()));
        commands.extend(voltmeter.iter().flat_map(|part| part.setup.clone()));

        let mut ranges = Vec::new();
        if let Some(part) = ammeter
            && let Some(largest) = part.ranges.last()
        {
            ranges.extend(settings::range(part, largest, definition.timing));
        }
        if let Some(part) = voltmeter
            && let Some(range) = part.range_for(maximum).or_else(|| part.ranges.last())
        {
            ranges.extend(settings::range(part, range, definition.timing));
        }
        Self {
            expected: seat.identity.clone(),
            off: source.map(settings::switch_off),
            commands,
            ranges,
            deadline: definition.timing.reset_deadline,
        }
    }

    fn carry_out(&self, session: &mut Session) -> Result<Greeting, InstrumentError> {
        let greeting = session.greet(&self.expected)?;
        if let Some(off) = &self.off {
            session.switch_off(off)?;
        }
        for command in &self.commands {
            session.command(command)?;
            session.refuse_errors_within(command, self.deadline)?;
        }
        self.ranges.iter().try_for_each(|range| session.set(range))?;
        Ok(greeting)
    }
}

/// An instrument that is ready, where it sits on the bench, and who it says it is.
type Ready<'b> = (&'b BenchInstrument, Arc<Instrument>, scpi::Identity);

fn seated(ready: Vec<Ready<'_>>, clock: Clock) -> Result<SerialBench, ConnectError> {
    let source = playing(&ready, Role::Source, |definition| definition.source.clone())?;
    let ammeter = playing(&ready, Role::Ammeter, |definition| definition.ammeter.clone())?;
    let voltmeter = playing(&ready, Role::Voltmeter, |definition| definition.voltmeter.clone()).ok();
    let instruments = ready
        .into_iter()
        .map(|(seat, instrument, identity)| Asked {
            instrument,
            identity,
            readings: readings(&seat.definition, &seat.roles),
        })
        .collect();
    let range = ammeter.part.ranges.last().map(|range| range.full_scale);
    Ok(SerialBench {
        source,
        ammeter,
        voltmeter,
        instruments,
        clock,
        set: Volts::ZERO,
        range,
        watched: Duration::ZERO,
    })
}

fn playing<Part>(
    ready: &[Ready<'_>],
    role: Role,
    part: impl Fn(&Definition) -> Option<Part>,
) -> Result<Playing<Part>, RoleMissing> {
    ready
        .iter()
        .filter(|(seat, ..)| seat.roles.contains(&role))
        .find_map(|(seat, instrument, _)| {
            let timing = seat.definition.timing;
            Some(Playing { instrument: Arc::clone(instrument), part: part(&seat.definition)?, timing })
        })
        .ok_or(RoleMissing(role))
}
