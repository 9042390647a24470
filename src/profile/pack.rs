//! The battery behind the board: what its voltage does once the load is gone, and how long it lasts in store.

mod chemistry;

pub use chemistry::Chemistry;

use super::QuantityName;
use super::draft::Draft;
use crate::document::{At, Table};
use crate::units::{Amps, Coulombs, Ohms, Volts, YEAR};
use std::time::Duration;

/// The battery, as far as the profile tells.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Pack {
    /// What its voltage does when the switch opens.
    pub rebound: Option<Rebound>,
    /// What it holds when the switch opens.
    pub storage: Option<Storage>,
}

/// How far the voltage rises when the load is gone. Both figures are the most the design allows for: at the end of the
/// discharge, in the cold, after years.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Rebound {
    /// Internal resistance with contacts and wires: rises at once by this times the current.
    pub resistance: Ohms,
    /// Rises by this afterwards, in minutes to hours.
    pub recovery: Volts,
    /// How far both may be off, as a fraction of one; zero where the profile does not tell, and then they count as exact.
    pub tolerance: f64,
    /// How long the board is held at the risen voltage, where it is tried out.
    pub hold: Option<Duration>,
}

/// Charge, and what drains it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Storage {
    /// Charge between the cut-off and harm to the cells.
    pub remaining: Coulombs,
    /// Current of self-discharge; zero where the profile does not tell.
    pub self_discharge: Amps,
    /// How far both may be off, as a fraction of one.
    pub tolerance: f64,
    /// Voltage of the stored battery; `None` for where the off current is limited.
    pub at: Option<Volts>,
}

impl Rebound {
    /// Rise of the voltage when a board that drew `current` switches off.
    pub fn rise(&self, current: Amps) -> Volts {
        current * self.resistance + self.recovery
    }
}

/// What stands in `[pack]`.
pub(super) struct PackDraft {
    resistance: Option<At<Ohms>>,
    recovery: Option<At<Volts>>,
    rebound_tolerance: Option<At<f64>>,
    rebound_hold: Option<At<Duration>>,
    remaining: Option<At<Coulombs>>,
    capacity: Option<At<Coulombs>>,
    self_discharge: Option<At<f64>>,
    tolerance: Option<At<f64>>,
    storage_voltage: Option<At<Volts>>,
    pub(super) chemistry: Option<At<Chemistry>>,
    pub(super) cells: Option<At<i64>>,
}

/// Longest that a board is held to see whether it stays off.
const LONGEST_HOLD: Duration = Duration::from_secs(600);
/// A month is the twelfth part of a year.
const MONTH: f64 = YEAR / 12.0;

/// Reads `[pack]`, where there is one.
pub(super) fn read(root: &mut Table<'_, '_>) -> Option<PackDraft> {
    let mut table = root.optional_table("pack")?;
    let draft = PackDraft {
        resistance: table.optional_quantity("resistance"),
        recovery: table.optional_quantity("recovery"),
        rebound_tolerance: table.optional_fraction("rebound_tolerance"),
        rebound_hold: table.optional_duration("rebound_hold"),
        remaining: table.optional_quantity("remaining_capacity"),
        capacity: table.optional_quantity("capacity"),
        self_discharge: table.optional_fraction("self_discharge"),
        tolerance: table.optional_fraction("tolerance"),
        storage_voltage: table.optional_quantity("storage_voltage"),
        chemistry: table.optional_choice("chemistry", &Chemistry::WORDS),
        cells: table.optional_integer("cells"),
    };
    for (key, other) in [
        ("resistance", "recovery"),
        ("recovery", "resistance"),
        ("rebound_tolerance", "resistance"),
        ("rebound_hold", "resistance"),
        ("self_discharge", "capacity"),
        ("capacity", "self_discharge"),
        ("capacity", "remaining_capacity"),
        ("storage_voltage", "remaining_capacity"),
        ("tolerance", "remaining_capacity"),
        ("chemistry", "cells"),
        ("cells", "chemistry"),
    ] {
        if table.has(key) && !table.has(other) {
            table.problem_here(format!("pack.{key} says nothing without pack.{other}"));
        }
    }
    draft.check_alone(&table);
    Some(draft)
}

impl PackDraft {
    /// Notes what is wrong with the values by themselves.
    fn check_alone(&self, table: &Table<'_, '_>) {
        if let Some(at) = self.resistance.as_ref().filter(|at| at.value < Ohms::ZERO) {
            table.problem(at, "below zero");
        }
        if let Some(at) = self.recovery.as_ref().filter(|at| at.value < Volts::ZERO) {
            table.problem(at, "below zero");
        }
        if let Some(at) = self.rebound_hold.as_ref().filter(|at| at.value > LONGEST_HOLD) {
            table.problem(at, "wanted at most 600 s: every board would be held so long");
        }
        for at in [&self.remaining, &self.capacity].into_iter().flatten() {
            if at.value <= Coulombs::ZERO {
                table.problem(at, "not above zero");
            }
        }
        if let (Some(remaining), Some(capacity)) = (&self.remaining, &self.capacity)
            && remaining.value > capacity.value
        {
            table.problem(remaining, &format!("more than {capacity}"));
        }
        for at in [&self.self_discharge, &self.tolerance, &self.rebound_tolerance].into_iter().flatten() {
            if !(0.0..1.0).contains(&at.value) {
                table.problem(at, "wanted 0 % to less than 100 %");
            }
        }
        if let Some(at) = self.cells.as_ref().filter(|at| at.value < 1) {
            table.problem(at, "wanted 1 or more");
        }
    }

