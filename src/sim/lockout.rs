//! A load that stops by itself when its voltage falls too low, and starts again when it has recovered. While it runs, it
//! draws the same power at any voltage, as a converter does.

use crate::units::{Ohms, Volts};

/// A load with an undervoltage lockout.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Lockout {
    /// The voltage below which the load stops.
    pub stops: Volts,
    /// The voltage above which it starts again.
    pub starts: Volts,
    /// The voltage at which it draws what the board's resistor would.
    pub rated: Volts,
}

/// Voltages between which its current is taken as straight, as shares of that at which it stops: within 1 % of a constant
/// power up to the last, and the same current above.
const STRAIGHT: [f64; Lockout::KNOTS] = [1.0, 1.1, 1.25, 1.5];

impl Lockout {
    /// How many of them there are.
    pub(super) const KNOTS: usize = 4;

    /// The voltages at which its characteristic bends, V.
    pub(super) fn knots(self) -> [f64; Self::KNOTS] {
        STRAIGHT.map(|share| self.stops.0 * share)
    }

    /// What it draws at `volts` while it runs, A, in place of a resistor of `rated`. Below the voltage at which it stops, in
    /// proportion to it.
    pub(super) fn current(self, volts: f64, rated: Ohms) -> f64 {
        let power = self.rated.0 * self.rated.0 / rated.0;
        let knots = self.knots();
        let [first, .., last] = knots;
        if volts <= first {
            return power / first * (volts / first);
        }
        let between = knots.windows(2).find_map(|pair| match pair {
            [from, to] if volts <= *to => {
                let share = (volts - from) / (to - from);
                Some(power / from + (power / to - power / from) * share)
            }
            _ => None,
        });
        between.unwrap_or(power / last)
    }
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

    /// P = V I.
    #[test]
    fn while_it_runs_its_power_is_the_same_at_any_voltage() {
        let lockout = Lockout { stops: Volts(3.10), starts: Volts(3.16), rated: Volts(3.5) };
        for step in 0..=100 {
            let volts = 3.10 + 0.015 * f64::from(step);
            let power = lockout.current(volts, Ohms(10.0)) * volts;
            assert!((power / 1.225 - 1.0).abs() < 0.01, "{power} W at {volts} V");
        }
    }

    #[test]
    fn between_its_voltages_a_load_does_what_it_did_before() {
        let mut load =
            LoadState::new(Some(Lockout { stops: Volts(3.10), starts: Volts(3.16), rated: Volts(3.5) }));
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
