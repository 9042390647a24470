//! Detect and release delay from steps across a threshold.
//!
//! Between a set-point on one side of the threshold and one clearly beyond it the terminals cross it at some moment, and
//! some time later the switch changes. Each step bounds that time from both sides; all steps bound the same delay, so
//! what they have in common is where it lies, as a rectangle (JCGM 100:2008, 4.3.7). No mark in the trace is needed:
//! any step that leads across a known threshold bounds the delay, be it loosely.
//!
//! A delay made by a capacitor depends on how far beyond the threshold the step goes. So only steps of like size are
//! taken together, and the budget says how far they went.

use super::edges::{Direction, Edge, Edges};
use super::finding::{About, Finding, FindingCode};
use super::plateau::Course;
use super::quantity::{Contribution, Quantity};
use super::ramps;
use super::switching_time::{Burst, Span};
use super::terminals::{Rail, source_resistance};
use crate::profile::QuantityName;
use crate::units::{Unit, Volts, prefixed};

/// The set-points must lie apart from the threshold by this many of its standard uncertainties: before it by the half-width
/// of a rectangle, beyond it by more than any.
const BEFORE: f64 = 1.732;
const BEYOND: f64 = 3.0;
/// Steps that go beyond the threshold by up to this much more or less count as alike.
const ALIKE: f64 = 2.0;
/// Terminals that have gone this share of a step have arrived as far as a mean over the settling can show.
const ARRIVED: f64 = 0.5;

/// What one step says.
#[derive(Clone, Copy, Debug)]
struct Step {
    /// The delay lies between, s.
    delay: Span,
    /// How far beyond the threshold the step went.
    beyond: Volts,
}

impl Step {
    fn width(&self) -> f64 {
        self.delay.to - self.delay.from
    }
}

/// The delays the profile asks for, of the `thresholds` that were found. One that its limit needs closer than this bench can
/// tell is no figure but a finding, with the bounds.
pub(super) fn delays(
    course: &Course<'_>,
    found: &Edges,
    thresholds: &[Quantity],
) -> (Vec<Quantity>, Vec<Finding>) {
    let measure = &course.profile.measure;
    let asked = [(measure.detect_delay, QuantityName::Trip), (measure.release_delay, QuantityName::ReEnable)];
    let wanted = asked.into_iter().filter(|(asked, _)| *asked).map(|(_, name)| name);
    let (mut quantities, mut findings) = (Vec::new(), Vec::new());
    for name in wanted {
        let threshold = thresholds.iter().find(|quantity| quantity.name == name);
        let Some(threshold) = threshold else { continue };
        let mut stated = delay(course, found, threshold);
        if measure.ramp_rates.is_some() {
            let (better, finding) = ramps::with_ramps(course, found, threshold, stated);
            stated = better;
            findings.extend(finding);
        }
        let Some(delay) = stated else { continue };
        match unresolved(course, &delay) {
            Some(finding) => findings.push(finding),
            None => quantities.push(delay),
        }
    }
    (quantities, findings)
}

/// The bounds leave open whether a limit is kept, and lie so far apart that this is the bench's doing.
fn unresolved(course: &Course<'_>, delay: &Quantity) -> Option<Finding> {
    let limit = course.profile.limits.get(&delay.name)?;
    let half_width = delay.standard_uncertainty * 3.0_f64.sqrt();
    let (least, most) = (delay.value - half_width, delay.value + half_width);
    let blurred = |limit: &f64| least < *limit && *limit < most && half_width > limit * COARSE;
    let limit = limit.max.filter(blurred).or(limit.min.filter(blurred))?;
    let text = |seconds: f64| prefixed(seconds, Unit::Second);
    Some(Finding {
        code: FindingCode::DelayNotResolved,
        about: About::Bench,
        text: format!(
            "the {} lies between {} and {}; setting and reading take this bench too long to tell closer, and the limit of {} lies in \
             between. Judge so short a delay from an oscilloscope trace, or widen the limit to what this bench can tell.",
            delay.name.title(),
            text(least.max(0.0)),
            text(most),
            text(limit)
        ),
    })
}

/// Bounds farther from their middle than this share of a limit cannot judge it; as for the off current, a limit should
/// be at least twice the uncertainty.
const COARSE: f64 = 0.5;

