//! An ammeter that is not on the range it says: it overloads below its full scale.

use super::finding::{About, Finding, FindingCode};
use super::plateau::Course;
use crate::trace::Sample;

/// Fewest overloads: one may have caught the charge of a capacitor before the supply limited it.
const FEWEST: usize = 2;

/// Overloads on a range that carries more than the supply gives.
pub(super) fn stuck_range(course: &Course<'_>) -> Option<Finding> {
    let limit = course.profile.supply.current_limit;
    let cannot_be = |sample: &&Sample| {
        sample.current.amps().is_none() && sample.range.is_some_and(|range| range >= limit)
    };
    let mut overloads = course.trace.samples.iter().filter(cannot_be);
    let first = overloads.next()?;
    let count = 1 + overloads.count();
    let range = first.range?;
    (count >= FEWEST).then(|| Finding {
        code: FindingCode::RangeNotAdequate,
        about: About::Bench,
        text: format!(
            "the ammeter overloaded in {count} readings, first at {}, though it says that it is on its {range} range and the supply \
             gives no more than {limit}: it hangs on a smaller range, whose burden starves the board. Listen whether its \
             relay clicks, measure a known current on each range, and have it repaired.",
            first.set
        ),
    })
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{on, profile, staircase};
    use super::*;
    use crate::trace::Current;
    use crate::units::Amps;

    /// The supply gives 350 mA.
    fn found(range: f64, overloads: usize) -> bool {
        let mut trace = staircase(&[on(7.6), on(7.6), on(7.5), on(7.4)]);
        for sample in trace.samples.iter_mut().take(overloads) {
            sample.current = Current::OVERLOAD;
            sample.range = Some(Amps(range));
        }
        let profile = profile();
        stuck_range(&Course::new(&trace, &profile)).is_some()
    }

    #[test]
    fn more_than_the_supply_gives_cannot_be() {
        assert!(found(1.0, 2));
        assert!(!found(1.0, 1), "one may be a capacitor");
        assert!(!found(100e-6, 4), "a small range may overload");
    }
}
