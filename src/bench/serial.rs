//! The bench of real time: carries actions out over serial ports, and confirms each one.
//!
//! It obeys and reports; what to do next, and what a reading means, is decided elsewhere. Instruments on different
//! ports are asked together, the roles of one instrument one after the other.

mod burst;
mod check;
mod connect;
mod make_safe;
mod reading;
mod settings;

pub use check::{Report, check};
pub use connect::{ConnectError, connect};
pub use make_safe::make_safe;

use crate::bench::Bench;
use crate::clock::Clock;
use crate::instrument::definition::{Ammeter, Source, Timing, Voltmeter};
use crate::instrument::error::InstrumentError;
use crate::instrument::port::{Answer, Instrument};
use crate::instrument::scpi::Identity;
use crate::instrument::session::Session;
use crate::procedure::{Action, Event};
use crate::trace::BenchFault;
use crate::units::{Amps, Volts};
use reading::Reading;
use std::sync::Arc;
use std::time::Duration;

/// The last stretch of a wait, slept through on the thread: the runtime's timer counts whole milliseconds and may be
/// late by two.
const TIMER_SLACK: Duration = Duration::from_millis(2);

/// Instruments that are connected, identified and set up.
pub struct SerialBench {
    source: Playing<Source>,
    ammeter: Playing<Ammeter>,
    /// The voltmeter at the board's terminals, where there is one.
    voltmeter: Option<Playing<Voltmeter>>,
    /// Every instrument once, with what it is asked for at each reading.
    instruments: Vec<Asked>,
    clock: Clock,
    /// The last voltage set and confirmed.
    set: Volts,
    /// Full scale of the ammeter's range, once set and confirmed.
    range: Option<Amps>,
    /// When the power-on bits were last looked at.
    watched: Duration,
}

/// An instrument in one of its roles.
struct Playing<Part> {
    instrument: Arc<Instrument>,
    part: Part,
    timing: Timing,
}

/// An instrument and its share of each reading.
struct Asked {
    instrument: Arc<Instrument>,
    identity: Identity,
    readings: Arc<[Reading]>,
}

impl Bench for SerialBench {
    fn now(&self) -> Duration {
        self.clock.now()
    }

    async fn perform(&mut self, action: &Action) -> Event {
        let outcome = match action {
            Action::Protect { over_voltage, current_limit } => {
                self.protect(*over_voltage, *current_limit).await
            }
            Action::LimitCurrent(limit) => self.limit_current(*limit).await,
            Action::SetVolts(volts) => self.set_volts(*volts).await,
            Action::OutputOn => self.output_on().await,
            Action::OutputOff => self.output_off().await,
            Action::Range(current) => self.put_on_range_for(*current).await,
            Action::Read => match self.read().await {
                Ok(sample) => return Event::Reading(sample),
                Err(error) => Err(error),
            },
            Action::Burst => match self.burst().await {
                Ok(burst) => return Event::Burst(burst),
                Err(error) => Err(error),
            },
            Action::WaitUntil(until) => {
                self.wait_until(*until).await;
                Ok(())
            }
            Action::Finish(_) => Ok(()),
        };
        match outcome {
            Ok(()) => Event::Done,
            Err(error) => Event::Failed(error.into()),
        }
    }
}

impl SerialBench {
    /// Who the instruments say they are, in the order of the bench file.
    pub fn identities(&self) -> impl Iterator<Item = &Identity> {
        self.instruments.iter().map(|asked| &asked.identity)
    }

    /// Begins the run of one board: time starts at zero, every link is proven in step, nothing may have restarted or
    /// wait in an error queue, and the ammeter stands on its largest range.
    ///
    /// # Errors
    /// The first instrument that is not fit for a run.
    pub async fn begin_run(&mut self) -> Result<(), BenchFault> {
        self.clock = self.clock.restarted();
        self.watched = Duration::ZERO;
        self.every_instrument(|session| {
            session.check_step()?;
            session.refuse_errors("the last run")
        })
        .await?;
        self.range = None;
        if let Some(largest) = self.ammeter.part.ranges.last() {
            self.put_on_range_for(largest.full_scale).await?;
        }
        Ok(())
    }

    /// Ends the run of one board: no instrument may have restarted or have anything to report, or what was measured
    /// cannot be relied on.
    ///
    /// # Errors
    /// The first instrument that restarted, reports an error, or does not answer.
    pub async fn end_run(&mut self) -> Result<(), BenchFault> {
        self.every_instrument(|session| session.refuse_errors("this run")).await?;
        Ok(())
    }

    /// Has every instrument do the same at once, and waits until the first fails or all are done.
    async fn every_instrument(
        &self,
        job: impl Fn(&mut Session) -> Result<(), InstrumentError> + Copy + Send + 'static,
    ) -> Result<(), InstrumentError> {
        let answers: Vec<Answer<()>> =
            self.instruments.iter().map(|asked| asked.instrument.ask(job)).collect();
        for answer in answers {
            answer.wait().await?;
        }
        Ok(())
    }

    async fn protect(&mut self, over_voltage: Volts, current_limit: Amps) -> Result<(), InstrumentError> {
        let source = &self.source;
        let settings =
            [settings::over_voltage(source, over_voltage)?, settings::current_limit(source, current_limit)?];
        source
            .instrument
            .ask(move |session| {
                settings.iter().try_for_each(|setting| session.set(setting))?;
                session.refuse_errors("the protection")
            })
            .wait()
            .await
    }

    async fn limit_current(&mut self, limit: Amps) -> Result<(), InstrumentError> {
        let setting = settings::current_limit(&self.source, limit)?;
        self.source.instrument.ask(move |session| session.set(&setting)).wait().await
    }

    async fn set_volts(&mut self, volts: Volts) -> Result<(), InstrumentError> {
        let setting = settings::voltage(&self.source, volts)?;
        self.source.instrument.ask(move |session| session.set(&setting)).wait().await?;
        self.set = volts;
        Ok(())
    }

    async fn output_on(&mut self) -> Result<(), InstrumentError> {
        let orders = settings::switch_off(&self.source.part);
        let command = self.source.part.commands.output_on.clone();
        self.source.instrument.ask(move |session| session.switch_on(&command, &orders)).wait().await
    }

    async fn output_off(&mut self) -> Result<(), InstrumentError> {
        let orders = settings::switch_off(&self.source.part);
        self.source.instrument.insist(move |session| session.switch_off(&orders)).wait().await?;
        self.set = Volts::ZERO;
        Ok(())
    }

    async fn put_on_range_for(&mut self, current: Amps) -> Result<(), InstrumentError> {
        let range = *self.ammeter.range_for(current)?;
        if self.range == Some(range.full_scale) {
            return Ok(());
        }
        // Given up half way, the meter may stand on either range.
        self.range = None;
        if let Some(setting) = settings::range(&self.ammeter.part, &range, self.ammeter.timing) {
            self.ammeter.instrument.ask(move |session| session.set(&setting)).wait().await?;
        }
        self.range = Some(range.full_scale);
        Ok(())
    }

    async fn wait_until(&self, until: Duration) {
        let left = || self.clock.wall(until.saturating_sub(self.clock.now()));
        let coarse = left().saturating_sub(TIMER_SLACK);
        if !coarse.is_zero() {
            tokio::time::sleep(coarse).await;
        }
        std::thread::sleep(left());
    }
}