/// The delay of the change beyond `threshold`; `None` where no step leads clearly across it.
fn delay(course: &Course<'_>, found: &Edges, threshold: &Quantity) -> Option<Quantity> {
    let direction = Direction::of(threshold.name)?;
    let name = direction.delay_name();
    let edges = found.edges.iter().filter(|edge| edge.direction == direction);
    let mut steps: Vec<Step> = edges.filter_map(|edge| step(course, found, edge, threshold)).collect();
    steps.sort_by(|a, b| a.width().total_cmp(&b.width()));
    let narrowest = *steps.first()?;
    let alike =
        |step: &&Step| step.beyond <= narrowest.beyond * ALIKE && narrowest.beyond <= step.beyond * ALIKE;
    let steps: Vec<&Step> = steps.iter().filter(alike).collect();
    let common = common(&steps);
    let source =
        format!("when it changed, from {} steps to {} beyond the threshold", steps.len(), narrowest.beyond);
    let part = Contribution::rectangular(&source, (common.to - common.from) / 2.0);
    Some(Quantity::new(name, (common.from + common.to) / 2.0, vec![part]))
}

/// What all steps have in common; where they contradict each other, all that any of them allows.
fn common(steps: &[&Step]) -> Span {
    let largest = |value: fn(&Step) -> f64| steps.iter().map(|step| value(step)).fold(0.0, f64::max);
    let smallest =
        |value: fn(&Step) -> f64| steps.iter().map(|step| value(step)).fold(f64::INFINITY, f64::min);
    let (from, to) = (largest(|step| step.delay.from), smallest(|step| step.delay.to));
    if from <= to {
        Span { from, to }
    } else {
        Span { from: smallest(|step| step.delay.from), to: largest(|step| step.delay.to) }
    }
}

