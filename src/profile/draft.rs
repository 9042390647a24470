//! What was read of a profile so far: each value by itself good, with its place, none compared with another yet.

use super::decision::DecisionDraft;
use super::measure::MeasureDraft;
use super::off_line::{self, OffLineDraft};
use super::off_path::{self, OffPath};
use super::pack::{self, PackDraft};
use super::parts::{self, PartsDraft};
use super::{BenchRules, Limit, Load, Profile, QuantityName, Ramp, Supply, Timing};
use super::{bench, serial_number};
use crate::document::{At, Table};
use crate::units::{Amps, Farads, Ohms, Volts, Watts};
use regex_lite::Regex;
use std::collections::BTreeMap;
use std::time::Duration;

/// A profile with holes; what is missing or unreadable has been noted already.
#[derive(Default)]
pub(super) struct Draft {
    pub(super) board: Option<At<String>>,
    pub(super) revision: Option<At<String>>,
    pub(super) title: Option<At<String>>,
    pub(super) serial_number: Option<Regex>,
    pub(super) latched: Option<At<bool>>,
    pub(super) supply: SupplyDraft,
    pub(super) load: LoadDraft,
    pub(super) timing: TimingDraft,
    pub(super) ramp: RampDraft,
    pub(super) limits: BTreeMap<QuantityName, LimitDraft>,
    pub(super) decision: DecisionDraft,
    pub(super) measure: MeasureDraft,
    pub(super) parts: Option<PartsDraft>,
    pub(super) off_paths: Option<Vec<OffPath>>,
    pub(super) off_line: Option<OffLineDraft>,
    pub(super) pack: Option<PackDraft>,
    pub(super) bench: BenchRules,
}

#[derive(Default)]
pub(super) struct SupplyDraft {
    pub(super) start: Option<At<Volts>>,
    pub(super) floor: Option<At<Volts>>,
    pub(super) maximum: Option<At<Volts>>,
    pub(super) current_limit: Option<At<Amps>>,
}

#[derive(Default)]
pub(super) struct LoadDraft {
    pub(super) resistance: Option<At<Ohms>>,
    pub(super) tolerance: Option<At<f64>>,
    pub(super) rating: Option<At<Watts>>,
    pub(super) capacitance: Option<At<Farads>>,
}

#[derive(Default)]
pub(super) struct TimingDraft {
    pub(super) detect_delay: Option<At<Duration>>,
    pub(super) release_delay: Option<At<Duration>>,
}

#[derive(Default)]
pub(super) struct RampDraft {
    pub(super) mode: Option<At<ModeWord>>,
    pub(super) step: Option<At<Volts>>,
    pub(super) resolution: Option<At<Volts>>,
}

#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum ModeWord {
    Staircase,
    Search,
}

#[derive(Default)]
pub(super) struct LimitDraft {
    pub(super) at: Option<At<Volts>>,
    pub(super) min: Option<At<f64>>,
    pub(super) max: Option<At<f64>>,
}

impl Draft {
    /// Takes all that a profile may hold from the root table.
    pub(super) fn read(root: &mut Table<'_, '_>) -> Self {
        root.integer_choice("schema", &[(1, ())]);
        Self {
            board: root.text("board"),
            revision: root.text("revision"),
            title: root.text("title"),
            serial_number: root.text("serial_number").and_then(|text| serial_number::pattern(&text, root)),
            latched: root.optional_boolean("latched"),
            supply: root.table("supply").map(read_supply).unwrap_or_default(),
            load: root.table("load").map(read_load).unwrap_or_default(),
            timing: root.table("timing").map(read_timing).unwrap_or_default(),
            ramp: root.table("ramp").map(read_ramp).unwrap_or_default(),
            limits: root.table("limits").map(read_limits).unwrap_or_default(),
            decision: root.optional_table("decision").map(DecisionDraft::read).unwrap_or_default(),
            measure: root.optional_table("measure").map(MeasureDraft::read).unwrap_or_default(),
            parts: parts::read(root),
            off_paths: off_path::read(root),
            off_line: off_line::read(root),
            pack: pack::read(root),
            bench: root.optional_table("bench").map(bench::read).unwrap_or_default(),
        }
    }

