//! How much longer a supply takes to settle the farther it has to go.

use super::seconds;
use crate::units::Volts;
use serde::{Deserialize, Serialize};
use std::time::Duration;

/// Time for each volt of a step, besides the fixed time to settle; none where a definition states none.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Slew {
    /// On the way up.
    #[serde(rename = "up_s_per_v", with = "seconds")]
    pub up: Duration,
    /// On the way down.
    #[serde(rename = "down_s_per_v", with = "seconds")]
    pub down: Duration,
}

impl Slew {
    /// Time on the way from one voltage to another.
    pub fn time(&self, from: Volts, to: Volts) -> Duration {
        let per_volt = if to > from { self.up } else { self.down };
        let volts = (to - from).abs().0;
        if volts.is_finite() { per_volt.mul_f64(volts) } else { Duration::ZERO }
    }

    /// True where a step takes no longer the farther it goes.
    pub fn is_none(&self) -> bool {
        *self == Self::default()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// By hand: 1.4 V at 50 ms for each volt.
    #[test]
    fn the_way_takes_its_time_in_either_direction() {
        let slew = Slew { up: Duration::from_millis(50), down: Duration::from_millis(200) };
        assert_eq!(slew.time(Volts(6.2), Volts(7.6)), Duration::from_millis(70));
        assert_eq!(slew.time(Volts(7.6), Volts(6.2)), Duration::from_millis(280));
        assert_eq!(slew.time(Volts(6.0), Volts(6.0)), Duration::ZERO);
        assert_eq!(slew.time(Volts(6.0), Volts(f64::NAN)), Duration::ZERO);
        assert_eq!(Slew::default().time(Volts(0.0), Volts(7.6)), Duration::ZERO);
    }
}
