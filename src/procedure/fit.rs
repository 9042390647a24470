//! Whether a bench can do what a profile asks for, before anything is switched on.

use super::Ability;
use crate::profile::{Profile, QuantityName, Ramp};
use crate::units::{Amps, Ohms, Volts};

/// Largest share of the off current's limit that the meter's standard uncertainty may take: with k = 2 the limit is
/// then twice the expanded uncertainty, the least at which a judgement means anything. Common practice asks for more.
const OFF_UNCERTAINTY_SHARE: f64 = 0.25;

/// Something a profile asks for that a bench cannot do.
#[derive(Clone, Debug, PartialEq, thiserror::Error)]
pub enum Misfit {
    /// The supply does not reach the profile's maximum.
    #[error(
        "the profile's maximum is {maximum}, the supply goes to {highest}; take a supply of higher voltage"
    )]
    Maximum {
        /// What the profile allows.
        maximum: Volts,
        /// What the supply can be set to.
        highest: Volts,
    },
    /// The supply cannot be limited to the profile's current.
    #[error(
        "the profile's current limit is {limit}, the supply's is {lowest} to {highest}; take another supply"
    )]
    CurrentLimit {
        /// What the profile asks for.
        limit: Amps,
        /// Lowest limit of the supply.
        lowest: Amps,
        /// Highest limit of the supply.
        highest: Amps,
    },
    /// No range of the ammeter holds the current limit.
    #[error(
        "the current limit is {limit}, the ammeter's largest range {largest}; lower the limit or take another meter"
    )]
    OnCurrent {
        /// What may flow.
        limit: Amps,
        /// Full scale of the largest range.
        largest: Amps,
    },
    /// The ammeter's smallest range is too coarse for the limit of the off current.
    #[error(
        "an off current limited to {limit} needs a standard uncertainty of {wanted} or less, the ammeter's is \
         {uncertainty} on its smallest range; take a meter with a smaller range or remove limits.off_current"
    )]
    OffCurrent {
        /// The limit.
        limit: Amps,
        /// The largest uncertainty that can still judge it.
        wanted: Amps,
        /// What the meter has.
        uncertainty: Amps,
    },
    /// The profile limits the on-resistance, and no voltmeter sits at the load.
    #[error(
        "limits.on_resistance needs a voltmeter at the terminals and a load_voltmeter; add them or remove the limit"
    )]
    OnResistance,
    /// The profile lifts the board after its trip, and no voltmeter says what stands at its terminals.
    #[error(
        "pack.rebound_hold needs a voltmeter at the board's terminals, for the drop in the leads vanishes at the trip; add one or \
         remove the hold"
    )]
    ReboundHold,
    /// Leads and ammeter move the board's terminals too far when it switches.
    #[error(
        "{between} of leads and ammeter move the terminals by {swing} when a board switches {current}, and one of {hysteresis} hysteresis \
         rests only while that is less than half of it; wanted {most} or less: shorten the leads, clean the contacts, or take a load \
         that draws less"
    )]
    Swing {
        /// Between supply and board.
        between: Ohms,
        /// What the board switches.
        current: Amps,
        /// How far its terminals move.
        swing: Volts,
        /// Least hysteresis its limits allow.
        hysteresis: Volts,
        /// The resistance that would do.
        most: Ohms,
    },
    /// The profile's step is finer than the supply's.
    #[error("ramp.{key} is {step}, the supply sets steps of {finest}; wanted at least that")]
    Step {
        /// Which key of the profile.
        key: &'static str,
        /// What the profile asks for.
        step: Volts,
        /// Smallest step of the supply.
        finest: Volts,
    },
    /// A voltmeter cannot read the profile's maximum.
    #[error(
        "the profile's maximum is {maximum}, the largest range of the {role} {largest}; take another meter"
    )]
    Voltmeter {
        /// The role it plays.
        role: &'static str,
        /// What it must read.
        maximum: Volts,
        /// Full scale of its largest range.
        largest: Volts,
    },
    /// The supply's over-voltage protection cannot be set above the profile's maximum.
    #[error(
        "the profile's maximum is {maximum}, the supply's over-voltage protection goes to {highest}; wanted more"
    )]
    OverVoltage {
        /// What the profile allows.
        maximum: Volts,
        /// Highest level of the protection.
        highest: Volts,
    },
}

/// All that `profile` asks for and a bench with this `ability` cannot do; empty when they fit.
pub fn fits(profile: &Profile, ability: &Ability) -> Vec<Misfit> {
    let mut misfits = Vec::new();
    let supply = &profile.supply;
    if supply.maximum > ability.max_voltage {
        misfits.push(Misfit::Maximum { maximum: supply.maximum, highest: ability.max_voltage });
    }
    let (lowest, highest) = (ability.min_current, ability.max_current);
    if supply.current_limit < lowest || supply.current_limit > highest {
        misfits.push(Misfit::CurrentLimit { limit: supply.current_limit, lowest, highest });
    }
    let largest = ability.ranges.iter().fold(Amps::ZERO, |largest, range| largest.max(*range));
    if supply.current_limit > largest {
        misfits.push(Misfit::OnCurrent { limit: supply.current_limit, largest });
    }
    misfits.extend(off_current(profile, ability));
    misfits.extend(voltmeters(profile, ability));
    misfits.extend(step(profile, ability));
    misfits
}