    /// The profile, when nothing is missing.
    pub(super) fn finish(self, hash: String) -> Option<Profile> {
        let ramp = match self.ramp.mode?.value {
            ModeWord::Staircase => Ramp::Staircase { step: self.ramp.step?.value },
            ModeWord::Search => Ramp::Search { resolution: self.ramp.resolution?.value },
        };
        Some(Profile {
            board: self.board?.value,
            revision: self.revision?.value,
            title: self.title?.value,
            serial_number: self.serial_number?,
            latched: self.latched.is_some_and(|latched| latched.value),
            supply: Supply {
                start: self.supply.start?.value,
                floor: self.supply.floor?.value,
                maximum: self.supply.maximum?.value,
                current_limit: self.supply.current_limit?.value,
            },
            load: Load {
                resistance: self.load.resistance?.value,
                tolerance: self.load.tolerance?.value,
                rating: self.load.rating?.value,
                capacitance: self.load.capacitance.map(|at| at.value),
            },
            timing: Timing {
                detect_delay: self.timing.detect_delay?.value,
                release_delay: self.timing.release_delay?.value,
            },
            ramp,
            limits: self.limits.iter().map(|(name, limit)| (*name, limit.finish())).collect(),
            decision: self.decision.finish(),
            measure: self.measure.finish(&self.limits),
            parts: self.parts.map(|read| read.parts),
            off_paths: self.off_paths?,
            off_line: self.off_line.as_ref().and_then(OffLineDraft::finish),
            pack: self.pack.as_ref().map(PackDraft::finish).unwrap_or_default(),
            bench: self.bench,
            hash,
        })
    }

    /// True of a board that stays off once it has tripped.
    pub(super) fn is_latched(&self) -> bool {
        self.latched.as_ref().is_some_and(|latched| latched.value)
    }

    /// A limit on a voltage, as volts.
    pub(super) fn volts(
        &self,
        name: QuantityName,
        end: impl Fn(&LimitDraft) -> &Option<At<f64>>,
    ) -> Option<At<Volts>> {
        let at = end(self.limits.get(&name)?).as_ref()?;
        Some(at.with(Volts(at.value)))
    }
}

impl LimitDraft {
    fn finish(&self) -> Limit {
        Limit {
            at: self.at.as_ref().map(|at| at.value),
            min: self.min.as_ref().map(|at| at.value),
            max: self.max.as_ref().map(|at| at.value),
        }
    }
}

fn read_supply(mut table: Table<'_, '_>) -> SupplyDraft {
    SupplyDraft {
        start: table.quantity("start"),
        floor: table.quantity("floor"),
        maximum: table.quantity("maximum"),
        current_limit: table.quantity("current_limit"),
    }
}

fn read_load(mut table: Table<'_, '_>) -> LoadDraft {
    LoadDraft {
        resistance: table.quantity("resistance"),
        tolerance: table.fraction("tolerance"),
        rating: table.quantity("rating"),
        capacitance: table.optional_quantity("capacitance"),
    }
}

fn read_timing(mut table: Table<'_, '_>) -> TimingDraft {
    TimingDraft {
        detect_delay: table.duration("detect_delay"),
        release_delay: table.duration("release_delay"),
    }
}

fn read_ramp(mut table: Table<'_, '_>) -> RampDraft {
    let mode = table.choice("mode", &[("staircase", ModeWord::Staircase), ("search", ModeWord::Search)]);
    // Only what the mode needs is required; the other may stand there for the day the mode is changed.
    let mut needed_for = |key, word| match &mode {
        Some(mode) if mode.value == word => table.quantity(key),
        _ => table.optional_quantity(key),
    };
    let step = needed_for("step", ModeWord::Staircase);
    let resolution = needed_for("resolution", ModeWord::Search);
    RampDraft { mode, step, resolution }
}

fn read_limits(mut table: Table<'_, '_>) -> BTreeMap<QuantityName, LimitDraft> {
    let mut limits = BTreeMap::new();
    for name in QuantityName::ALL {
        if let Some(limit) = table.optional_table(name.key()) {
            limits.insert(name, read_limit(limit, name));
        }
    }
    limits
}

fn read_limit(mut table: Table<'_, '_>, name: QuantityName) -> LimitDraft {
    let limit = LimitDraft {
        at: if name == QuantityName::OffCurrent { table.quantity("at") } else { None },
        min: table.optional_value("min", name.unit()),
        max: table.optional_value("max", name.unit()),
    };
    if !table.has("min") && !table.has("max") {
        table.problem_here(format!("limits.{} limits nothing; wanted \"min\", \"max\" or both", name.key()));
    }
    limit
}
