//! From a checked bench to instruments that are ready for a run.

use super::reading::readings;
use super::{Asked, Playing, SerialBench, settings};
use crate::bench::clock::Clock;
use crate::instrument::definition::{Definition, Role};
use crate::instrument::error::{InstrumentError, Place};
use crate::instrument::port::{Answer, Instrument};
use crate::instrument::serial_port;
use crate::instrument::session::{Expected, Greeting, Session, Setting, SwitchOff};
use crate::units::Volts;
use std::collections::BTreeSet;
use std::sync::Arc;
use std::time::Duration;

/// One instrument of a bench: what it is, where it is, and what it does there.
#[derive(Clone, Debug)]
pub struct Seat {
    /// What the bench calls it, and its port.
    pub place: Arc<Place>,
    /// What kind of instrument it is.
    pub definition: Arc<Definition>,
    /// The roles it plays on this bench; its definition has the part for each.
    pub roles: BTreeSet<Role>,
    /// Who must answer.
    pub expected: Expected,
}

/// Why a bench cannot be used.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum ConnectError {
    /// No instrument plays a role that every bench needs.
    #[error("the bench has no instrument in the role {role}; give it one in the bench file")]
    NoRole {
        /// The role.
        role: Role,
    },
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
/// Voltmeters are put on the smallest range that holds `maximum`, the ammeter on its largest. What an earlier program
/// left in an error queue is logged and forgotten.
///
/// # Errors
/// Every instrument that failed. The others are let go again, with their front panels given back.
pub async fn connect(seats: &[Seat], maximum: Volts, clock: Clock) -> Result<SerialBench, ConnectError> {
    let mut ready = Vec::new();
    let mut errors = Vec::new();
    let opened: Vec<_> = seats.iter().map(|seat| (seat, open(seat, maximum, clock))).collect();
    for (seat, opened) in opened {
        let connected = match opened {
            Ok((instrument, answer)) => answer.wait().await.map(|greeting| (instrument, greeting)),
            Err(error) => Err(error),
        };
        match connected {
            Ok((instrument, greeting)) => {
                for error in greeting.old_errors {
                    tracing::warn!("{}: left from before: {error}", seat.place);
                }
                ready.push((seat, Arc::new(instrument)));
            }
            Err(error) => errors.push(error),
        }
    }
    if errors.is_empty() { seated(&ready, clock) } else { Err(ConnectError::Instruments { errors }) }
}

/// Opens one port and queues all that makes its instrument ready.
pub(super) fn open(
    seat: &Seat,
    maximum: Volts,
    clock: Clock,
) -> Result<(Instrument, Answer<Greeting>), InstrumentError> {
    let preparation = Preparation::of(seat, maximum)?;
    let stream = serial_port::open(&seat.place, &seat.definition.serial)?;
    let session = Session::new(stream, Arc::clone(&seat.place), &seat.definition, clock);
    let instrument = Instrument::start(session)?;
    let answer = instrument.ask(move |session| preparation.carry_out(session));
    Ok((instrument, answer))
}

/// All that is sent to an instrument before its first run.
struct Preparation {
    expected: Expected,
    /// Of a source: before anything else, its output goes off.
    off: Option<SwitchOff>,
    commands: Vec<String>,
    ranges: Vec<Setting>,
    /// The longest any of the commands may keep the instrument from answering.
    deadline: Duration,
}

impl Preparation {
    fn of(seat: &Seat, maximum: Volts) -> Result<Self, InstrumentError> {
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
        if let Some(part) = voltmeter {
            let range = part.range_for(maximum).ok_or_else(|| InstrumentError::CannotDo {
                place: Arc::clone(&seat.place),
                what: format!("it has no range that holds {maximum}"),
            })?;
            ranges.extend(settings::range(part, range, definition.timing));
        }
        Ok(Self {
            expected: seat.expected.clone(),
            off: source.map(settings::switch_off),
            commands,
            ranges,
            deadline: definition.timing.reset_deadline,
        })
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

fn seated(ready: &[(&Seat, Arc<Instrument>)], clock: Clock) -> Result<SerialBench, ConnectError> {
    let source = playing(ready, Role::Source, |definition| definition.source.clone())?;
    let ammeter = playing(ready, Role::Ammeter, |definition| definition.ammeter.clone())?;
    let instruments = ready
        .iter()
        .map(|(seat, instrument)| Asked {
            instrument: Arc::clone(instrument),
            readings: readings(&seat.definition, &seat.roles),
        })
        .collect();
    let range = ammeter.part.ranges.last().map(|range| range.full_scale);
    Ok(SerialBench { source, ammeter, instruments, clock, set: Volts::ZERO, range, watched: Duration::ZERO })
}

fn playing<Part>(
    ready: &[(&Seat, Arc<Instrument>)],
    role: Role,
    part: impl Fn(&Definition) -> Option<Part>,
) -> Result<Playing<Part>, ConnectError> {
    ready
        .iter()
        .filter(|(seat, _)| seat.roles.contains(&role))
        .find_map(|(seat, instrument)| {
            let timing = seat.definition.timing;
            Some(Playing { instrument: Arc::clone(instrument), part: part(&seat.definition)?, timing })
        })
        .ok_or(ConnectError::NoRole { role })
}
