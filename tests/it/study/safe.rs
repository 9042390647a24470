//! Whatever fails in a cycle, the output is off or said to be perhaps on, and no set-point is above the start voltage.

use super::{Boards, plan};
use crate::river;
use ebbmark::sim::{Condition, Faults, Setup};
use ebbmark::study::Plan;
use ebbmark::trace::OutputState;
use ebbmark::units::Volts;
use std::time::Duration;

#[test]
fn whatever_fails_the_output_is_off_or_reported() {
    const RUNS: u64 = 600;
    let profile = river::profile();
    let plan = Plan { rates: vec![None, Some(0.5)], ..plan(1) };
    let mut cut_short = 0;
    for seed in 0..RUNS {
        let faults = Faults::random(seed, Duration::from_secs(6));
        let order = plan.orders().nth((seed % 2) as usize).expect("two orders");
        let (_, trace, is_on) = Boards::still(seed).cycle(&profile, &plan, &[], order, faults);
        match trace.ending.output {
            OutputState::Off => assert!(!is_on, "seed {seed}: output on, but reported off"),
            OutputState::MayBeOn => cut_short += 1,
        }
        let highest = trace.samples.iter().map(|sample| sample.set).fold(Volts::ZERO, Volts::max);
        assert!(highest <= profile.supply.start + Volts(1e-3), "seed {seed}: {highest}");
    }
    assert!(cut_short > 0, "no run exercised the report");
}

/// A board that is not in order ends its cycle, or has no threshold; it is never given one.
#[test]
fn a_board_that_does_not_switch_has_no_thresholds() {
    let profile = river::profile();
    let plan = plan(1);
    let order = plan.orders().next().expect("an order");
    for condition in [Condition::NeverTrips, Condition::NeverOn, Condition::Latched, Condition::NoLoad] {
        for seed in 0..5 {
            let mut boards = Boards::still(seed);
            boards.change = match condition {
                Condition::NeverTrips => |setup| under(setup, Condition::NeverTrips),
                Condition::NeverOn => |setup| under(setup, Condition::NeverOn),
                Condition::Latched => |setup| under(setup, Condition::Latched),
                _ => |setup| under(setup, Condition::NoLoad),
            };
            let (cycle, _, is_on) = boards.cycle(&profile, &plan, &[], order, Faults::none());
            assert!(!is_on && cycle.re_enable.is_none(), "{condition}, seed {seed}: {cycle:?}");
        }
    }
}

fn under(setup: &mut Setup, condition: Condition) {
    *setup = setup.clone().under(&[condition], &river::profile());
}
