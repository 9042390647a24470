//! What one set-point of a search takes on a bench in virtual time, s: from what the bench can do and the board's delays.

use ebbmark::procedure::Ability;
use ebbmark::profile::Profile;
use std::time::Duration;

/// An instrument's answer to one setting, in virtual time.
const RESPONSE: Duration = Duration::from_millis(2);

/// A board is waited for a quarter longer than its design allows, and a millisecond.
const WAITED: f64 = 1.25;
const AND: Duration = Duration::from_millis(1);

/// Down and up: to set, to settle, to wait for the board, to read. Upward steps of a supply that overshoots cost more;
/// such a bench has no figure here.
pub(crate) fn probe_cost(ability: &Ability, profile: &Profile) -> (f64, f64) {
    assert!(ability.overshoot <= 0.0, "wanted a supply that does not overshoot");
    let bench = RESPONSE + ability.settle + ability.read_time;
    let cost = |delay: Duration| (bench + delay.mul_f64(WAITED) + AND).as_secs_f64();
    (cost(profile.timing.detect_delay), cost(profile.timing.release_delay))
}
