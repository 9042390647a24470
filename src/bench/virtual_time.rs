//! A bench in virtual time: actions go straight to the simulated world, without text, ports or waiting.

use super::Bench;
use crate::procedure::{Ability, Action, Event};
use crate::sim::device::Kind;
use crate::sim::link_faults::LinkFaults;
use crate::sim::{Faults, Mishap, Setup, ShortReadings, World};
use crate::trace::{BenchFault, Burst, FaultKind, Sample};
use crate::units::{Quantity, Volts};
use std::pin::pin;
use std::task::{Context, Poll, Waker};
use std::time::Duration;

/// Time an instrument needs to obey and confirm one setting.
const RESPONSE: Duration = Duration::from_millis(2);

/// Time after which a missing reply is given up.
const REPLY_TIMEOUT: Duration = Duration::from_secs(1);

/// A simulated bench whose clock jumps.
#[derive(Clone, Debug)]
pub struct VirtualBench {
    world: World,
    ability: Ability,
    integration: Duration,
    faults: Faults,
    link: LinkFaults,
    /// Messages that would have been sent.
    messages: u64,
}

impl VirtualBench {
    /// A bench just switched on, with the roles that `ability` names.
    pub fn new(setup: &Setup, ability: Ability) -> Self {
        Self {
            world: World::new(setup),
            ability,
            integration: setup.ammeter.integration.max(setup.voltmeter.integration),
            faults: Faults::none(),
            link: LinkFaults::new(setup.link_faults.clone()),
            messages: 0,
        }
    }

    /// The same bench with faults.
    #[must_use]
    pub fn with_faults(self, faults: Faults) -> Self {
        Self { faults, ..self }
    }

    /// What it can do.
    pub fn ability(&self) -> &Ability {
        &self.ability
    }

    /// The world behind the bench.
    pub fn world(&self) -> &World {
        &self.world
    }

    /// Whether the supply's output is truly on.
    pub fn output_is_on(&self) -> bool {
        self.world.output()
    }

    /// Carries out one action with the faults that strike it.
    fn carry_out(&mut self, action: &Action) -> Event {
        let end = self.end_of(action);
        if let Some(at) = self.faults.take_abort_before(end) {
            self.world.advance_to(at);
            return Event::Abort;
        }
        // A pause asks nothing of any instrument.
        let mishap = match action {
            Action::WaitUntil(_) => None,
            _ => self.befalls(action).or_else(|| self.faults.strike()),
        };
        match mishap {
            None => self.obey(action, end),
            Some(Mishap::ReplyLost(kind)) => {
                self.obey(action, end);
                self.fail(kind)
            }
            Some(Mishap::CommandLost(kind)) => {
                if kind == FaultKind::Restarted {
                    self.world.restart_supply();
                }
                self.fail(kind)
            }
        }
    }

    /// What would befall the message that carries an action out over a line.
    fn befalls(&mut self, action: &Action) -> Option<Mishap> {
        let (instrument, text) = match action {
            Action::Read => (Kind::Ammeter, "READ?"),
            Action::Burst => (Kind::Voltmeter, "READ?"),
            Action::SetVolts(_) => (Kind::Supply, "VOLT "),
            Action::OutputOn | Action::OutputOff => (Kind::Supply, "OUTP "),
            Action::Range(_) => (Kind::Ammeter, "CURR:RANG "),
            Action::Protect { .. } | Action::LimitCurrent(_) => (Kind::Supply, "CURR "),
            Action::WaitUntil(_) | Action::Finish(_) => return None,
        };
        self.messages += 1;
        self.link.next(instrument, self.messages, text, self.world.now())?.mishap()
    }

    /// When an action without faults is over.
    fn end_of(&self, action: &Action) -> Duration {
        match action {
            Action::WaitUntil(until) => *until,
            Action::Read => self.now() + self.integration,
            Action::Burst => self.now() + ShortReadings::time(),
            Action::Finish(_) => self.now(),
            _ => self.now() + RESPONSE,
        }
    }

