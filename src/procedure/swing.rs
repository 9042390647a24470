//! Before a run: whether a board can come to rest on this bench at all.
//!
//! When the switch closes, the load's current drops a voltage in leads and ammeter, and the terminals fall by it; when it
//! opens, they rise. A swing as large as the hysteresis takes the board from one threshold to the other: it chatters.

use super::Misfit;
use crate::profile::{Profile, QuantityName};
use crate::units::{Ohms, Volts};

/// Largest share of the hysteresis that the swing may take; the analysis holds what it measures against the same.
const SHARE: f64 = 0.5;

/// A swing too large for the least hysteresis the limits of `profile` allow, with `source` between supply and board.
/// `None` where the limits do not tell a hysteresis.
pub fn swing(profile: &Profile, source: Ohms) -> Option<Misfit> {
    let limit = |name| profile.limits.get(&name);
    let hysteresis =
        limit(QuantityName::Hysteresis).and_then(|limit| limit.min).map(Volts).or_else(|| {
            let (trip, re_enable) = (limit(QuantityName::Trip)?.max?, limit(QuantityName::ReEnable)?.min?);
            Some(Volts(re_enable - trip))
        })?;
    let at = limit(QuantityName::ReEnable).and_then(|limit| limit.max).map_or(profile.supply.start, Volts);
    let current = profile.load.most_current(at);
    let swing = current * source;
    let restless = hysteresis > Volts::ZERO && swing > hysteresis * SHARE;
    restless.then(|| Misfit::Swing {
        between: source,
        current,
        swing,
        hysteresis,
        most: hysteresis * SHARE / current,
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use insta::assert_snapshot as says;

    fn river_node() -> Profile {
        Profile::read("river-node.toml", include_str!("../../profiles/river-node.toml"))
            .expect("a good profile")
    }

    /// 6.56 V across 55 ohm less 1 % are 120.5 mA; half of 300 mV over that is 1.245 ohm.
    #[test]
    fn leads_that_swing_the_terminals_by_more_than_half_the_hysteresis_are_refused() {
        assert_eq!(swing(&river_node(), Ohms(1.24)), None);
        says!(swing(&river_node(), Ohms(1.25)).expect("too much"), @"1.250 Ω of leads and ammeter move the terminals by 150.6 mV when a board switches 120.5 mA, and one of 300.0 mV hysteresis rests only while that is less than half of it; wanted 1.245 Ω or less: shorten the leads, clean the contacts, or take a load that draws less");
    }

    #[test]
    fn without_a_limit_of_its_own_the_hysteresis_is_what_the_thresholds_leave() {
        let mut profile = river_node();
        profile.limits.remove(&QuantityName::Hysteresis);
        // 6.24 V less 6.12 V.
        assert_eq!(swing(&profile, Ohms(0.49)), None);
        assert!(swing(&profile, Ohms(0.51)).is_some());
        profile.limits.clear();
        assert_eq!(swing(&profile, Ohms(10.0)), None);
    }
}
