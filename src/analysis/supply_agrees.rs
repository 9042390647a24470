//! Whether the supply puts out what it is set to.
//!
//! With current, leads and burden take their share; without, nothing may lie between set-point and terminals but the
//! errors of supply and voltmeter. More than that, at every set-point and to the same side, is a supply that drifts or
//! senses at an open lead. With current the terminals can only be lower, so above the set-point they count too.

use super::finding::{About, Finding, FindingCode};
use super::plateau::{Course, Plateau};
use crate::trace::{Sample, SwitchState};
use crate::units::{Amps, Volts};

/// Multiples of the claimed errors of supply and voltmeter that are no accident.
const SURELY: f64 = 3.0;
/// With the load's current the terminals lie below: one of these errors above is too much.
const SURELY_LOADED: f64 = 1.0;
/// What settling may still leave.
const SETTLING: Volts = Volts(2e-3);
/// Lower set-points tell little of a share.
const LOWEST: Volts = Volts(0.5);
/// Terminals below this share of the set-point were not supplied at all.
const SUPPLIED: f64 = 0.5;
/// Current out of the board comes from another source.
const BACKWARDS: Amps = Amps(-1e-3);
/// Fewest set-points.
const FEWEST: usize = 2;

/// A supply whose output lies beside its set-point everywhere.
pub(super) fn supply_disagrees(course: &Course<'_>) -> Option<Finding> {
    let backwards = |sample: &Sample| sample.current.amps().is_some_and(|amps| amps < BACKWARDS);
    if course.trace.samples.iter().any(backwards) {
        return None;
    }
    let witnesses: Vec<Witness<'_>> = (0..course.plateaus.len())
        .filter(|index| reached_upwards(course, *index))
        .filter_map(|index| witness(course, &course.plateaus[index]))
        .collect();
    let (first, last) = (witnesses.first()?, witnesses.last()?);
    let same = |other: &Witness<'_>| {
        other.beside.abs() > other.allowed && other.beside.0.signum() == last.beside.0.signum()
    };
    if witnesses.len() < FEWEST || !witnesses.iter().all(same) {
        return None;
    }
    let side = if last.beside.0 > 0.0 { "above" } else { "below" };
    Some(Finding {
        code: FindingCode::SupplyDisagrees,
        about: About::Bench,
        text: format!(
            "at each of {} set-points the terminals lay {side} what was set, by {} at {} and by {} at {}, without current too, where \
             supply and voltmeter may differ by {}. Look first at the supply's sense leads, then let it warm up and hold it \
             against the voltmeter with nothing connected (ebbmark bench check).",
            witnesses.len(),
            first.beside.abs(),
            first.sample.set,
            last.beside.abs(),
            last.sample.set,
            first.allowed
        ),
    })
}

/// On the way down a supply that cannot sink lags behind.
fn reached_upwards(course: &Course<'_>, index: usize) -> bool {
    let before = index.checked_sub(1).and_then(|before| course.plateaus.get(before));
    before.is_none_or(|before| before.set < course.plateaus[index].set)
}

/// A settled reading that shows the supply's own voltage.
struct Witness<'t> {
    sample: &'t Sample,
    /// How far the terminals lie above the set-point.
    beside: Volts,
    /// How far they may.
    allowed: Volts,
}

fn witness<'t>(course: &Course<'t>, plateau: &Plateau) -> Option<Witness<'t>> {
    let at = plateau.samples.end - 1;
    let sample = &course.trace.samples[at];
    let sense = sample.sense?;
    let limited = sample.limited == Some(true) || sample.was_limited == Some(true);
    if sample.set < LOWEST || sense < sample.set * SUPPLIED || limited {
        return None;
    }
    let beside = sense - sample.set;
    match course.states[at] {
        SwitchState::Off => Some(Witness { sample, beside, allowed: allowed(course, sample, SURELY)? }),
        SwitchState::On => {
            let allowed = allowed(course, sample, SURELY_LOADED)?;
            (beside > allowed).then_some(Witness { sample, beside, allowed })
        }
        SwitchState::Neither => None,
    }
}

/// How far supply and voltmeter may differ; `None` where nobody stated it.
fn allowed(course: &Course<'_>, sample: &Sample, errors: f64) -> Option<Volts> {
    let claims = &course.trace.claims;
    let claimed = claims.set?.limit(sample.set.0) + claims.sense?.limit(sample.set.0);
    Some(Volts(claimed * errors) + SETTLING)
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::trace::{Accuracy, Trace};

    /// Readings on the way up, with what the supply makes of a set-point.
    fn run(readings: &[(f64, f64)], output: impl Fn(f64) -> f64) -> Trace {
        let mut trace = staircase(readings);
        for sample in &mut trace.samples {
            sample.sense = Some(Volts(output(sample.set.0)));
        }
        let claim = |absolute| Some(Accuracy { relative: 0.5e-3, absolute, resolution: 1e-3 });
        (trace.claims.set, trace.claims.sense) = (claim(5e-3), claim(50e-6));
        trace
    }

    fn found(trace: &Trace) -> bool {
        let profile = profile();
        supply_disagrees(&Course::new(trace, &profile)).is_some()
    }

    #[test]
    fn a_supply_beside_its_set_points_without_current_is_told() {
        let up = [(0.3, 0.0), (1.0, 0.0), off(5.2), off(6.0), on(7.6)];
        assert!(!found(&run(&up, |set| set + 5e-3)), "within what its maker claims");
        assert!(found(&run(&up, |set| set + 0.06)));
        assert!(found(&run(&up, |set| set * 1.05)));
        assert!(found(&run(&up, |set| set * 0.9)));
        assert!(
            !found(&run(&up, |set| if set > 6.5 { set - 0.3 } else { set })),
            "the drop of the load's current"
        );
        assert!(!found(&run(&up, |_| 0.0)), "not supplied at all");
    }

    #[test]
    fn what_lags_on_the_way_down_and_what_another_source_lifts_is_not_the_supply() {
        let down = [on(7.6), off(5.8), off(5.5), off(5.2)];
        assert!(!found(&run(&down, |set| if set < 6.0 { set + 0.2 } else { set })));
        let fed = [(0.3, -0.01), (1.0, -0.01), (2.0, -0.01)];
        assert!(!found(&run(&fed, |set| set + 1.0)));
    }

    #[test]
    fn without_claims_nothing_is_said() {
        let mut trace = run(&[(1.0, 0.0), off(5.2), off(6.0)], |set| set * 1.05);
        trace.claims.set = None;
        assert!(!found(&trace));
    }
}
