//! From a trace to quantities with uncertainty, and findings about the board or the bench. Pure.
//!
//! A trace is cut into plateaus ([`crate::trace::SwitchState`] by the load's current), the changes and stays of the board are collected,
//! and each threshold is read from them at the terminal voltage that stood before the change.

mod diagnosis;
mod edges;
mod finding;
#[cfg(test)]
pub(crate) mod fixture;
mod hysteresis;
mod line;
mod off_current;
mod off_limits;
mod on_current;
mod plateau;
mod quantity;
mod rates;
mod settled;
mod slow;
mod stop;
mod terminals;
mod threshold;
mod trust;

pub use finding::{About, Finding, FindingCode};
pub use quantity::{Contribution, Quantity};
pub use rates::from_rates;

use crate::profile::{Profile, QuantityName};
use crate::trace::Trace;
use crate::units::Volts;
use edges::{Direction, Edges};
use plateau::Course;
use threshold::Search;

/// What a trace says.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Analysis {
    /// Quantities found, each at most once, in the order of [`QuantityName`].
    pub quantities: Vec<Quantity>,
    /// Findings, the most telling first.
    pub findings: Vec<Finding>,
}

/// Reads the thresholds, their hysteresis, the on current and the off current from `trace`, and what it says about
/// board and bench. The same trace and profile give the same answer.
pub fn analyse(trace: &Trace, profile: &Profile) -> Analysis {
    let course = Course::new(trace, profile);
    let found = Edges::find(&course);
    let down = Search::run(&course, &found, Direction::Down);
    let up = Search::run(&course, &found, Direction::Up);
    let (off_current, off_findings) = off_current::off_current(&course);

    let mut quantities = Vec::new();
    if let Some(trip) = &down.threshold {
        quantities.push(hysteresis::threshold_quantity(&course, QuantityName::Trip, trip));
    }
    if let Some(re_enable) = &up.threshold {
        quantities.push(hysteresis::threshold_quantity(&course, QuantityName::ReEnable, re_enable));
    }
    if let (Some(trip), Some(re_enable)) = (&down.threshold, &up.threshold) {
        quantities.push(hysteresis::hysteresis(&course, trip, re_enable));
    }
    quantities.extend(down.threshold.as_ref().and_then(|trip| on_current::on_current(&course, trip)));
    quantities.extend(off_current);

    let mut findings = stop::stop_findings(&trace.ending);
    findings.extend(diagnosis::diagnose(&course, &found));
    findings.extend(source_resistance(&course, &down, &up, &quantities));
    findings.extend(off_findings);
    findings.extend(diagnosis::current_limit(&course));
    findings.extend(trust::delays(&course, [(Direction::Down, &down), (Direction::Up, &up)]));
    findings.extend(trust::accuracy(&course));
    Analysis { quantities, findings }
}

/// Holds the swing of the terminals against the hysteresis measured, or the least the profile allows.
fn source_resistance(
    course: &Course<'_>,
    down: &Search,
    up: &Search,
    quantities: &[Quantity],
) -> Option<Finding> {
    let trip = down.threshold.as_ref().map_or(course.profile.supply.floor, |trip| trip.value);
    let resistance = terminals::source_resistance(course, down.rail.as_ref(), up.rail.as_ref(), trip)?;
    let measured = quantities.iter().find(|quantity| quantity.name == QuantityName::Hysteresis);
    let allowed =
        course.profile.limits.get(&QuantityName::Hysteresis).and_then(|limit| limit.min.or(limit.max));
    let hysteresis = measured.map(|quantity| quantity.value).or(allowed)?;
    diagnosis::source_resistance(resistance, trip / course.profile.load.resistance, Volts(hysteresis))
}
