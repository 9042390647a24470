//! A contact in the supply line that comes and goes: bursts of resistance at random times.

use super::draw::{Concern, Draw};
use crate::units::Ohms;

/// How long a burst lasts, s: what a loose pin does under vibration, common practice.
const BURST: (f64, f64) = (5e-3, 50e-3);

/// How long the contact is good between two bursts, s: a loose pin opens several times a second, common practice.
const PAUSE: (f64, f64) = (0.05, 0.3);

/// A contact that comes and goes.
#[derive(Clone, Debug)]
pub(super) struct Contact {
    bad: Ohms,
    is_bad: bool,
    until: f64,
    draw: Draw,
}

impl Contact {
    /// A contact that is good for now, and of `bad` more resistance during a burst.
    pub(super) fn new(bad: Ohms, seed: u64) -> Self {
        let mut draw = Draw::new(seed, Concern::Contact);
        Self { bad, is_bad: false, until: draw.in_window(PAUSE), draw }
    }

    /// Resistance that it adds at this moment, ohm.
    pub(super) fn resistance(&self) -> f64 {
        if self.is_bad { self.bad.0 } else { 0.0 }
    }

    /// When it changes next, s.
    pub(super) fn due(&self) -> f64 {
        self.until
    }

    /// Changes if the time has come; true when it did.
    pub(super) fn change_if_due(&mut self, now: f64) -> bool {
        if now < self.until {
            return false;
        }
        self.is_bad = !self.is_bad;
        self.until = now + self.draw.in_window(if self.is_bad { BURST } else { PAUSE });
        true
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bursts_are_short_and_far_between() {
        for seed in 0..20 {
            let mut contact = Contact::new(Ohms(1.5), seed);
            let mut bad = 0.0;
            let mut now = 0.0;
            while now < 1000.0 {
                let next = contact.due();
                bad += if contact.resistance() > 0.0 { next - now } else { 0.0 };
                now = next;
                assert!(contact.change_if_due(now), "seed {seed}");
            }
            // The means of the two draws: 27.5 ms in every 202.5 ms.
            assert!(
                (bad / now - 27.5 / 202.5).abs() < 0.01,
                "seed {seed}: bad for {} of the time",
                bad / now
            );
        }
    }
}
