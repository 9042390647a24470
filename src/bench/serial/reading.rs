//! One reading of all roles: what is asked, and how the answers become a sample.

use super::SerialBench;
use crate::instrument::definition::{Definition, Role};
use crate::instrument::error::InstrumentError;
use crate::instrument::port::Answer;
use crate::instrument::scpi::Number;
use crate::instrument::session::Session;
use crate::trace::{Current, Sample};
use crate::units::{Amps, Volts};
use std::collections::BTreeSet;
use std::sync::Arc;
use std::time::Duration;

/// Bench time between looks at the power-on bits: a restart spoils at most this much of a run before it is noticed.
const WATCH_INTERVAL: Duration = Duration::from_secs(1);

/// One thing that is asked at each reading.
#[derive(Clone, Debug)]
pub(super) struct Reading {
    what: What,
    question: String,
    deadline: Duration,
}

/// What an answer means.
#[derive(Clone, Copy, Debug)]
enum What {
    Current,
    Sense,
    Load,
    /// A register; the current limit is active when any bit of the mask is set.
    Limited {
        mask: u32,
    },
    /// The same for any time since it was last read.
    WasLimited {
        mask: u32,
    },
}

/// The answers of one instrument, and when it was asked.
struct Answers {
    begun: Duration,
    ended: Duration,
    values: Vec<(What, Number)>,
}

/// What an instrument in these roles is asked at each reading: the current first, then what belongs to it.
pub(super) fn readings(definition: &Definition, roles: &BTreeSet<Role>) -> Arc<[Reading]> {
    let deadline = definition.timing.reply_deadline;
    let reading = |what, question: &str| Reading { what, question: question.to_owned(), deadline };
    let mut readings = Vec::new();
    if let Some(ammeter) = definition.ammeter.as_ref().filter(|_| roles.contains(&Role::Ammeter)) {
        readings.push(reading(What::Current, &ammeter.read));
    }
    if let Some(voltmeter) = &definition.voltmeter {
        if roles.contains(&Role::Voltmeter) {
            readings.push(reading(What::Sense, &voltmeter.read));
        }
        if roles.contains(&Role::LoadVoltmeter) {
            readings.push(reading(What::Load, &voltmeter.read));
        }
    }
    if let Some(source) = definition.source.as_ref().filter(|_| roles.contains(&Role::Source))
        && let Some(limited) = &source.commands.ask_limited
    {
        readings.push(reading(What::Limited { mask: limited.mask }, &limited.query));
        let since = limited.since.iter();
        readings.extend(since.map(|since| reading(What::WasLimited { mask: limited.mask }, since)));
    }
    readings.into()
}

impl SerialBench {
    /// Asks every instrument at once. The sample's time is the middle between the first question and the last answer.
    pub(super) async fn read(&mut self) -> Result<Sample, InstrumentError> {
        let clock = self.clock;
        let watch = clock.now().saturating_sub(self.watched) >= WATCH_INTERVAL;
        let asked = self.instruments.iter().filter(|asked| watch || !asked.readings.is_empty());
        let answers: Vec<Answer<Answers>> = asked
            .map(|asked| {
                let readings = Arc::clone(&asked.readings);
                asked.instrument.ask(move |session| {
                    let begun = clock.now();
                    let values = readings
                        .iter()
                        .map(|reading| Ok((reading.what, reading.take(session)?)))
                        .collect::<Result<_, InstrumentError>>()?;
                    let ended = clock.now();
                    if watch {
                        session.refuse_restart()?;
                    }
                    Ok(Answers { begun, ended, values })
                })
            })
            .collect();
        let mut all = Vec::with_capacity(answers.len());
        for answer in answers {
            all.push(answer.wait().await?);
        }
        if watch {
            self.watched = clock.now();
        }
        Ok(self.sample(&all))
    }

    fn sample(&self, all: &[Answers]) -> Sample {
        let asked = || all.iter().filter(|answers| !answers.values.is_empty());
        let begun = asked().map(|answers| answers.begun).min().unwrap_or_default();
        let ended = asked().map(|answers| answers.ended).max().unwrap_or_default();
        let mut sample = Sample {
            at: begun + ended.saturating_sub(begun) / 2,
            set: self.set,
            sense: None,
            current: Current::OVERLOAD,
            load: None,
            range: self.range,
            limited: None,
            was_limited: None,
        };
        for (what, number) in asked().flat_map(|answers| &answers.values) {
            match what {
                What::Current => {
                    sample.current =
                        number.value().map_or(Current::OVERLOAD, |amps| Current::Value(Amps(amps)));
                }
                What::Sense => sample.sense = number.value().map(Volts),
                What::Load => sample.load = number.value().map(Volts),
                What::Limited { mask } => {
                    sample.limited = number.value().map(|register| register as u32 & mask != 0);
                }
                What::WasLimited { mask } => {
                    sample.was_limited = number.value().map(|register| register as u32 & mask != 0);
                }
            }
        }
        sample
    }
}

impl Reading {
    /// Asks, and lets through only what the question can mean: of an ammeter a value or an overload, of all else a value.
    fn take(&self, session: &mut Session) -> Result<Number, InstrumentError> {
        let number = session.query_number_within(&self.question, self.deadline)?;
        match (self.what, number) {
            (What::Current, Number::Overload) | (_, Number::Value(_)) => Ok(number),
            (_, Number::Overload) => Err(InstrumentError::Overload {
                place: Arc::clone(session.place()),
                command: self.question.clone(),
            }),
            (_, Number::NotANumber) => Err(InstrumentError::BadReply {
                place: Arc::clone(session.place()),
                command: self.question.clone(),
                read: "not a number".to_owned(),
                wanted: "a reading",
            }),
        }
    }
}
