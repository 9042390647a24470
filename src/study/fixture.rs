//! Cycles for the tests of this room.

use super::{Crossing, Cycle, Order};
use crate::units::{Ohms, Volts};

/// Cycles that tripped in brackets about these middles.
pub(super) fn cycles(middles: &[f64], width: f64) -> Vec<Cycle> {
    let crossing = |middle: f64| Crossing {
        low: Volts(middle - width / 2.0),
        high: Volts(middle + width / 2.0),
        set: Volts(middle),
        rate: 0.0,
        period: 0.0,
        seen_after: 0.0,
    };
    let cycle = |(number, &middle): (usize, &f64)| Cycle {
        order: Order { board: 0, temperature: 0, load: 0, cycle: number as u32, rate: 0 },
        temperature: None,
        load: Ohms(55.0),
        trip: Some(crossing(middle)),
        re_enable: None,
        claim: None,
        settle: 0.0,
        integration: 0.0,
        duration: 1.0,
    };
    middles.iter().enumerate().map(cycle).collect()
}