fn off_current(profile: &Profile, ability: &Ability) -> Option<Misfit> {
    let limit = profile.limits.get(&QuantityName::OffCurrent)?;
    let limit = Amps(limit.max.or(limit.min)?).abs();
    let wanted = limit * OFF_UNCERTAINTY_SHARE;
    let uncertainty = ability.off_current_uncertainty();
    (uncertainty > wanted).then_some(Misfit::OffCurrent { limit, wanted, uncertainty })
}

fn voltmeters(profile: &Profile, ability: &Ability) -> impl Iterator<Item = Misfit> {
    let limited = profile.limits.contains_key(&QuantityName::OnResistance);
    let at_both = ability.voltmeter && ability.load_voltmeter;
    let held = profile.pack.rebound.is_some_and(|rebound| rebound.hold.is_some());
    let resistance = (limited && !at_both).then_some(Misfit::OnResistance);
    resistance.into_iter().chain((held && !ability.voltmeter).then_some(Misfit::ReboundHold))
}

fn step(profile: &Profile, ability: &Ability) -> Option<Misfit> {
    let (key, step) = match profile.ramp {
        Ramp::Staircase { step } => ("step", step),
        Ramp::Search { resolution } => ("resolution", resolution),
    };
    let finest = ability.set_step;
    (step < finest).then_some(Misfit::Step { key, step, finest })
}

#[cfg(test)]
mod tests {
    use super::*;
    use insta::assert_snapshot as says;
    use std::time::Duration;

    fn profile() -> Profile {
        Profile::read("river-node.toml", include_str!("../../profiles/river-node.toml"))
            .expect("a good profile")
    }

    fn ability() -> Ability {
        Ability {
            ranges: vec![Amps(1e-4), Amps(1.0)],
            range_settle: Duration::from_millis(60),
            read_time: Duration::from_millis(25),
            arrival_tolerance: Volts(0.01),
            zero_uncertainties: vec![Amps(15e-9), Amps(6e-5)],
            ..super::super::tests::ability()
        }
    }

    fn told(ability: &Ability) -> String {
        fits(&profile(), ability).iter().map(ToString::to_string).collect::<Vec<_>>().join("\n")
    }

    #[test]
    fn a_bench_that_can_do_all_fits() {
        assert_eq!(fits(&profile(), &ability()), []);
    }

    #[test]
    fn everything_a_bench_cannot_do_is_named_with_both_values() {
        says!(told(&Ability { max_voltage: Volts(8.0), ..ability() }),
            @"the profile's maximum is 8.400 V, the supply goes to 8.000 V; take a supply of higher voltage");
        says!(told(&Ability { max_current: Amps(0.3), ..ability() }),
            @"the profile's current limit is 350.0 mA, the supply's is 1.000 mA to 300.0 mA; take another supply");
        says!(told(&Ability { min_current: Amps(0.5), ..ability() }),
            @"the profile's current limit is 350.0 mA, the supply's is 500.0 mA to 3.000 A; take another supply");
        says!(told(&Ability { ranges: vec![Amps(1e-4), Amps(0.2)], ..ability() }),
            @"the current limit is 350.0 mA, the ammeter's largest range 200.0 mA; lower the limit or take another meter");
        says!(told(&Ability { zero_uncertainties: vec![Amps(4.6e-5)], ..ability() }),
            @"an off current limited to 4.000 µA needs a standard uncertainty of 1.000 µA or less, the ammeter's is 46.00 µA on its smallest range; take a meter with a smaller range or remove limits.off_current");
        says!(told(&Ability { set_step: Volts(0.02), ..ability() }), @"ramp.resolution is 2.000 mV, the supply sets steps of 20.00 mV; wanted at least that");
    }

    #[test]
    fn what_needs_a_voltmeter_says_where() {
        let mut profile = profile();
        let limit = crate::profile::Limit { at: None, min: None, max: Some(0.1) };
        profile.limits.insert(QuantityName::OnResistance, limit);
        assert_eq!(fits(&profile, &ability()), [Misfit::OnResistance]);
        let both = Ability { load_voltmeter: true, ..ability() };
        assert_eq!(fits(&profile, &both), []);
        let garden = include_str!("../../profiles/garden-probe.toml");
        let garden = Profile::read("garden-probe.toml", garden).expect("a good profile");
        assert_eq!(fits(&garden, &Ability { voltmeter: false, ..both }), [Misfit::ReboundHold]);
    }

    #[test]
    fn a_bench_without_any_range_does_not_fit() {
        assert!(matches!(
            fits(&profile(), &Ability { ranges: Vec::new(), ..ability() })[..],
            [Misfit::OnCurrent { .. }]
        ));
    }
}
