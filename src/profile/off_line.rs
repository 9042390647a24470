//! The span of voltages over which the off current is measured, to tell a resistance from a constant current.

use super::draft::Draft;
use super::{Profile, QuantityName};
use crate::document::{At, Table};
use crate::units::{Amps, Volts};

/// Where the off current is read for its line.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct OffLine {
    /// Lowest voltage: the detector works here for certain, and the board is off.
    pub from: Volts,
    /// Highest voltage, below every trip the limits allow.
    pub to: Volts,
    /// How many voltages, both ends included.
    pub points: u32,
}

/// What stands in `[off_line]`.
#[derive(Default)]
pub(super) struct OffLineDraft {
    pub(super) from: Option<At<Volts>>,
    pub(super) to: Option<At<Volts>>,
    pub(super) points: Option<At<i64>>,
}

/// Fewest points that show a bend beside a line's two parameters, and the most anybody waits for.
const POINTS: (i64, i64) = (4, 20);
/// Points where the profile does not say.
const USUAL_POINTS: u32 = 5;
/// Where neither the profile nor a limit gives an upper end: this share of the way from the floor to the lowest trip.
const UP_TO: f64 = 0.75;

/// Share of the off current's limit; one per cent is common practice.
const DRIFT: f64 = 0.01;
/// Off current where the profile sets no limit, in amperes.
const USUAL_OFF_CURRENT: f64 = 10e-6;

impl OffLine {
    /// The voltages, lowest first, evenly spaced.
    pub fn voltages(&self) -> impl Iterator<Item = Volts> {
        let step = (self.to - self.from) / f64::from(self.points - 1);
        let (from, last) = (self.from, self.points - 1);
        (0..last).map(move |index| from + step * f64::from(index)).chain(std::iter::once(self.to))
    }
}

impl Profile {
    /// Where the off current is read at several voltages; `None` where the profile asks for nothing that needs it: no
    /// `[off_line]`, no `[[off_path]]`, and no limit on conductance or constant part.
    pub fn off_line(&self) -> Option<OffLine> {
        let limited = |name| self.limits.contains_key(&name);
        let asked = self.off_line.is_some()
            || self.off_budget().is_some()
            || limited(QuantityName::OffConductance)
            || limited(QuantityName::OffConstantCurrent);
        asked.then(|| self.off_line.unwrap_or_else(|| self.usual_off_line()))
    }

    /// How far the off current may still move once it counts as settled: a share of what its limit allows.
    pub fn off_drift(&self) -> Amps {
        let most = self.limits.get(&QuantityName::OffCurrent).and_then(|limit| limit.max);
        Amps(most.unwrap_or(USUAL_OFF_CURRENT) * DRIFT)
    }

    fn usual_off_line(&self) -> OffLine {
        let from = self.supply.floor;
        OffLine { from, to: self.off_line_top().max(from), points: USUAL_POINTS }
    }

    fn off_line_top(&self) -> Volts {
        let off_at = self.limits.get(&QuantityName::OffCurrent).and_then(|limit| limit.at);
        let lowest_trip = self.limits.get(&QuantityName::Trip).and_then(|limit| limit.min).map(Volts);
        let floor = self.supply.floor;
        off_at.or(lowest_trip.map(|trip| floor + (trip - floor) * UP_TO)).unwrap_or(floor)
    }
}

/// Reads `[off_line]`, where there is one.
pub(super) fn read(root: &mut Table<'_, '_>) -> Option<OffLineDraft> {
    root.optional_table("off_line").map(|mut table| OffLineDraft {
        from: table.quantity("from"),
        to: table.quantity("to"),
        points: table.optional_integer("points"),
    })
}

impl OffLineDraft {
    pub(super) fn finish(&self) -> Option<OffLine> {
        let points = self.points.as_ref().map_or(Some(USUAL_POINTS), |at| u32::try_from(at.value).ok())?;
        Some(OffLine { from: self.from.as_ref()?.value, to: self.to.as_ref()?.value, points })
    }
}

/// Notes what does not fit.
pub(super) fn check(draft: &Draft, root: &Table<'_, '_>) {
    let Some(line) = &draft.off_line else { return };
    if let Some(from) = &line.from
        && from.value <= Volts::ZERO
    {
        root.problem(from, "not above zero");
    }
    super::check::below(&line.from, &line.to, "the line goes up", root);
    let lowest_trip = draft.volts(QuantityName::Trip, |limit| &limit.min);
    super::check::below(&line.to, &lowest_trip, "it is measured below the trip, switch open", root);
    if let Some(points) = &line.points
        && !(POINTS.0..=POINTS.1).contains(&points.value)
    {
        root.problem(points, "wanted 4 to 20: fewer show no bend beside the line");
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::profile::sample::problems;
    use insta::assert_snapshot as says;

    #[test]
    fn the_voltages_are_evenly_spaced_and_end_exactly() {
        let line = OffLine { from: Volts(1.0), to: Volts(2.8), points: 4 };
        let voltages: Vec<f64> = line.voltages().map(|volts| (volts.0 * 1e9).round() / 1e9).collect();
        assert_eq!(voltages, [1.0, 1.6, 2.2, 2.8]);
    }

    #[test]
    fn a_line_that_cannot_be_measured_is_refused() {
        says!(problems(&[("from = \"2.00 V\"", "from = \"5.90 V\"")]), @r#"p.toml:70:8: off_line.from = "5.90 V": not below off_line.to = "5.80 V"; the line goes up"#);
        says!(problems(&[("to = \"5.80 V\"", "to = \"5.95 V\"")]), @r#"p.toml:71:6: off_line.to = "5.95 V": not below limits.trip.min = "5.88 V"; it is measured below the trip, switch open"#);
        says!(problems(&[("points = 5", "points = 3")]), @"p.toml:72:10: off_line.points = 3: wanted 4 to 20: fewer show no bend beside the line");
    }
}
