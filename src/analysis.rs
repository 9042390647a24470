//! From a trace to quantities with uncertainty, and findings about the board or the bench. Pure.
//!
//! A trace is cut into plateaus (on or off by the load's current, [`crate::trace::SwitchState`]), the changes and stays of the board are collected,
//! and each threshold is read from them at the terminal voltage that stood before the change.

mod accuracy;
mod allowance;
mod at_rest;
mod cause;
mod contact;
mod contribution;
mod deep;
mod delay;
mod delay_limits;
mod derived;
mod diagnosis;
mod discharge;
mod doubts;
mod edges;
mod expected;
mod finding;
#[cfg(test)]
pub(crate) mod fixture;
mod hiccup;
mod hum;
mod hysteresis;
mod in_band;
mod load_stopped;
mod meter_fuse;
mod meter_range;
mod meter_reversed;
mod noise;
mod off_budget;
mod off_current;
mod off_fit;
mod off_limits;
mod off_noise;
mod on_current;
mod on_limits;
mod on_resistance;
mod outside;
mod plateau;
mod quantity;
pub(crate) mod ramps;
pub(crate) mod ranking;
mod rates;
mod rebound;
mod regulating_load;
mod residuals;
mod restless;
mod rests_off;
mod settled;
mod slow;
mod spoilt;
mod spread;
mod stop;
mod storage;
mod stuck_on;
mod supply_agrees;
mod switching_time;
mod temperature;
mod terminals;
mod threshold;
mod trust;
mod zero;

pub use at_rest::AtRest;
pub use cause::Cause;
pub use contribution::{Contribution, Input, Role, Shape};
pub use expected::expected;
pub use finding::{About, Finding, FindingCode};
pub use quantity::{Quantity, Term};
pub use ramps::RampFit;
pub use rates::from_rates;
pub(crate) use spread::Spread;

use crate::profile::{Profile, QuantityName};
use crate::trace::{Stop, Trace};
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

/// Reads the thresholds, their hysteresis, the currents and what follows from them from `trace`, and what it says about
/// board and bench. The same trace and profile give the same answer.
pub fn analyse(trace: &Trace, profile: &Profile) -> Analysis {
    let course = Course::new(trace, profile);
    let found = Edges::find(&course);
    let mut down = Search::run(&course, &found, Direction::Down);
    let mut up = Search::run(&course, &found, Direction::Up);
    let noise = Search::allow_for_noise(profile, [&mut down, &mut up]);
    let below = rests_off::rests_off_below(&course, &found, down.slow);
    let off_fit = off_fit::off_fit(&course, below);
    let paths = off_fit.as_ref().map(|fit| off_budget::off_budget(fit, profile)).unwrap_or_default();
    let (off_current, off_findings) = off_current::off_current(&course, below, !paths.is_empty());
    let restless = source_resistance(&course, &down, &up);
    let spoilt = spoilt::spoilt(&course, restless.is_some());

    let mut quantities = Vec::new();
    // What a board seems to do that cannot rest on this source is not its own.
    if restless.is_none() && !spoilt.thresholds() {
        quantities.extend(thresholds(&course, &down, &up));
    }
    let derived = derived::derived(&course, &found, &down, below, &quantities);
    quantities.extend(off_current);
    let (delays, delay_findings) = delay::delays(&course, &found, &quantities);
    quantities.extend(delays);
    let (deep_current, deep_findings) = deep::deep(&course);
    quantities.extend(deep_current);
    quantities.extend(off_fit.into_iter().flat_map(|fit| [fit.conductance, fit.constant]));
    quantities.extend(derived.quantities);
    quantities.sort_by_key(|quantity| quantity.name);

    // A source that lets no board rest explains what the board seems to do.
    let mut findings: Vec<Finding> = restless.into_iter().collect();
    findings.extend(stop::stop_findings(&trace.ending));
    let diagnosis = diagnosis::diagnose(&course, &found);
    findings.extend(diagnosis.filter(|new| findings.iter().all(|old| old.code != new.code)));
    findings.extend(restless::bounces(&course, &found));
    findings.extend(load_stopped::load_stopped(&course));
    findings.extend(outside::outside(&quantities, profile));
    findings.extend(on_limits::on_resistance(&quantities, profile));
    findings.extend(delay_limits::delay_limits(&quantities, profile));
    findings.extend(off_findings);
    findings.extend(paths);
    findings.extend(delay_findings);
    findings.extend(deep_findings);
    let (note, unwanted): (Vec<Finding>, Vec<Finding>) =
        in_band::in_band(&course).into_iter().partition(|finding| finding.code == FindingCode::InBand);
    findings.extend(unwanted);
    findings.extend(derived.findings);
    findings.extend(diagnosis::current_limit(&course));
    findings.extend(trust::delays(&course, [(Direction::Down, &down), (Direction::Up, &up)]));
    findings.extend(noise.and_then(|noise| trust::noise(&course, &noise)));
    findings.extend(trust::accuracy(&course));
    findings.extend(doubts::findings(&trace.claims));
    findings.extend(discharge::still_charged(trace));
    findings.extend(note);
    findings.extend(derived.remarks);
    if spoilt.switch() {
        // What passed for the board's doing is not known to be that.
        quantities.clear();
        findings.retain(|finding| finding.about == About::Bench);
    }
    let mut findings = spoilt.explain(findings);
    if trace.ending.stop == Stop::Aborted {
        // A run that was stopped before it came to the small ranges says nothing about them.
        findings.retain(|finding| finding.code != FindingCode::RangeNotAdequate);
    }
    Analysis { quantities, findings: ranking::rank(findings) }
}