    pub(super) fn finish(&self) -> Pack {
        let rebound = self.resistance.as_ref().zip(self.recovery.as_ref());
        let drain = self.capacity.as_ref().zip(self.self_discharge.as_ref());
        Pack {
            rebound: rebound.map(|(resistance, recovery)| Rebound {
                resistance: resistance.value,
                recovery: recovery.value,
                tolerance: self.rebound_tolerance.as_ref().map_or(0.0, |at| at.value),
                hold: self.rebound_hold.as_ref().map(|at| at.value),
            }),
            storage: self.remaining.as_ref().map(|remaining| Storage {
                remaining: remaining.value,
                self_discharge: drain
                    .map_or(Amps::ZERO, |(capacity, share)| Amps(capacity.value.0 * share.value / MONTH)),
                tolerance: self.tolerance.as_ref().map_or(0.0, |at| at.value),
                at: self.storage_voltage.as_ref().map(|at| at.value),
            }),
        }
    }
}

/// Notes what does not fit the rest of the profile, and limits that need a pack.
pub(super) fn check(draft: &Draft, root: &Table<'_, '_>) {
    let pack = draft.pack.as_ref().map(PackDraft::finish).unwrap_or_default();
    for (name, known, key) in [
        (QuantityName::ReboundMargin, pack.rebound.is_some(), "resistance"),
        (QuantityName::StorageTime, pack.storage.is_some(), "remaining_capacity"),
    ] {
        let limit = draft.limits.get(&name).and_then(|limit| limit.min.as_ref().or(limit.max.as_ref()));
        if let Some(limit) = limit.filter(|_| !known) {
            root.problem(limit, &format!("it is worked out from pack.{key}, which is not there"));
        }
    }
    let Some(read) = &draft.pack else { return };
    chemistry::check(read, draft, root);
    let highest_trip = draft.volts(QuantityName::Trip, |limit| &limit.max);
    if let (Some(rebound), Some(trip), Some(load), Some(maximum), Some(hold)) =
        (pack.rebound, &highest_trip, &draft.load.resistance, &draft.supply.maximum, &read.rebound_hold)
    {
        let risen = trip.value + rebound.rise(trip.value / load.value);
        if risen > maximum.value {
            root.problem(hold, &format!("the voltage rises to {risen}, above {maximum}"));
        }
    }
    let lowest_trip = draft.volts(QuantityName::Trip, |limit| &limit.min);
    super::check::below(&read.storage_voltage, &lowest_trip, "it is measured with the switch open", root);
    super::check::below(
        &draft.supply.floor.as_ref().map(|floor| floor.with(floor.value * 0.999)),
        &read.storage_voltage,
        "the off current is not measured lower",
        root,
    );
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::profile::Profile;
    use crate::profile::sample::{RIVER_NODE, problems};
    use insta::assert_snapshot as says;

    /// 2 % a month of 2 Ah: 40 mAh in 730.5 h, 54.76 uA; worked by hand.
    #[test]
    fn self_discharge_is_a_current() {
        let changes = [("capacity = \"2.6 Ah\"", "capacity = \"2 Ah\"")];
        let text = changes.iter().fold(RIVER_NODE.to_owned(), |text, (from, to)| text.replace(from, to));
        let pack = Profile::read("p.toml", &text).expect("a good profile").pack;
        let storage = pack.storage.expect("a remaining capacity");
        assert!((storage.self_discharge.0 - 54.757e-6).abs() < 1e-9, "{}", storage.self_discharge);
        assert_eq!(storage.remaining, Coulombs(720.0));
    }

    #[test]
    fn what_belongs_together_is_wanted_together() {
        says!(problems(&[("resistance = \"150 mohm\"", "")]), @"p.toml:94:1: pack.recovery says nothing without pack.resistance");
        says!(problems(&[("remaining_capacity = \"200 mAh\"", "remaining_capacity = \"3 Ah\"")]), @r#"p.toml:98:22: pack.remaining_capacity = "3 Ah": more than pack.capacity = "2.6 Ah""#);
        says!(problems(&[("[pack]", "[pack]\nchemistry = \"li-ion\"\ncells = 3")]), @r#"p.toml:39:23: limits.trip.min = "5.88 V": pack.cells = 3 of pack.chemistry = "li-ion" are harmed below 7.500 V"#);
        says!(problems(&[("[pack]", "[pack]\nchemistry = \"li-ion\"\ncells = 1")]), @r#"p.toml:17:11: supply.maximum = "8.40 V": pack.cells = 1 of pack.chemistry = "li-ion" reach 4.400 V at most"#);
        says!(problems(&[("recovery = \"200 mV\"", "recovery = \"3 V\"\nrebound_hold = \"2 s\"")]), @r#"p.toml:98:16: pack.rebound_hold = "2 s": the voltage rises to 9.137 V, above supply.maximum = "8.40 V""#);
    }

    #[test]
    fn a_limit_that_needs_a_pack_asks_for_it() {
        let limit = "\n[limits]\nrebound_margin = { min = \"0 V\" }\nstorage_time = { min = \"1 year\" }\n";
        let told = problems(&[("[pack]", "[pac]"), ("\n[limits]", limit)]);
        let told: Vec<&str> = told.lines().filter(|line| line.contains("worked out")).collect();
        says!(told.join("\n"), @r#"
        p.toml:39:26: limits.rebound_margin.min = "0 V": it is worked out from pack.resistance, which is not there
        p.toml:40:24: limits.storage_time.min = "1 year": it is worked out from pack.remaining_capacity, which is not there
        "#);
    }
}