/// The bounds from one change, if its set-point came from before the threshold and lies clearly beyond it.
fn step(course: &Course<'_>, found: &Edges, edge: &Edge, threshold: &Quantity) -> Option<Step> {
    let direction = edge.direction;
    let old = edge.plateau.checked_sub(1)?;
    let new = &course.plateaus[edge.plateau];
    let still_before = Direction::from(course.plateaus[old].settled) == Some(direction);
    let bounces = found.bounces.iter().any(|bounce| bounce.plateau == edge.plateau);
    if !still_before || bounces || !course.plateaus[old].in_scope {
        return None;
    }
    let uncertainty = threshold.standard_uncertainty;
    let height = direction.along(new.set) - direction.along(course.plateaus[old].set);
    if height < (BEFORE + BEYOND) * uncertainty {
        return None;
    }
    let rail = Rail::near(course, &found.stays, direction, new.set)?;
    let at = direction.along(Volts(threshold.value));
    let from = course.terminals(course.settled(old));
    let before = at - direction.along(from);
    let beyond = direction.along(rail.at(new.set)) - at;
    if before < BEFORE * uncertainty || beyond < BEYOND * uncertainty {
        return None;
    }
    let burst = Burst::of(course, edge)?;
    let (stepped, changed) = (burst.stepped(), burst.changed()?);
    // An output moves no later than a straight line over its settling time would: the threshold's share of the way.
    let share = ((before + BEFORE * uncertainty) / (before + beyond)).min(1.0);
    let way = course.trace.claims.slew.time(course.plateaus[old].set, new.set);
    let settle = course.trace.claims.times.map(|times| (times.settle + way).as_secs_f64());
    let remaining = (course.terminals(burst.first()) - rail.at(new.set)).abs().0;
    // The drop in the leads comes and goes with the switch.
    let drop = source_resistance(course).map_or(0.0, |leads| (burst.on_current() * leads).0);
    let arrived = remaining <= ARRIVED * (before + beyond) + drop;
    let crossed = match settle {
        Some(settle) if arrived => stepped.to + share * settle,
        _ => changed.to,
    };
    let delay = Span { from: (changed.from - crossed).max(0.0), to: (changed.to - stepped.from).max(0.0) };
    Some(Step { delay, beyond: Volts(beyond) })
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{profile, staircase};
    use super::*;
    use crate::profile::Limit;
    use crate::trace::{Times, Trace};
    use std::time::Duration;

    /// Readings of 20 ms back to back that begin 2 ms after a step from 6.02 V to 5.9 V; the switch opens `delay` ms after it.
    fn step_test(delay: f64, times: Option<Times>) -> Trace {
        let mut readings = vec![(7.6, 7.6 / 55.0), (6.1, 6.1 / 55.0), (6.02, 6.02 / 55.0)];
        for index in 0..4 {
            let begun = 2.0 + 20.0 * f64::from(index);
            let share = ((delay - begun) / 20.0).clamp(0.0, 1.0);
            readings.push((5.9, share * 5.9 / 55.0 + 2.5e-6));
        }
        let mut trace = staircase(&readings);
        for (sample, index) in trace.samples.iter_mut().skip(3).zip(0..) {
            sample.at = Duration::from_millis(300 + 10 + 2 + 10 + 20 * index);
        }
        trace.claims.times = times;
        trace
    }

    fn measured(trace: &Trace) -> Quantity {
        let profile = profile();
        let course = Course::new(trace, &profile);
        let trip = Quantity::new(QuantityName::Trip, 6.0, vec![Contribution::rectangular("bracket", 0.001)]);
        delay(&course, &Edges::find(&course), &trip).expect("a step across the trip")
    }

    const TIMES: Times = Times { integration: Duration::from_millis(20), settle: Duration::from_millis(15) };

    #[test]
    fn the_share_of_a_reading_tells_when_the_switch_opened() {
        for delay in [1.0, 3.5, 12.0, 30.0, 55.0] {
            let found = measured(&step_test(delay, Some(TIMES)));
            let half_width = found.standard_uncertainty * 3.0_f64.sqrt();
            assert!((found.value - delay / 1e3).abs() <= half_width, "{delay} ms, found {found:?}");
            // 2 ms of not knowing when the step was made, its way to the threshold, 2 x 3 % of the reading.
            assert!(half_width < 3.5e-3, "{delay} ms, found {found:?}");
        }
    }

    #[test]
    fn without_stated_times_the_readings_alone_bound_it() {
        for delay in [3.5, 12.0, 55.0] {
            let found = measured(&step_test(delay, None));
            let half_width = found.standard_uncertainty * 3.0_f64.sqrt();
            assert!((found.value - delay / 1e3).abs() <= half_width, "{delay} ms, found {found:?}");
            assert!(half_width > 8e-3, "{delay} ms, found {found:?}");
        }
    }

    #[test]
    fn bounds_too_wide_for_the_limit_are_a_finding_and_no_figure() {
        let told = |delay: f64, max: f64| {
            let (trace, mut profile) = (step_test(delay, Some(TIMES)), profile());
            profile.measure.detect_delay = true;
            profile.limits.insert(QuantityName::DetectDelay, Limit { at: None, min: None, max: Some(max) });
            let course = Course::new(&trace, &profile);
            let part = Contribution::rectangular("bracket", 0.001);
            let trip = Quantity::new(QuantityName::Trip, 6.0, vec![part]);
            let (quantities, findings) = delays(&course, &Edges::find(&course), &[trip]);
            assert_eq!(quantities.len() + findings.len(), 1);
            findings.first().map(|finding| (finding.code, finding.text.clone()))
        };
        let (code, text) = told(1.0, 2e-3).expect("a rectangle of some 2 ms half-width about the limit");
        assert_eq!(code, FindingCode::DelayNotResolved);
        assert!(
            text.starts_with("the detect delay lies between 0.000 s and ") && text.contains("2.000 ms"),
            "{text}"
        );
        assert_eq!(told(1.0, 20e-3), None, "clearly below");
        assert_eq!(told(30.0, 20e-3), None, "clearly above");
        assert_eq!(told(20.0, 20e-3), None, "near the limit, and the bench is good enough for it");
    }

    #[test]
    fn a_step_that_ends_beside_the_threshold_says_nothing() {
        let trace = step_test(3.5, Some(TIMES));
        let profile = profile();
        let course = Course::new(&trace, &profile);
        let wide = Quantity::new(QuantityName::Trip, 6.0, vec![Contribution::rectangular("bracket", 0.1)]);
        assert_eq!(delay(&course, &Edges::find(&course), &wide), None);
    }
}
