//! The one place where the program asks what time it is while a run goes on.
//!
//! A clock may run faster than the wall: on a bench of simulated instruments, `speed` seconds pass in each second of
//! the wall, for the instruments and for the procedure alike.

use std::time::{Duration, Instant};

/// A monotonic clock that began at zero. Copies run on together.
#[derive(Clone, Copy, Debug)]
pub struct Clock {
    origin: Instant,
    speed: f64,
}

impl Clock {
    /// Starts at zero and runs with the wall; the only clock for real instruments.
    pub fn real() -> Self {
        Self::faster(1.0)
    }

    /// Starts at zero and runs `speed` times as fast as the wall. What is not a positive finite number counts as 1.
    pub fn faster(speed: f64) -> Self {
        #[expect(clippy::disallowed_methods, reason = "this is the clock")]
        let origin = Instant::now();
        Self { origin, speed: if speed.is_finite() && speed > 0.0 { speed } else { 1.0 } }
    }

    /// A clock of the same speed that starts at zero.
    pub fn restarted(&self) -> Self {
        Self::faster(self.speed)
    }

    /// Time on this clock since it started.
    pub fn now(&self) -> Duration {
        // `elapsed` of a monotonic instant; at speed 1 the time is passed on exactly.
        scaled(self.origin.elapsed(), self.speed)
    }

    /// How long `span` on this clock lasts on the wall.
    pub fn wall(&self, span: Duration) -> Duration {
        scaled(span, 1.0 / self.speed)
    }

    /// Seconds of this clock in a second of the wall.
    pub fn speed(&self) -> f64 {
        self.speed
    }
}

/// `time` times `factor`, or the longest time there is.
fn scaled(time: Duration, factor: f64) -> Duration {
    #[expect(clippy::float_cmp, reason = "exactly one means: leave the nanoseconds alone")]
    if factor == 1.0 {
        return time;
    }
    Duration::try_from_secs_f64(time.as_secs_f64() * factor).unwrap_or(Duration::MAX)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_fast_clock_shortens_waits_and_stretches_time() {
        let clock = Clock::faster(100.0);
        assert_eq!(clock.wall(Duration::from_secs(1)), Duration::from_millis(10));
        std::thread::sleep(Duration::from_millis(2));
        assert!(clock.now() >= Duration::from_millis(200));
    }

    #[test]
    fn a_speed_without_meaning_is_real_time() {
        for speed in [0.0, -1.0, f64::NAN, f64::INFINITY] {
            assert_eq!(Clock::faster(speed).wall(Duration::from_secs(3)), Duration::from_secs(3));
        }
        assert_eq!(Clock::faster(1e-300).wall(Duration::MAX), Duration::MAX);
    }
}
