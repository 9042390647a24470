//! The detector: a comparator with hysteresis, a delay for each direction, and noise.

use super::draw::{Concern, Draw};
use super::{BoardModel, Ripple};

/// Beyond this many standard deviations noise is not followed: once in a billion draws.
const NOISE_REACH: f64 = 6.0;

/// Shortest delay that is played, s; it bounds how often a chattering board can change in a second.
const SHORTEST_DELAY: f64 = 10e-6;

/// A detector in motion.
///
/// Noise is played by survival: a voltage `z` standard deviations away from the threshold is crossed by noise with the
/// rate `noise_rate * Q(z)`, and the crossing comes when the integral of that rate reaches one exponential draw.
/// So the extreme grows with the time spent near the threshold, at the price of one draw a change.
#[derive(Clone, Debug)]
pub(super) struct Detector {
    trip: f64,
    re_enable: f64,
    detect_delay: f64,
    release_delay: f64,
    noise: f64,
    noise_rate: f64,
    draw: Draw,
    on: bool,
    /// Voltage below which a latched board forgets that it has tripped; `None` for one that does not latch.
    forgets_below: Option<f64>,
    locked: bool,
    pending: Option<Pending>,
    patience: f64,
}

/// A change of state that comes when its delay has passed.
#[derive(Clone, Copy, Debug)]
struct Pending {
    due: f64,
    /// How far back over the threshold the voltage must come to call it off, V.
    margin: f64,
}

impl Detector {
    /// A detector without supply: the board is off. Hum on its supply moves its thresholds.
    pub(super) fn new(board: &BoardModel, ripple: Option<Ripple>, seed: u64) -> Self {
        let mut draw = Draw::new(seed, Concern::DetectorNoise);
        Self {
            trip: board.trip.0 + ripple.map_or(0.0, |ripple| ripple.trip_shift(board.detect_delay)),
            re_enable: board.re_enable().0 - ripple.map_or(0.0, |ripple| ripple.re_enable_shift()),
            detect_delay: board.detect_delay.as_secs_f64().max(SHORTEST_DELAY),
            release_delay: board.release_time().as_secs_f64().max(SHORTEST_DELAY),
            noise: board.noise.0,
            noise_rate: board.noise_rate,
            patience: draw.exponential(),
            draw,
            on: false,
            forgets_below: board.latches.then(|| board.lowest_operating()),
            locked: false,
            pending: None,
        }
    }

    /// Whether it says that the board is on.
    pub(super) fn on(&self) -> bool {
        self.on
    }

    /// Puts it into a state, as one finds it.
    pub(super) fn start_as(&mut self, on: bool) {
        self.on = on;
        self.pending = None;
    }

    /// How far `volts` lies on the side where nothing happens; negative beyond the threshold.
    fn clearance(&self, volts: f64) -> f64 {
        match (self.on, self.locked) {
            (true, _) => volts - self.trip,
            (false, false) => self.re_enable - volts,
            (false, true) => f64::INFINITY,
        }
    }

    /// Voltages at which what it does may change.
    pub(super) fn edges(&self) -> [f64; 2] {
        let reach = NOISE_REACH * self.noise;
        match (self.on, self.forgets_below.filter(|_| self.locked)) {
            (true, _) => [self.trip, self.trip + reach],
            (false, None) => [self.re_enable, self.re_enable - reach],
            (false, Some(volts)) => [volts, volts],
        }
    }

    /// Looks at a settled or passing voltage at time `now`: starts or calls off a change.
    pub(super) fn look(&mut self, now: f64, volts: f64) {
        self.locked &= self.forgets_below.is_some_and(|forgets_below| volts >= forgets_below);
        let clearance = self.clearance(volts);
        match self.pending {
            Some(pending) if clearance >= pending.margin => self.pending = None,
            None if clearance < 0.0 => self.start(now, 0.0),
            _ => {}
        }
    }

    /// When the pending change is due.
    pub(super) fn due(&self) -> Option<f64> {
        self.pending.map(|pending| pending.due)
    }

    /// Makes the pending change if its time has come; true when the state changed.
    pub(super) fn change_if_due(&mut self, now: f64) -> bool {
        let due = self.pending.is_some_and(|pending| now >= pending.due);
        if due {
            self.on = !self.on;
            self.locked = !self.on && self.forgets_below.is_some();
            self.pending = None;
        }
        due
    }

    /// Crossings by noise in a second at this voltage; zero where noise does not reach or a change is pending.
    pub(super) fn noise_crossings(&self, volts: f64) -> f64 {
        if self.noise <= 0.0 || self.pending.is_some() {
            return 0.0;
        }
        let deviations = self.clearance(volts) / self.noise;
        if (0.0..NOISE_REACH).contains(&deviations) { self.noise_rate * upper_tail(deviations) } else { 0.0 }
    }

    /// Seconds until noise crosses the threshold if the voltage stays.
    pub(super) fn time_to_crossing(&self, crossings: f64) -> f64 {
        if crossings > 0.0 { self.patience / crossings } else { f64::INFINITY }
    }

    /// Spends `time` at a rate of crossings; starts a change when noise has crossed.
    pub(super) fn endure(&mut self, now: f64, crossings: f64, time: f64) {
        if crossings <= 0.0 {
            return;
        }
        self.patience -= crossings * time;
        if self.patience <= 1e-12 {
            self.patience = self.draw.exponential();
            self.start(now, NOISE_REACH * self.noise);
        }
    }

    fn start(&mut self, now: f64, margin: f64) {
        let delay = if self.on { self.detect_delay } else { self.release_delay };
        self.pending = Some(Pending { due: now + delay, margin });
    }
}

/// Share of a normal distribution above `z` deviations, for `z >= 0`.
///
/// The rational approximation 26.2.17 of Abramowitz and Stegun, Handbook of Mathematical Functions; its error of
/// 7.5e-8 is far below what matters for a rate of crossings.
fn upper_tail(z: f64) -> f64 {
    let t = 1.0 / (1.0 + 0.231_641_9 * z);
    let density = (-z * z / 2.0).exp() / (2.0 * std::f64::consts::PI).sqrt();
    let polynomial = t
        * (0.319_381_530
            + t * (-0.356_563_782 + t * (1.781_477_937 + t * (-1.821_255_978 + t * 1.330_274_429))));
    (density * polynomial).max(0.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_upper_tail_agrees_with_the_tables_of_the_normal_distribution() {
        for (z, tail) in [(0.0, 0.5), (1.0, 0.158_655), (1.96, 0.024_998), (3.0, 0.001_349_9)] {
            assert!((upper_tail(z) - tail).abs() < 1e-6, "at {z}: {}", upper_tail(z));
        }
    }
}