    fn obey(&mut self, action: &Action, end: Duration) -> Event {
        let world = &mut self.world;
        let confirmed = match action {
            Action::Protect { over_voltage, current_limit } => {
                world.set_over_voltage(*over_voltage);
                world.set_current_limit(*current_limit);
                taken("over-voltage level", *over_voltage, world.over_voltage())
                    .and_then(|()| taken("current limit", *current_limit, world.current_limit()))
            }
            Action::LimitCurrent(limit) => {
                world.set_current_limit(*limit);
                taken("current limit", *limit, world.current_limit())
            }
            Action::SetVolts(volts) => {
                world.set_volts(*volts);
                taken("voltage", *volts, world.volts())
            }
            Action::OutputOn => {
                world.set_output(true);
                Ok(())
            }
            Action::OutputOff => {
                world.set_volts(Volts::ZERO);
                world.set_output(false);
                Ok(())
            }
            Action::Range(current) => {
                world.set_range(*current);
                Ok(())
            }
            Action::Read => return Event::Reading(self.read(end)),
            Action::Burst => return self.burst(),
            Action::WaitUntil(_) | Action::Finish(_) => Ok(()),
        };
        world.advance_to(end);
        confirmed.map_or_else(Event::Failed, |()| Event::Done)
    }

    fn read(&mut self, end: Duration) -> Sample {
        let world = &mut self.world;
        let mark = world.mark();
        let at = world.now() + (end - world.now()) / 2;
        world.advance_to(end);
        Sample {
            at,
            set: world.volts(),
            sense: self.ability.voltmeter.then(|| world.read_sense(&mark)),
            current: world.read_current(&mark),
            load: self.ability.load_voltmeter.then(|| world.read_load(&mark)),
            range: Some(world.range()),
            limited: Some(world.limited()),
            was_limited: Some(world.take_was_limited()),
        }
    }

    fn burst(&mut self) -> Event {
        let world = &mut self.world;
        let mut readings = Vec::new();
        for _ in 0..Burst::LENGTH {
            let mark = world.mark();
            world.advance_to(world.now() + ShortReadings::APERTURE);
            readings.push(world.read_sense(&mark));
            world.advance_to(world.now() + ShortReadings::PAUSE);
        }
        Burst::of(ShortReadings::APERTURE, &readings)
            .map_or_else(|| self.fail(FaultKind::BadReply), Event::Burst)
    }

    fn fail(&mut self, kind: FaultKind) -> Event {
        let wait = if kind == FaultKind::NoReply { REPLY_TIMEOUT } else { RESPONSE };
        self.world.advance_to(self.world.now() + wait);
        let text =
            format!("simulated bench: injected fault {kind:?} at {:?}; repeat the run", self.world.now());
        Event::Failed(BenchFault { kind, text })
    }
}

impl Bench for VirtualBench {
    fn now(&self) -> Duration {
        self.world.now()
    }

    async fn perform(&mut self, action: &Action) -> Event {
        self.carry_out(action)
    }
}

/// Compares a setting with what the supply kept of it.
fn taken<Q: Quantity + std::fmt::Display>(what: &str, wanted: Q, kept: Q) -> Result<(), BenchFault> {
    let tolerance = 1e-3 + 1e-6 * wanted.si().abs();
    if (wanted.si() - kept.si()).abs() <= tolerance {
        return Ok(());
    }
    let text =
        format!("simulated supply: set {what} to {wanted}, reads back {kept}; choose a value it can keep");
    Err(BenchFault { kind: FaultKind::NotTaken, text })
}

/// Runs a future that is always ready, as all of a bench in virtual time are.
pub fn run_ready<F: Future>(future: F) -> F::Output {
    let mut future = pin!(future);
    let mut context = Context::from_waker(Waker::noop());
    loop {
        if let Poll::Ready(output) = future.as_mut().poll(&mut context) {
            return output;
        }
    }
}
