//! Where the script of a run and its bench meet: the script lays down an action, the bench lays down what came of it.

use super::progress::{Progress, Stage};
use super::{Action, Event, Plan};
use crate::trace::{BenchFault, FaultKind, Sample, Stop};
use crate::units::{Amps, Volts};
use std::cell::{Cell, RefCell};
use std::future::poll_fn;
use std::task::Poll;
use std::time::Duration;

pub(super) struct Desk {
    maximum: Volts,
    back_feed: Amps,
    now: Cell<Duration>,
    /// The set-point before the present one, and that.
    step: Cell<(Volts, Volts)>,
    event: RefCell<Option<Event>>,
    action: RefCell<Option<Action>>,
    progress: Cell<Progress>,
}

impl Desk {
    pub(super) fn new(plan: &Plan) -> Self {
        Self::within(plan.maximum, plan.on_zero())
    }

    /// No set-point goes above `maximum`, and less than `zero` out of the board is no current.
    pub(super) fn within(maximum: Volts, zero: Amps) -> Self {
        Self {
            maximum,
            back_feed: -zero.max(LEAST_BACK_FEED),
            now: Cell::new(Duration::ZERO),
            step: Cell::new((Volts::ZERO, Volts::ZERO)),
            event: RefCell::new(None),
            action: RefCell::new(None),
            progress: Cell::new(Progress::at_start()),
        }
    }

    /// The bench's side: what came of the last action, and when.
    pub(super) fn put(&self, now: Duration, event: Event) {
        self.now.set(now);
        self.event.replace(Some(event));
    }

    /// The bench's side: the next action. A script that waits without asking for anything has gone astray: switch off.
    pub(super) fn take_action(&self) -> Action {
        self.action.take().unwrap_or(Action::OutputOff)
    }

    /// How far the run has come.
    pub(super) fn progress(&self) -> Progress {
        self.progress.get()
    }

    /// Time since the start of the run, as of the last event.
    pub(super) fn now(&self) -> Duration {
        self.now.get()
    }

    /// Notes that `stage` begins and how long the run should take from here.
    pub(super) fn enter(&self, stage: Stage, left: Duration) {
        self.progress.set(Progress { stage, since: self.now(), left });
    }

    /// Waits for the first event of the run.
    pub(super) async fn begin(&self) {
        self.answer().await;
    }

    /// Lays down one action and waits for what came of it.
    pub(super) async fn perform(&self, action: Action) -> Event {
        self.action.replace(Some(action));
        self.answer().await
    }

    /// Does something that answers [`Event::Done`].
    pub(super) async fn order(&self, action: Action) -> Result<(), Stop> {
        let sets = match action {
            Action::SetVolts(volts) => Some(volts),
            Action::OutputOff => Some(Volts::ZERO),
            _ => None,
        };
        match self.perform(action).await {
            Event::Done => {
                if let Some(volts) = sets {
                    self.step.set((self.step.get().1, volts));
                }
                Ok(())
            }
            other => Err(refusal(other)),
        }
    }

    /// Sets the supply's voltage. A set-point above the profile's maximum never leaves this room.
    pub(super) async fn set(&self, volts: Volts) -> Result<(), Stop> {
        if volts <= self.maximum {
            return self.order(Action::SetVolts(volts)).await;
        }
        let text = format!("the procedure asked for {volts}, above the profile's maximum {}", self.maximum);
        Err(Stop::Fault(BenchFault { kind: FaultKind::Internal, text }))
    }

    /// Lets the last step settle, and `more` time pass.
    pub(super) async fn settle(&self, plan: &Plan, more: Duration) -> Result<(), Stop> {
        let (from, to) = self.step.get();
        self.wait(plan.settle + plan.slew.time(from, to) + more).await
    }

    /// Lets time pass.
    pub(super) async fn wait(&self, time: Duration) -> Result<(), Stop> {
        self.order(Action::WaitUntil(self.now() + time)).await
    }

    /// Reads all roles. Current out of the board ends the run: something else feeds it.
    pub(super) async fn read(&self) -> Result<Sample, Stop> {
        match self.perform(Action::Read).await {
            Event::Reading(sample) => match sample.current.amps() {
                Some(current) if current < self.back_feed => {
                    Err(Stop::BackFeed { at: sample.terminals(), current })
                }
                _ => Ok(sample),
            },
            other => Err(refusal(other)),
        }
    }

    /// Has the voltage at the board read in quick succession; what that shows goes into the trace.
    pub(super) async fn burst(&self) -> Result<(), Stop> {
        match self.perform(Action::Burst).await {
            Event::Burst(_) => Ok(()),
            other => Err(refusal(other)),
        }
    }

    async fn answer(&self) -> Event {
        poll_fn(|_| match self.event.take() {
            Some(event) => Poll::Ready(event),
            None => Poll::Pending,
        })
        .await
    }
}

/// Less current out of the board than this is left to the analysis: it harms nothing.
const LEAST_BACK_FEED: Amps = Amps(1e-3);

fn refusal(event: Event) -> Stop {
    match event {
        Event::Abort => Stop::Aborted,
        Event::Failed(fault) => Stop::Fault(fault),
        other => {
            let text = format!("the bench answered {other:?}, which does not belong to the action before it");
            Stop::Fault(BenchFault { kind: FaultKind::Internal, text })
        }
    }
}
