//! A load that stops by itself when its voltage falls too low, and starts again when it has recovered.

use crate::units::Volts;

/// The undervoltage lockout of a load.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lockout {
    /// The voltage below which the load stops.
    pub stops: Volts,
    /// The voltage above which it starts again.
    pub starts: Volts,
}

/// A load that has stopped or started does nothing else for so long, s; common practice for a soft start.
const REST: f64 = 1e-3;

/// A lockout in motion; it does nothing where the load has none.
#[derive(Clone, Copy, Debug)]
pub(super) struct LoadState {
    lockout: Option<Lockout>,
    running: bool,
    /// Until when it does nothing else, s.
    rests: f64,
}

impl LoadState {
    /// A load without voltage: one with a lockout has stopped.
    pub(super) fn new(lockout: Option<Lockout>) -> Self {
        Self { lockout, running: lockout.is_none(), rests: 0.0 }
    }

    /// Whether it draws its current.
    pub(super) fn running(self) -> bool {
        self.running
    }

    /// The voltage at which it changes next.
    pub(super) fn edge(self) -> Option<f64> {
        self.lockout.map(|lockout| if self.running { lockout.stops.0 } else { lockout.starts.0 })
    }

    /// When it has rested, if it rests at `now`.
    pub(super) fn rested(self, now: f64) -> Option<f64> {
        (self.rests > now).then_some(self.rests)
    }

    /// Looks at the voltage it gets; true when it stops or starts.
    pub(super) fn change_at(&mut self, now: f64, volts: f64) -> bool {
        let Some(lockout) = self.lockout.filter(|_| now >= self.rests) else { return false };
        let before = self.running;
        self.running = if before { volts >= lockout.stops.0 } else { volts > lockout.starts.0 };
        if self.running != before {
            self.rests = now + REST;
        }
        self.running != before
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn between_its_voltages_a_load_does_what_it_did_before() {
        let mut load = LoadState::new(Some(Lockout { stops: Volts(3.10), starts: Volts(3.16) }));
        let mut now = 0.0;
        let states = [3.12, 3.17, 3.12, 3.09, 3.12].map(|volts| {
            now += 0.01;
            load.change_at(now, volts);
            load.running()
        });
        assert_eq!(states, [false, true, true, false, false]);
        assert!(LoadState::new(None).running());
    }
}
