//! Before a run: whether the supply can charge what hangs behind the switch before the board takes the dip for an empty
//! battery.
//!
//! When the switch closes, the supply limits the current and the voltage at the terminals is that of the capacitor until
//! it is charged. A board whose detector is faster trips again: it comes on in bursts or never, and that is the bench's
//! doing.

use crate::profile::{Profile, QuantityName};
use crate::units::{Amps, Farads, Volts};
use std::time::Duration;

/// A dip at the re-enable that outlasts the detect delay.
#[derive(Clone, Copy, Debug, PartialEq, thiserror::Error)]
#[error(
    "load.capacitance of {capacitance} takes {:.1} ms to charge to {to} with supply.current_limit at {limit}, longer than \
     timing.detect_delay, {:.1} ms: the board may trip again at every re-enable. {} a capacitor \
     of several times as much across the board's terminals",
    charging.as_secs_f64() * 1e3,
    detect_delay.as_secs_f64() * 1e3,
    advice(*wanted)
)]
pub struct Inrush {
    /// Capacitance behind the switch.
    pub capacitance: Farads,
    /// The voltage it is charged to.
    pub to: Volts,
    /// The supply's current limit.
    pub limit: Amps,
    /// How long that takes, the load drawing its current meanwhile.
    pub charging: Duration,
    /// The board's longest delay.
    pub detect_delay: Duration,
    /// The current limit that would do; `None` where no sensible one does.
    pub wanted: Option<Amps>,
}

fn advice(wanted: Option<Amps>) -> String {
    wanted.map_or_else(
        || "Put".to_owned(),
        |limit| format!("Raise the current limit to {limit} or more, or put"),
    )
}

/// The largest current limit that is advised: the scope of this program.
const LARGEST_LIMIT: Amps = Amps(5.0);

/// What is wrong, where the profile states the capacitance and the supply cannot charge it in time. The voltage is the
/// highest the board may come back at, the delay the longest it may have: a faster board is worse off.
pub fn inrush(profile: &Profile) -> Option<Inrush> {
    let capacitance = profile.load.capacitance?;
    let re_enable = profile.limits.get(&QuantityName::ReEnable).and_then(|limit| limit.max.or(limit.min));
    let to = re_enable.map_or(profile.supply.start, Volts);
    let (limit, detect_delay) = (profile.supply.current_limit, profile.timing.detect_delay);
    let drawn = to / profile.load.resistance;
    let charging = charging(capacitance, to, drawn, limit);
    if charging <= detect_delay.as_secs_f64() {
        return None;
    }
    let wanted = enough(capacitance, to, drawn, detect_delay);
    Some(Inrush {
        capacitance,
        to,
        limit,
        charging: Duration::try_from_secs_f64(charging).unwrap_or(Duration::MAX),
        detect_delay,
        wanted: wanted.filter(|wanted| *wanted <= LARGEST_LIMIT),
    })
}

/// Seconds until a constant `limit` has charged the capacitor to `to` with a resistor beside it that draws `drawn` there:
/// `t = -R C ln(1 - drawn / limit)`, the charge of an RC element towards `R * limit`. Endless where the resistor takes
/// everything.
fn charging(capacitance: Farads, to: Volts, drawn: Amps, limit: Amps) -> f64 {
    let share = drawn.0 / limit.0;
    if share >= 1.0 {
        return f64::INFINITY;
    }
    let time_constant = to.0 / drawn.0 * capacitance.0;
    -time_constant * (-share).ln_1p()
}

/// The current limit that charges it within `time`: the same law solved for the limit.
fn enough(capacitance: Farads, to: Volts, drawn: Amps, time: Duration) -> Option<Amps> {
    let time_constant = to.0 / drawn.0 * capacitance.0;
    let reached = -(-time.as_secs_f64() / time_constant).exp_m1();
    (reached > 0.0).then(|| Amps(drawn.0 / reached))
}

#[cfg(test)]
mod tests {
    use super::*;
    use insta::assert_snapshot as says;

    fn river_node() -> Profile {
        Profile::read("river-node.toml", include_str!("../../profiles/river-node.toml"))
            .expect("a good profile")
    }

    /// The river node with this capacitance and detect delay.
    fn profile(capacitance: f64, detect_delay: Duration) -> Profile {
        let mut profile = river_node();
        profile.load.capacitance = Some(Farads(capacitance));
        profile.timing.detect_delay = detect_delay;
        profile
    }

    /// A load that draws next to nothing leaves the whole limit to the capacitor: t = C V / I, here 47 uF x 6 V / 1 A.
    #[test]
    fn without_a_load_the_charge_is_the_limit_times_the_time() {
        let time = charging(Farads(47e-6), Volts(6.0), Amps(1e-9), Amps(1.0));
        assert!((time - 47e-6 * 6.0).abs() < 1e-9, "{time}");
    }

    /// After one time constant an RC element is at 1 - 1/e of where it goes (any handbook of electrical engineering).
    #[test]
    fn with_a_load_it_charges_as_an_rc_element() {
        let (to, load) = (Volts(6.0), 60.0);
        let limit = Amps(0.1 / (1.0 - (-1.0_f64).exp()));
        let time = charging(Farads(100e-6), to, to / crate::units::Ohms(load), limit);
        assert!((time - load * 100e-6).abs() < 1e-12, "{time}");
        assert!(charging(Farads(1e-6), to, Amps(0.1), Amps(0.1)).is_infinite());
    }

    #[test]
    fn the_limit_that_is_advised_just_does() {
        let mut raised = profile(470e-6, Duration::from_millis(5));
        let found = inrush(&raised).expect("too much to charge");
        raised.supply.current_limit = found.wanted.expect("a sensible one") * 1.0001;
        assert_eq!(inrush(&raised), None);
        raised.supply.current_limit = found.wanted.expect("a sensible one") * 0.999;
        assert!(inrush(&raised).is_some());
    }

    #[test]
    fn what_cannot_be_charged_in_time_is_told_with_what_to_do() {
        assert_eq!(inrush(&profile(10e-6, Duration::from_millis(5))), None);
        assert_eq!(inrush(&river_node()), None, "nothing is said of a capacitance");
        let told = |capacitance, delay| inrush(&profile(capacitance, delay)).expect("too much").to_string();
        says!(told(470e-6, Duration::from_millis(5)), @"load.capacitance of 470.0 µF takes 10.8 ms to charge to 6.560 V with supply.current_limit at 350.0 mA, longer than timing.detect_delay, 5.0 ms: the board may trip again at every re-enable. Raise the current limit to 678.2 mA or more, or put a capacitor of several times as much across the board's terminals");
        says!(told(470e-6, Duration::from_micros(300)), @"load.capacitance of 470.0 µF takes 10.8 ms to charge to 6.560 V with supply.current_limit at 350.0 mA, longer than timing.detect_delay, 0.3 ms: the board may trip again at every re-enable. Put a capacitor of several times as much across the board's terminals");
    }
}
