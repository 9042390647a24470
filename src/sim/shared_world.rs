//! One world that several instruments act on at once, and the clock that moves it.

use super::World;
use std::sync::{Arc, Mutex, PoisonError};
use std::time::Duration;

/// Tells the simulated time and waits for it.
pub trait SimulationClock: Send + Sync {
    /// Simulated time since the bench was switched on; never decreases.
    fn now(&self) -> Duration;

    /// Returns when the simulated time has come.
    fn sleep_until(&self, time: Duration);
}

/// A handle on the world. Whoever looks at it first brings it up to the clock.
#[derive(Clone)]
pub struct SharedWorld {
    world: Arc<Mutex<World>>,
    clock: Arc<dyn SimulationClock>,
}

impl SharedWorld {
    /// Puts `world` under `clock`.
    pub fn new(world: World, clock: Arc<dyn SimulationClock>) -> Self {
        Self { world: Arc::new(Mutex::new(world)), clock }
    }

    /// Simulated time.
    pub fn now(&self) -> Duration {
        self.clock.now()
    }

    /// Lets simulated time pass for the caller.
    pub fn pass(&self, time: Duration) {
        if time > Duration::ZERO {
            self.clock.sleep_until(self.clock.now() + time);
        }
    }

    /// Looks at the world as it is now, or changes it.
    pub fn with<T>(&self, act: impl FnOnce(&mut World) -> T) -> T {
        // A panic elsewhere must not keep anybody from switching the output off.
        let mut world = self.world.lock().unwrap_or_else(PoisonError::into_inner);
        world.advance_to(self.clock.now());
        act(&mut world)
    }
}

/// A clock that jumps to wherever it is asked to wait for.
#[derive(Debug, Default)]
pub struct JumpingClock(Mutex<Duration>);

impl SimulationClock for JumpingClock {
    fn now(&self) -> Duration {
        *self.0.lock().unwrap_or_else(PoisonError::into_inner)
    }

    fn sleep_until(&self, time: Duration) {
        let mut now = self.0.lock().unwrap_or_else(PoisonError::into_inner);
        *now = time.max(*now);
    }
}
