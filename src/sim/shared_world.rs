//! One world that several instruments act on at once, and the clock that moves it.

use super::World;
use std::sync::{Arc, Mutex, MutexGuard, PoisonError};
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
        let mut world = lock(&self.world);
        world.advance_to(self.clock.now());
        act(&mut world)
    }
}

/// Locks, even after a panic elsewhere: that must not keep anybody from switching the output off.
pub(super) fn lock<T>(mutex: &Mutex<T>) -> MutexGuard<'_, T> {
    mutex.lock().unwrap_or_else(PoisonError::into_inner)
}

/// A clock that jumps to wherever it is asked to wait for.
#[derive(Debug, Default)]
pub struct JumpingClock(Mutex<Duration>);

impl SimulationClock for JumpingClock {
    fn now(&self) -> Duration {
        *lock(&self.0)
    }

    fn sleep_until(&self, time: Duration) {
        let mut now = lock(&self.0);
        *now = time.max(*now);
    }
}
