//! Quantities worked out from others and from what the profile says of battery and bench: on-resistance, rebound
//! margin and storage time.

use super::edges::Edges;
use super::finding::Finding;
use super::off_current::off_current_at;
use super::on_resistance::on_resistance;
use super::plateau::Course;
use super::quantity::Quantity;
use super::rebound::{negative_margin, rebound_margin, restart};
use super::storage::{drains, storage_time};
use super::threshold::Search;
use crate::profile::QuantityName;
use crate::units::Volts;

/// What can be worked out, and what is to be said about it.
#[derive(Default)]
pub(super) struct Derived {
    pub(super) quantities: Vec<Quantity>,
    /// What is wrong.
    pub(super) findings: Vec<Finding>,
    /// What nobody need look at first.
    pub(super) remarks: Vec<Finding>,
}

/// Works it out. The board rests off `below` this; `thresholds` holds what was read of the thresholds so far.
pub(super) fn derived(
    course: &Course<'_>,
    found: &Edges,
    down: &Search,
    below: Volts,
    thresholds: &[Quantity],
) -> Derived {
    let Derived { mut quantities, mut findings, mut remarks } = Derived::default();
    let pack = &course.profile.pack;
    let known = |name| thresholds.iter().find(|quantity| quantity.name == name);
    let (trip, current) = (down.threshold.as_ref(), known(QuantityName::OnCurrent));
    if let (Some(rebound), Some(current)) = (&pack.rebound, current) {
        let margin =
            known(QuantityName::Hysteresis).map(|hysteresis| rebound_margin(hysteresis, current, rebound));
        let seen = trip.and_then(|trip| restart(course, found, trip, current, rebound));
        let told = || negative_margin(margin.as_ref()?, current, rebound);
        findings.extend(seen.or_else(told));
        quantities.extend(margin);
    }
    if current.is_some() {
        quantities.extend(trip.and_then(|trip| on_resistance(course, trip)));
    }
    if let Some(storage) = &pack.storage {
        let limited = course.profile.limits.get(&QuantityName::OffCurrent).and_then(|limit| limit.at);
        let at = storage.at.or(limited).unwrap_or(course.profile.supply.floor);
        if let Some(off) = off_current_at(course, below, at) {
            let time = storage_time(&off, storage);
            let is_limited = course.profile.limits.contains_key(&QuantityName::StorageTime);
            remarks.extend(is_limited.then(|| drains(&time, &off, storage)));
            quantities.push(time);
        }
    }
    Derived { quantities, findings, remarks }
}
