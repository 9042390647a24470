//! Randomness from a seed: one stream a concern, so that a draw added to one leaves the others alone.

use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;

/// What a stream of random numbers is used for.
#[derive(Clone, Copy, Debug)]
pub(super) enum Concern {
    Board = 0,
    Supply = 1,
    MeterErrors = 2,
    MeterNoise = 3,
    DetectorNoise = 4,
    Faults = 5,
    MeterInputs = 6,
    Contact = 7,
    Conditions = 8,
    OffPaths = 9,
    NoiseLevel = 10,
}

/// The stream of one concern.
#[derive(Clone, Debug)]
pub(super) struct Draw(ChaCha8Rng);

impl Draw {
    /// The stream of `concern` under `seed`.
    pub(super) fn new(seed: u64, concern: Concern) -> Self {
        let mut generator = ChaCha8Rng::seed_from_u64(seed);
        generator.set_stream(concern as u64);
        Self(generator)
    }

    /// Uniform between `low` and `high`.
    pub(super) fn between(&mut self, low: f64, high: f64) -> f64 {
        low + (high - low) * self.0.random::<f64>()
    }

    /// Uniform in a window of low and high.
    pub(super) fn in_window(&mut self, (low, high): (f64, f64)) -> f64 {
        self.between(low, high)
    }

    /// Uniform between minus and plus `half_width`.
    pub(super) fn within(&mut self, half_width: f64) -> f64 {
        self.between(-half_width, half_width)
    }

    /// Normal, mean zero and standard deviation one.
    pub(super) fn normal(&mut self) -> f64 {
        self.0.sample(rand_distr::StandardNormal)
    }

    /// Exponential, mean one.
    pub(super) fn exponential(&mut self) -> f64 {
        -(-self.0.random::<f64>()).ln_1p()
    }

    /// True with this probability.
    pub(super) fn chance(&mut self, probability: f64) -> bool {
        self.0.random::<f64>() < probability
    }

    /// One of some, all equally likely; `None` of none.
    pub(super) fn one_of<T: Copy>(&mut self, all: &[T]) -> Option<T> {
        let index = (self.0.random::<f64>() * all.len() as f64) as usize;
        all.get(index).copied()
    }
}
