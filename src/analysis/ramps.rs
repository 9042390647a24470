//! Detect and release delay from ramps of several rates within one run.
//!
//! While the set-point moves on by r each second, a board whose delay is d changes r x d beyond its threshold. The ramp is a
//! staircase of steps of height h that is known at every moment; when the board changed within a reading is known, too
//! (`switching_time`). The threshold lay anywhere within the step that crossed it, so one ramp leaves the sum of threshold
//! and r x d open within h, and ramps of one rate that began a part of a step apart leave what they have in common. The
//! line through these sums over the rate has the threshold at rest as its intercept and the delay as its slope; both are
//! of one fit, so an error of one is an error of the other.
//!
//! No mark in the trace is needed: any change at the end of a few equal steps is that of a ramp.

use super::at_rest::{AtRate, AtRest};
use super::cause::Cause;
use super::edges::{Direction, Edge, Edges};
use super::finding::{About, Finding, FindingCode};
use super::plateau::{Course, SAME_SET};
use super::quantity::{Contribution, Quantity};
use super::switching_time::{Burst, Span};
use super::terminals::Rail;
use crate::profile::QuantityName;
use crate::statistics::line::{Line, Point};
use crate::units::{Unit, Volts, prefixed};

/// Fewest rates: with fewer, nothing is left to show that they lie on a line.
const FEWEST_RATES: usize = 3;
/// Fewest equal steps up to the change.
const FEWEST_STEPS: usize = 3;
/// Steps within this share of each other are equal.
const EQUAL: f64 = 0.01;
/// The longest of equal steps takes no more than so many times the shortest.
const EVEN: f64 = 1.5;
/// A line through ramps is stated with k = 2.
const COVERAGE_FACTOR: f64 = 2.0;
/// Farther apart than this many standard uncertainties of a difference two figures are not of the same thing; with two, one
/// good board in ten would be doubted.
const DIFFERENT: f64 = 3.0;

/// The delay that is stated beyond `threshold`: that of the `steps` across it or that of the ramps, whichever is known
/// better; and how they agree. Where they differ none is stated, for one of them is wrong.
pub(super) fn with_ramps(
    course: &Course<'_>,
    found: &Edges,
    threshold: &Quantity,
    steps: Option<Quantity>,
) -> (Option<Quantity>, Option<Finding>) {
    let Some(fitted) = RampFit::of(course, found, threshold) else {
        return (steps, Some(not_seen(threshold.name)));
    };
    let Some(ramps) = fitted.delay() else { return (steps, None) };
    let finding = fitted.finding(threshold, &ramps, steps.as_ref());
    let better = match steps {
        _ if finding.code == FindingCode::DelaysDiffer => None,
        Some(steps) if steps.standard_uncertainty <= ramps.standard_uncertainty => Some(steps),
        _ => Some(ramps),
    };
    (better, Some(finding))
}

/// A threshold and its delay from all ramps of a run through it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct RampFit {
    /// The threshold: trip or re-enable.
    pub threshold: QuantityName,
    /// Threshold and delay.
    pub at_rest: AtRest,
    /// Slowest and fastest rate, V/s.
    pub rates: (f64, f64),
    /// How many ramps there were.
    pub ramps: usize,
}

impl RampFit {
    pub(super) fn of(course: &Course<'_>, found: &Edges, threshold: &Quantity) -> Option<Self> {
        let direction = Direction::of(threshold.name)?;
        let edges = found.edges.iter().filter(|edge| edge.direction == direction);
        let mut seen: Vec<Seen> = edges.filter_map(|edge| Seen::of(course, found, edge, threshold)).collect();
        seen.sort_by(|a, b| a.height.total_cmp(&b.height));
        let points: Vec<AtRate> = seen
            .chunk_by(|a, b| (b.height - a.height).abs() <= EQUAL * a.height)
            .map(|alike| at_one_rate(alike, direction, noise_of(threshold)))
            .collect();
        let (slowest, fastest) = (points.first()?.rate, points.last()?.rate);
        if points.len() < FEWEST_RATES {
            return None;
        }
        let at_rest = AtRest::fit(&points, direction)?;
        let threshold = threshold.name;
        Some(Self { threshold, at_rest, rates: (slowest, fastest), ramps: seen.len() })
    }

    fn delay(&self) -> Option<Quantity> {
        let name = Direction::of(self.threshold)?.delay_name();
        let part = Contribution::normal("line through the rates of ramps", self.at_rest.delay_uncertainty);
        Some(Quantity::new(name, self.at_rest.delay, vec![part]))
    }

