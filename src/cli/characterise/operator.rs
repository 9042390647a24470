//! What is done by hand between cycles: boards, temperatures and loads are brought about, and told as measured.

use super::Ordered;
use crate::cli::{Exit, Failure, ask};
use crate::study::{Cycle, Place};
use crate::units::{Celsius, Ohms, Quantity, parse_quantity};
use std::collections::BTreeSet;
use std::io::IsTerminal;
use tokio::runtime::Runtime;

/// Whoever stands at the bench.
pub(super) struct Operator<'o, 'a> {
    ordered: &'o Ordered<'a>,
    asks: bool,
}

/// A place as it was brought about.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Measured {
    pub(super) temperature: Option<Celsius>,
    pub(super) load: Ohms,
}

/// The operator's answer.
pub(super) enum Answer {
    /// Everything is in place.
    Ready(Measured),
    /// The study is to stop here.
    Stop,
}

impl<'o, 'a> Operator<'o, 'a> {
    /// Simulated benches and `--yes` ask nothing.
    pub(super) fn new(ordered: &'o Ordered<'a>, yes: bool) -> Self {
        Self { ordered, asks: ordered.bench.is_some() && !yes }
    }

    /// True where somebody must do something or say something before the cycles at a place. A single board as it is in
    /// the fixture, with the load of the profile, needs nobody.
    fn is_needed(&self) -> bool {
        let plan = &self.ordered.heading.plan;
        let own_load = [self.ordered.profile.load.resistance];
        self.asks && (plan.places().count() > 1 || plan.temperatures[0].is_some() || plan.loads != own_load)
    }

    /// Nobody can be asked without a terminal: that is said before anything begins.
    pub(super) fn refuse_if_nobody_answers(&self, kept: &[Cycle]) -> Result<(), Failure> {
        let done: BTreeSet<_> = kept.iter().map(|cycle| cycle.order).collect();
        let is_over = self.ordered.heading.plan.orders().all(|order| done.contains(&order));
        if !self.is_needed() || is_over || std::io::stdin().is_terminal() {
            return Ok(());
        }
        Err(anyhow::anyhow!(
            "boards, temperatures or loads must be changed by hand, and standard input is no terminal at which to ask; \
             start this in a terminal, or give --yes where everything will be in place as ordered (measured values go \
             into a file for --conditions)"
        )
        .into())
    }

    /// Has a place brought about, and returns what was measured there.
    pub(super) fn bring_about(&self, place: Place) -> Result<Answer, Failure> {
        let plan = &self.ordered.heading.plan;
        let conditions = &self.ordered.conditions;
        let (degrees, load) = (plan.temperatures[place.temperature], plan.loads[place.load]);
        let as_ordered = Measured {
            temperature: conditions.measured_temperature(place.temperature).or(degrees),
            load: conditions.measured_load(place.load).unwrap_or(load),
        };
        if !self.is_needed() {
            return Ok(Answer::Ready(as_ordered));
        }
        let board = &plan.boards[place.board];
        let at = degrees.map_or(String::new(), |degrees| format!(", at {degrees}"));
        anstream::eprintln!(
            "\nput board {board} into the fixture{at}, with {load} behind its switch; Ctrl-C stops here"
        );
        let runtime = tokio::runtime::Builder::new_current_thread().enable_all().build()?;
        let mut measured = as_ordered;
        if let Some(degrees) =
            degrees.filter(|_| conditions.measured_temperature(place.temperature).is_none())
        {
            match value(&runtime, "temperature of the board as measured", degrees)? {
                Some(found) => measured.temperature = Some(found),
                None => return Ok(Answer::Stop),
            }
        }
        if conditions.measured_load(place.load).is_none() {
            match value(&runtime, "load as measured", load)? {
                Some(found) => measured.load = found,
                None => return Ok(Answer::Stop),
            }
        }
        if ask::line(&runtime, "press Enter when it is so: ")?.is_none() {
            return Ok(Answer::Stop);
        }
        Ok(Answer::Ready(measured))
    }
}

/// The exit code of a study stopped at a question: nothing was on.
pub(super) const STOPPED: Exit = Exit::Aborted;

/// Asks for a value until one is understood; nothing means as ordered. `None` when the operator stops.
fn value<Q: Quantity + std::fmt::Display>(
    runtime: &Runtime,
    what: &str,
    ordered: Q,
) -> Result<Option<Q>, Failure> {
    loop {
        let Some(answer) = ask::line(runtime, &format!("{what} (Enter for {ordered}): "))? else {
            return Ok(None);
        };
        if answer.trim().is_empty() {
            return Ok(Some(ordered));
        }
        match parse_quantity(answer.trim(), Q::UNIT) {
            Ok(value) => return Ok(Some(Q::from_si(value))),
            Err(error) => anstream::eprintln!("{error}"),
        }
    }
}