/// What the ramps of several rates within one run say of trip and re-enable and their delays, as far as there were any.
pub fn from_ramps(trace: &Trace, profile: &Profile) -> Vec<RampFit> {
    let course = Course::new(trace, profile);
    let found = Edges::find(&course);
    let [down, up] = [Direction::Down, Direction::Up].map(|it| Search::run(&course, &found, it));
    let thresholds = thresholds(&course, &down, &up);
    thresholds.iter().filter_map(|threshold| RampFit::of(&course, &found, threshold)).collect()
}

/// Trip, re-enable, hysteresis and on current, as far as they were found.
fn thresholds(course: &Course<'_>, down: &Search, up: &Search) -> Vec<Quantity> {
    let (trip, re_enable) = (down.threshold.as_ref(), up.threshold.as_ref());
    let of = |name, threshold| hysteresis::threshold_quantity(course, name, threshold);
    let on_current = trip.and_then(|trip| on_current::on_current(course, trip));
    let trip = trip.map(|trip| of(QuantityName::Trip, trip));
    let re_enable = re_enable.map(|re_enable| of(QuantityName::ReEnable, re_enable));
    let hysteresis = trip
        .as_ref()
        .zip(re_enable.as_ref())
        .map(|(trip, re_enable)| hysteresis::hysteresis(trip, re_enable));
    [trip, re_enable, hysteresis, on_current].into_iter().flatten().collect()
}

/// Holds the swing of the terminals against the least hysteresis the profile allows, or that of the board.
fn source_resistance(course: &Course<'_>, down: &Search, up: &Search) -> Option<Finding> {
    let trip = down.threshold.as_ref().map(|trip| trip.value);
    let re_enable = up.threshold.as_ref().map(|re_enable| re_enable.value);
    let allowed =
        course.profile.limits.get(&QuantityName::Hysteresis).and_then(|limit| limit.min.or(limit.max));
    let measured = trip.zip(re_enable).map(|(trip, re_enable)| re_enable - trip);
    let hysteresis = allowed.map(Volts).or(measured)?;
    let at = trip.unwrap_or(course.profile.supply.floor);
    let resistance = terminals::source_resistance(course)?;
    diagnosis::source_resistance(resistance, at / course.profile.load.resistance, hysteresis)
}