    /// Whether the ramps agree with steps and threshold.
    fn finding(&self, threshold: &Quantity, ramps: &Quantity, steps: Option<&Quantity>) -> Finding {
        let AtRest { value, uncertainty, .. } = self.at_rest;
        let agrees = |a: f64, b: f64, ua: f64, ub: f64| (a - b).abs() <= DIFFERENT * ua.hypot(ub);
        let same_threshold = agrees(value, threshold.value, uncertainty, threshold.standard_uncertainty);
        let same_delay = steps.is_none_or(|steps| {
            agrees(ramps.value, steps.value, ramps.standard_uncertainty, steps.standard_uncertainty)
        });
        let stated = |value: f64, uncertainty: f64, unit: Unit| {
            format!("{} ± {}", prefixed(value, unit), prefixed(COVERAGE_FACTOR * uncertainty, unit))
        };
        let seconds =
            |quantity: &Quantity| stated(quantity.value, quantity.standard_uncertainty, Unit::Second);
        let (title, at) = (ramps.name.title(), threshold.name.title());
        let (slowest, fastest) = self.rates;
        let fit = format!(
            "{} ramps of {slowest:.2} V/s to {fastest:.2} V/s give a {title} of {} and a {at} at rest of {} (k = 2, correlation {:.2})",
            self.ramps,
            seconds(ramps),
            stated(value, uncertainty, Unit::Volt),
            self.at_rest.correlation()
        );
        let by_steps = steps.map(|steps| format!("; steps across the threshold {}", seconds(steps)));
        let by_steps = by_steps.unwrap_or_default();
        if same_threshold && same_delay {
            let text = format!("{fit}{by_steps}. They agree.");
            return Finding { code: FindingCode::DelayFromRamps, about: About::Board, text };
        }
        let differs = if same_threshold {
            String::new()
        } else {
            format!("; the {at} was found at {}", Volts(threshold.value))
        };
        let text = format!(
            "{fit}{by_steps}{differs}. They differ by more than both leave open, so no {title} is stated: the board is slower than \
             its profile says and was beyond its threshold unnoticed, or the delay depends on how far and how fast the voltage \
             goes beyond, or the supply settles more slowly than its definition says. Look at a step and a ramp with an \
             oscilloscope."
        );
        Finding { code: FindingCode::DelaysDiffer, about: About::Bench, text }
    }
}

fn not_seen(threshold: QuantityName) -> Finding {
    let text = format!(
        "fewer than {FEWEST_RATES} rates of ramps went through the {} as far as the board's change, so they say nothing about its delay",
        threshold.title()
    );
    Finding { code: FindingCode::DelayFromRamps, about: About::Board, text }
}

/// One ramp up to the change of the board.
#[derive(Clone, Copy, Debug)]
struct Seen {
    /// V/s at the terminals.
    rate: f64,
    /// Height of a step at the terminals, V.
    height: f64,
    /// Where within a step its set-points lie, as a share of the height.
    phase: f64,
    /// How long the supply takes to settle, s.
    settle: f64,
    /// How far along the direction the ramp had come when the board changed, its steps taken for a straight line: between
    /// these.
    reached: Span,
}

impl Seen {
    fn of(course: &Course<'_>, found: &Edges, edge: &Edge, threshold: &Quantity) -> Option<Self> {
        let direction = edge.direction;
        let bounces = found.bounces.iter().any(|bounce| bounce.plateau == edge.plateau);
        let last = first_moved(course, edge)?;
        let first = first_of_ramp(course, direction, last);
        let steps = first + 1..last + 1;
        let rail = Rail::near(course, &found.stays, direction, course.plateaus[last].set)?;
        let along = |plateau: usize| direction.along(rail.at(course.plateaus[plateau].set));
        // All of the way to the threshold belongs to the ramp.
        let before = along(first) < direction.along(Volts(threshold.value)) - threshold.standard_uncertainty;
        if bounces || steps.len() < FEWEST_STEPS || !before {
            return None;
        }
        let times = course.trace.claims.times?;
        let mut blur = 0.0_f64;
        let mut points = Vec::with_capacity(steps.len());
        for plateau in steps.clone() {
            let Span { from, to } = stepped(course, plateau, times.integration.as_secs_f64());
            blur = blur.max((to - from) / 2.0);
            points.push(Point::plain(f64::midpoint(from, to), along(plateau)));
        }
        if !is_even(&points) {
            return None;
        }
        let line = Line::fit(points.into_iter())?;
        let height = (along(last) - along(first)) / steps.len() as f64;
        let changed = Burst::of(course, &Edge { plateau: last, ..edge.clone() })?.changed()?;
        let loose = rail.scatter + line.slope * blur;
        let reached = Span { from: line.at(changed.from) - loose, to: line.at(changed.to) + loose };
        let phase = (along(last) / height).rem_euclid(1.0);
        let way = course.trace.claims.slew.time(course.plateaus[last - 1].set, course.plateaus[last].set);
        let settle = (times.settle + way).as_secs_f64();
        (line.slope > 0.0 && height > 0.0).then_some(Self {
            rate: line.slope,
            height,
            phase,
            settle,
            reached,
        })
    }
}

