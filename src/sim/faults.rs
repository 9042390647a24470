//! Faults of a bench to inject: commands and replies lost, instruments gone, an operator who stops the run.
//!
//! What a loss leaves behind is told honestly: a lost command was never obeyed, a lost reply belongs to a command that
//! was. Some faults stay, so that switching the output off fails too.

use super::draw::{Concern, Draw};
use crate::trace::FaultKind;
use std::time::Duration;

/// Chances of a fault at one action between which a seed chooses, evenly in the logarithm.
const CHANCE: (f64, f64) = (1e-4, 0.1);

/// Share of the seeds whose run is stopped by the operator.
const ABORTED: f64 = 0.25;

/// Share of the faults that stay until the end of the run.
const LASTING: f64 = 0.2;

/// Faults that may strike at random; a lost link and a restart strike harder than the rest.
const KINDS: [FaultKind; 9] = [
    FaultKind::NoReply,
    FaultKind::BadReply,
    FaultKind::Overload,
    FaultKind::InstrumentError,
    FaultKind::NotTaken,
    FaultKind::Restarted,
    FaultKind::LinkLost,
    FaultKind::WrongInstrument,
    FaultKind::Internal,
];

/// What goes wrong with one action.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Mishap {
    /// The instrument never obeyed.
    CommandLost(FaultKind),
    /// The instrument obeyed, but nobody heard.
    ReplyLost(FaultKind),
}

/// A rule that decides which actions fail.
#[derive(Clone, Debug)]
pub struct Faults {
    draw: Draw,
    chance: f64,
    lasting: Option<Mishap>,
    abort_at: Option<Duration>,
}

impl Faults {
    /// Nothing ever fails.
    pub fn none() -> Self {
        Self { draw: Draw::new(0, Concern::Faults), chance: 0.0, lasting: None, abort_at: None }
    }

    /// Faults of any kind at any action, and for some seeds an operator who stops the run before `horizon`.
    pub fn random(seed: u64, horizon: Duration) -> Self {
        let mut draw = Draw::new(seed, Concern::Faults);
        let chance = draw.in_window((CHANCE.0.ln(), CHANCE.1.ln())).exp();
        let aborted = draw.chance(ABORTED);
        let abort_at = horizon.mul_f64(draw.in_window((0.0, 1.0)));
        Self { draw, chance, lasting: None, abort_at: aborted.then_some(abort_at) }
    }

    /// From the first action on, every command is lost with this fault.
    pub fn lasting(kind: FaultKind) -> Self {
        Self { lasting: Some(Mishap::CommandLost(kind)), ..Self::none() }
    }

    /// The operator stops the run at this time; nothing else fails.
    pub fn abort_at(at: Duration) -> Self {
        Self { abort_at: Some(at), ..Self::none() }
    }

    /// What goes wrong with the next action, if anything.
    pub fn strike(&mut self) -> Option<Mishap> {
        if self.lasting.is_some() {
            return self.lasting;
        }
        if !self.draw.chance(self.chance) {
            return None;
        }
        let kind = self.draw.one_of(&KINDS)?;
        let mishap = match kind {
            FaultKind::LinkLost | FaultKind::Restarted => Mishap::CommandLost(kind),
            _ if self.draw.chance(0.5) => Mishap::ReplyLost(kind),
            _ => Mishap::CommandLost(kind),
        };
        if kind == FaultKind::LinkLost || self.draw.chance(LASTING) {
            self.lasting = Some(mishap);
        }
        Some(mishap)
    }

    /// Takes the operator's stop if it comes before `until`.
    pub fn take_abort_before(&mut self, until: Duration) -> Option<Duration> {
        self.abort_at.take_if(|at| *at <= until)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_same_seed_strikes_the_same_way() {
        for seed in 0..50 {
            let strikes = |_| {
                let mut faults = Faults::random(seed, Duration::from_secs(10));
                (0..200).map(|_| faults.strike()).collect::<Vec<_>>()
            };
            assert_eq!(strikes(()), strikes(()), "seed {seed}");
        }
    }

    #[test]
    fn over_many_seeds_every_kind_strikes_with_and_without_being_obeyed() {
        let mut seen = Vec::new();
        for seed in 0..2000 {
            let mut faults = Faults::random(seed, Duration::from_secs(10));
            seen.extend((0..50).filter_map(|_| faults.strike()));
        }
        for kind in KINDS {
            assert!(seen.contains(&Mishap::CommandLost(kind)), "{kind:?} never loses a command");
        }
        assert!(seen.contains(&Mishap::ReplyLost(FaultKind::NoReply)));
    }

    #[test]
    fn a_lost_link_stays_lost() {
        for seed in 0..500 {
            let mut faults = Faults::random(seed, Duration::from_secs(10));
            let lost = (0..500).any(|_| faults.strike() == Some(Mishap::CommandLost(FaultKind::LinkLost)));
            if lost {
                let next = faults.strike();
                assert_eq!(next, Some(Mishap::CommandLost(FaultKind::LinkLost)), "seed {seed}");
            }
        }
    }

    #[test]
    fn the_operator_stops_a_run_only_once() {
        let mut faults = Faults::abort_at(Duration::from_secs(3));
        assert_eq!(faults.take_abort_before(Duration::from_secs(2)), None);
        assert_eq!(faults.take_abort_before(Duration::from_secs(4)), Some(Duration::from_secs(3)));
        assert_eq!(faults.take_abort_before(Duration::from_secs(5)), None);
    }
}