/// The plateau on which the board began to change: a reading of which most was in the state before counts as that
/// state, but not here.
fn first_moved(course: &Course<'_>, edge: &Edge) -> Option<usize> {
    let earlier = Edge { plateau: edge.plateau.checked_sub(1)?, ..edge.clone() };
    let moved_earlier = edge.direction == Direction::Down
        && edge.last_before.is_none()
        && Burst::of(course, &earlier).is_some_and(|burst| burst.changed().is_some());
    Some(if moved_earlier { earlier.plateau } else { edge.plateau })
}

/// The plateau from which equal steps in `direction` lead to `last`.
fn first_of_ramp(course: &Course<'_>, direction: Direction, last: usize) -> usize {
    let height = |plateau: usize| {
        let before = course.plateaus.get(plateau.checked_sub(1)?).filter(|before| before.in_scope)?;
        Some(direction.along(course.plateaus[plateau].set) - direction.along(before.set))
    };
    let Some(wanted) = height(last).filter(|height| *height > 0.0) else { return last };
    let equal = |plateau: &usize| {
        height(*plateau).is_some_and(|height| (height - wanted).abs() <= EQUAL * wanted + SAME_SET)
    };
    last - (0..last).map(|back| last - back).take_while(equal).count()
}

/// When the set-point moved to a plateau: after the last reading before, and before its first.
fn stepped(course: &Course<'_>, plateau: usize, integration: f64) -> Span {
    let first = course.plateaus[plateau].samples.start;
    let at = |sample: usize| course.trace.samples[sample].at.as_secs_f64();
    Span { from: at(first - 1) + integration / 2.0, to: at(first) - integration / 2.0 }
}

/// Whether the steps followed each other at like times.
fn is_even(points: &[Point]) -> bool {
    let times = points.windows(2).map(|pair| pair[1].x - pair[0].x);
    let (shortest, longest) = (times.clone().fold(f64::INFINITY, f64::min), times.fold(0.0, f64::max));
    longest <= EVEN * shortest
}

/// Threshold and rate x delay together, as far along as ramps of one rate leave it open; where they contradict each other,
/// all that any of them allows.
///
/// The step that crossed the threshold went beyond it by some part of its height, so a ramp had come farther than the sum by
/// anything up to a whole step. Of ramps whose set-points lie in different phases, that of the one that came farthest is no
/// more than the largest gap between phases short of a whole step. A step arrives late, but no later than on a straight
/// line over the settling time: the less, the farther it goes beyond.
fn at_one_rate(alike: &[Seen], direction: Direction, noise: f64) -> AtRate {
    let mean = |value: fn(&Seen) -> f64| alike.iter().map(value).sum::<f64>() / alike.len() as f64;
    let extreme =
        |value: fn(&Seen) -> f64, of: fn(f64, f64) -> f64, from: f64| alike.iter().map(value).fold(from, of);
    let (rate, height, gap) = (mean(|seen| seen.rate), mean(|seen| seen.height), largest_gap(alike));
    let late = rate * mean(|seen| seen.settle);
    let farthest = |value: fn(&Seen) -> f64| extreme(value, f64::max, f64::NEG_INFINITY);
    let nearest = |value: fn(&Seen) -> f64| extreme(value, f64::min, f64::INFINITY);
    let step = height.max(late);
    let low = farthest(|seen| seen.reached.from) - step.min(height + late * gap);
    let high = nearest(|seen| seen.reached.to).min(farthest(|seen| seen.reached.to) - height * (1.0 - gap));
    let (low, high) = if low < high {
        (low, high)
    } else {
        (nearest(|seen| seen.reached.from) - step, farthest(|seen| seen.reached.to))
    };
    AtRate {
        rate,
        volts: direction.volts(f64::midpoint(low, high)).0,
        uncertainty: (((high - low) / 2.0).max(LEAST) / 3.0_f64.sqrt()).hypot(noise),
    }
}

/// What noise at the detector may do to the threshold, V: to the slow ramps it does as much.
fn noise_of(threshold: &Quantity) -> f64 {
    let noise = threshold.contributions.iter().find(|part| part.cause == Some(Cause::DetectorNoise));
    noise.map_or(0.0, |part| part.standard_uncertainty)
}

/// The largest gap between the phases of ramps, round the step, as a share of it.
fn largest_gap(alike: &[Seen]) -> f64 {
    let mut phases: Vec<f64> = alike.iter().map(|seen| seen.phase).collect();
    phases.sort_unstable_by(f64::total_cmp);
    let round = phases.first().map(|first| first + 1.0);
    let next = phases.iter().copied().skip(1).chain(round);
    phases.iter().zip(next).map(|(phase, next)| next - phase).fold(0.0, f64::max)
}

/// A ramp is known no better than the digits of a supply.
const LEAST: f64 = 0.5e-3;

#[cfg(test)]
mod tests {
    use super::*;

    const RATE: f64 = 0.2;
    const HEIGHT: f64 = 8e-3;

    /// Ramps up of 8 mV and 40 ms a step, in four phases, through a threshold of 6 V that a board follows after `delay`; the
    /// supply follows its set-point at once.
    fn ramps(delay: f64, above: f64) -> Vec<Seen> {
        let phases = [0.0, 0.25, 0.5, 0.75];
        let seen = |phase: &f64| {
            // The lowest set-point not below the threshold, and the straight line some time later.
            let steps = ((6.0 - above) / HEIGHT - phase).ceil() + phase;
            let crossed = above + steps * HEIGHT;
            let at = crossed + RATE * delay;
            let reached = Span { from: at - RATE * 1e-3, to: at + RATE * 1e-3 };
            Seen { rate: RATE, height: HEIGHT, phase: *phase, settle: 0.0, reached }
        };
        phases.iter().map(seen).collect()
    }

    /// Whatever the place of the threshold within a step: four phases leave a quarter of it open, and the millisecond within
    /// which each change was seen.
    #[test]
    fn ramps_of_one_rate_leave_the_gap_between_their_phases_open() {
        for place in 0..40 {
            let alike = ramps(0.03, f64::from(place) * 0.2e-3);
            let point = at_one_rate(&alike, Direction::Up, 0.0);
            let half_width = point.uncertainty * 3.0_f64.sqrt();
            let wanted = HEIGHT / 8.0 + RATE * 1e-3;
            assert!((half_width - wanted).abs() < 1e-9, "{place}: {half_width} V");
            assert!((point.volts - (6.0 + RATE * 0.03)).abs() <= half_width + 1e-12, "{place}: {point:?}");
        }
    }

    #[test]
    fn a_single_ramp_leaves_a_whole_step_open() {
        let alone = at_one_rate(&ramps(0.03, 0.0)[..1], Direction::Up, 0.0);
        assert!((alone.uncertainty * 3.0_f64.sqrt() - HEIGHT / 2.0 - RATE * 1e-3).abs() < 1e-9, "{alone:?}");
    }

    fn told(delay: f64, trip: f64) -> Finding {
        let at_rest =
            AtRest { value: 6.0, uncertainty: 1e-3, delay: 0.03, delay_uncertainty: 4e-3, covariance: 2e-6 };
        let fit = RampFit { threshold: QuantityName::Trip, at_rest, rates: (0.2, 0.8), ramps: 12 };
        let quantity = |name, value, u| Quantity::new(name, value, vec![Contribution::normal("test", u)]);
        let steps = quantity(QuantityName::DetectDelay, delay, 1e-3);
        let ramps = fit.delay().expect("of the trip");
        fit.finding(&quantity(QuantityName::Trip, trip, 0.3e-3), &ramps, Some(&steps))
    }

    #[test]
    fn what_ramps_and_steps_say_is_held_against_each_other() {
        let agrees = told(0.025, 6.001);
        assert_eq!(agrees.code, FindingCode::DelayFromRamps);
        insta::assert_snapshot!(agrees.text, @"12 ramps of 0.20 V/s to 0.80 V/s give a detect delay of 30.00 ms ± 8.000 ms and a trip voltage at rest of 6.000 V ± 2.000 mV (k = 2, correlation 0.50); steps across the threshold 25.00 ms ± 2.000 ms. They agree.");
        assert_eq!(told(0.010, 6.001).code, FindingCode::DelaysDiffer, "20 ms and 4.1 ms");
        let moved = told(0.025, 6.004);
        assert_eq!(moved.code, FindingCode::DelaysDiffer, "4 mV and 1.04 mV");
        assert!(moved.text.contains("the trip voltage was found at 6.004 V"), "{}", moved.text);
    }
}
