//! A threshold from a trace: between the last voltage that did not change the state and the first that did.
//!
//! Every change gives a bracket. Beyond is certain: the terminals had been no farther than the set-point of the
//! change. Before is the nearest set-point of any pass that stood for longer than the board's delay without a change;
//! one that stood shorter may already have been beyond. A bracket that holds a narrower one inside is superseded; the
//! narrow ones that are left, from several passes, are averaged and their scatter counted. Value and uncertainty of
//! one bracket: the midpoint and width / sqrt(12) (JCGM 100:2008, 4.3.7).

use super::cause::Cause;
use super::contribution::Contribution;
use super::edges::{Direction, Edge, Edges};
use super::noise::Evidence;
use super::plateau::{Course, SAME_SET};
use super::slow::Slow;
use super::terminals::Rail;
use crate::trace::Claims;
use crate::units::{Amps, Ohms, Unit, Volts};
use std::time::Duration;

/// Brackets wider than the narrowest by more than this are a coarse pass.
const SIMILAR: f64 = 1.5;
/// A claimed lead resistance is taken as known to this share: contacts vary from board to board.
const LEAD_TOLERANCE: f64 = 0.2;

/// Share of boards that are slower than their design and change at rest just there.
const RARELY_SLOW: f64 = 1e-3;

/// Names of lines in the budget.
pub(super) const SCATTER: &str = "scatter between passes";
pub(super) const CONTRADICTION: &str = "passes that disagree";
/// Name of the bracket's line in the budget.
pub(super) const BRACKET: &str = "width of the bracket";

/// One threshold of the board.
#[derive(Clone, Debug)]
pub(super) struct Threshold {
    /// Midpoint, at the terminals.
    pub(super) value: Volts,
    /// What its uncertainty is made of, the instrument's accuracy aside.
    pub(super) contributions: Vec<Contribution>,
    /// The plateau of the nearest set-point that did not change the state.
    pub(super) stayed: usize,
    /// Widening against the board's delay, if any was needed.
    pub(super) smear: Option<Smear>,
    /// Which threshold.
    pub(super) direction: Direction,
    /// What tells of noise at the detector; `None` where a delay longer than the steps hides it.
    pub(super) evidence: Option<Evidence>,
}

impl Threshold {
    /// The part of the standard uncertainty that is the width of the bracket, in volts.
    pub(super) fn bracket_uncertainty(&self) -> f64 {
        let bracket = self.contributions.iter().find(|part| part.source == BRACKET);
        bracket.map_or(0.0, |part| part.standard_uncertainty)
    }
}

/// Steps were shorter than the delay, so the change may belong to an earlier one.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Smear {
    /// Time per set-point before the change.
    pub(super) dwell: Duration,
    /// The delay that was allowed for.
    pub(super) delay: Duration,
    /// Set-points by which the bracket was widened.
    pub(super) steps: usize,
}

/// What a trace says about one threshold.
#[derive(Clone, Debug, Default)]
pub(super) struct Search {
    /// The threshold, once changed and stayed.
    pub(super) threshold: Option<Threshold>,
    /// Evidence of a delay beyond the design's.
    pub(super) slow: Option<Slow>,
}

/// A change and the nearest stay before it, as distances along the direction in volts of the set-point.
#[derive(Clone, Copy, Debug)]
struct Bracket {
    before: f64,
    stayed: usize,
    beyond: f64,
    changed: usize,
}

impl Bracket {
    fn width(&self) -> f64 {
        self.beyond - self.before
    }

    fn holds(&self, inner: &Self) -> bool {
        self.before <= inner.before + SAME_SET
            && self.beyond >= inner.beyond - SAME_SET
            && self.width() > inner.width() + SAME_SET
    }
}

impl Search {
    /// Looks for the threshold in `direction`.
    pub(super) fn run(course: &Course<'_>, found: &Edges, direction: Direction) -> Self {
        let (all, found) = (found, &found.at_rest(course));
        let edges: Vec<&Edge> = found.edges.iter().filter(|edge| edge.direction == direction).collect();
        let near = edges.last().map_or(course.profile.supply.floor, |edge| course.plateaus[edge.plateau].set);
        let Some(rail) = Rail::near(course, &found.stays, direction, near) else { return Self::default() };
        // A board that switches by itself has neither a threshold nor a delay to state.
        if !found.reversals.is_empty() {
            return Self::default();
        }
        let declared = direction.delay(&course.profile.timing);
        let within_design = Stays::sorted(course, found, direction, &rail, declared);
        let slow = Slow::find(course, all, direction, &rail)
            .filter(|_| !within_design.is_noise(course, &edges, &rail));
        let stays = match slow {
            Some(slow) => Stays::sorted(course, found, direction, &rail, slow.at_most.max(declared)),
            None => within_design,
        };
        let mut threshold = stays.threshold(course, &edges, &rail);
        if let Some(threshold) = threshold.as_mut().filter(|found| found.smear.is_none() && slow.is_none()) {
            threshold.evidence = Some(stays.evidence(course, &edges, &rail));
        }
        Self { threshold, slow }
    }
}

/// The stays that count as evidence in one direction, by distance along it.
struct Stays {
    direction: Direction,
    delay: Duration,
    /// Stood longer than the delay.
    long: Vec<(f64, usize)>,
    /// Stood shorter, with the time of the plateau itself.
    short: Vec<(f64, Duration)>,
}

impl Stays {
    fn sorted(
        course: &Course<'_>,
        found: &Edges,
        direction: Direction,
        rail: &Rail,
        delay: Duration,
    ) -> Self {
        let mut stays = Self { direction, delay, long: Vec::new(), short: Vec::new() };
        for stay in found.stays.iter().filter(|stay| stay.direction == direction) {
            let plateau = &course.plateaus[stay.plateau];
            let along = direction.along(plateau.set);
            let dwell = plateau.ended.saturating_sub(plateau.began);
            // Within its own short step a set-point may have arrived late, or been passed on a continuous ramp.
            let needed = if dwell < delay { delay + dwell } else { delay };
            if stay.time < needed {
                stays.short.push((along, dwell));
            } else if rail.holds(course, stay.plateau) {
                stays.long.push((along, stay.plateau));
            }
        }
        stays.long.sort_by(|a, b| a.0.total_cmp(&b.0));
        stays
    }

    fn threshold(&self, course: &Course<'_>, edges: &[&Edge], rail: &Rail) -> Option<Threshold> {
        let mut brackets: Vec<Bracket> =
            edges.iter().filter_map(|edge| self.bracket(course, edge.plateau)).collect();
        brackets.sort_by(|a, b| a.width().total_cmp(&b.width()));
        let narrowest = *brackets.first()?;
        let mut kept: Vec<Bracket> = Vec::new();
        for bracket in brackets {
            let similar = bracket.width() <= SIMILAR * narrowest.width();
            if similar && !kept.iter().any(|inner| bracket.holds(inner)) {
                kept.push(bracket);
            }
        }
        let count = kept.len() as f64;
        let middle = kept.iter().map(|bracket| (bracket.before + bracket.beyond) / 2.0).sum::<f64>() / count;
        let width = kept.iter().map(Bracket::width).sum::<f64>() / count;
        let slope = rail.slope().abs();
        let smear = self.smear(course, &narrowest);
        let set = self.direction.volts(middle);
        let mut contributions = vec![self.bracket_line(slope * width / 2.0, rail.at(set), smear)];
        if kept.len() > 1 {
            let squares: f64 =
                kept.iter().map(|bracket| ((bracket.before + bracket.beyond) / 2.0 - middle).powi(2)).sum();
            let scatter = slope * (squares / (count - 1.0) / count).sqrt();
            contributions.push(Contribution::scatter(SCATTER, scatter, count - 1.0));
        }
        if let Some(overlap) = self.contradiction(course, edges) {
            contributions.push(Contribution::rectangular(CONTRADICTION, slope * overlap / 2.0));
        }
        contributions.extend(rail.line(set));
        // With the switch open hardly anything drops in the leads.
        if self.direction == Direction::Down {
            contributions.extend(lead_drop(&course.trace.claims, set / course.profile.load.resistance));
        }
        let (value, stayed, direction) = (rail.at(set), narrowest.stayed, self.direction);
        Some(Threshold { value, contributions, stayed, smear, direction, evidence: None })
    }

    /// True where noise as it is known of such detectors explains that the board changed at rest. A board slower than its
    /// design is as rare as one in a hundred, and explains it anywhere between the set-points.
    fn is_noise(&self, course: &Course<'_>, edges: &[&Edge], rail: &Rail) -> bool {
        let Some(near) = edges.last().map(|edge| rail.at(course.plateaus[edge.plateau].set)) else {
            return false;
        };
        let brackets = edges.iter().filter_map(|edge| self.bracket(course, edge.plateau));
        let Some(narrowest) = brackets.map(|bracket| bracket.width()).min_by(f64::total_cmp) else {
            return false;
        };
        let explained =
            self.evidence(course, edges, rail).explained_by(course.profile.detector_noise(near), near);
        explained > RARELY_SLOW * narrowest
    }

    /// All that was seen, at the terminals.
    fn evidence(&self, course: &Course<'_>, edges: &[&Edge], rail: &Rail) -> Evidence {
        let mut evidence = Evidence::new(&course.profile.timing, self.delay, settle(course));
        let along = |plateau: usize| self.direction.along(rail.at(course.plateaus[plateau].set));
        for (_, plateau) in &self.long {
            let stood = &course.plateaus[*plateau];
            evidence.stayed(along(*plateau), stood.ended.saturating_sub(stood.began));
        }
        for edge in edges {
            let began = course.plateaus[edge.plateau].began;
            let at = |sample: usize| course.trace.samples[sample].at;
            let (along, seen) = (along(edge.plateau), at(edge.seen));
            match edge.last_before.map(at) {
                Some(last) => {
                    evidence.stayed(along, last.saturating_sub(began));
                    evidence.changed(along, seen.saturating_sub(last));
                }
                None => evidence.changed_at_once(along, seen.saturating_sub(began)),
            }
        }
        evidence.sort();
        evidence
    }

    /// The bracket as a line. One widened against a delay lies on the side the delay moves the change to: the longer it
    /// is, the higher the true trip and the lower the true re-enable.
    fn bracket_line(&self, half_width: f64, middle: Volts, smear: Option<Smear>) -> Contribution {
        let towards = match (smear, self.direction) {
            (Some(_), Direction::Up) => -1.0,
            _ => 1.0,
        };
        let line = Contribution::rectangular(BRACKET, half_width).through(towards, Unit::Volt);
        if smear.is_some() { line.due_to(Cause::Delay) } else { line.estimated(middle.0) }
    }

    /// The bracket of a change: the nearest stay of any pass that lies before it.
    fn bracket(&self, course: &Course<'_>, changed: usize) -> Option<Bracket> {
        let beyond = self.direction.along(course.plateaus[changed].set);
        let count = self.long.partition_point(|(along, _)| *along < beyond - SAME_SET);
        let (before, stayed) = *self.long.get(count.checked_sub(1)?)?;
        Some(Bracket { before, stayed, beyond, changed })
    }

    /// By how much a stay in one pass lies beyond a change in another.
    fn contradiction(&self, course: &Course<'_>, edges: &[&Edge]) -> Option<f64> {
        let farthest = self.long.last()?.0;
        let nearest = edges.iter().map(|edge| self.direction.along(course.plateaus[edge.plateau].set));
        let overlap = farthest - nearest.min_by(f64::total_cmp)?;
        (overlap > SAME_SET).then_some(overlap)
    }

    /// The stays inside the bracket that stood too short to count.
    fn smear(&self, course: &Course<'_>, bracket: &Bracket) -> Option<Smear> {
        let inside = |along: f64| along > bracket.before + SAME_SET && along < bracket.beyond - SAME_SET;
        let passed = self.short.iter().filter(|(along, _)| inside(*along));
        let steps = passed.clone().count();
        let nearest = passed.max_by(|a, b| a.0.total_cmp(&b.0));
        let plateau = &course.plateaus[bracket.changed];
        let dwell = nearest.map_or(plateau.ended.saturating_sub(plateau.began), |(_, dwell)| *dwell);
        (steps > 0).then_some(Smear { dwell, delay: self.delay, steps })
    }
}

/// Time that the supply takes to arrive, as far as the bench states it.
fn settle(course: &Course<'_>) -> Duration {
    course.trace.claims.times.map_or(Duration::ZERO, |times| times.settle)
}

/// Where the voltage is not known behind the leads, the drop rests on their claimed resistance, as a rectangle
/// (JCGM 100:2008, 4.3.7).
pub(super) fn lead_drop(claims: &Claims, current: Amps) -> Option<Contribution> {
    let leads: Ohms = claims.lead_resistance?;
    let line = Contribution::rectangular("resistance of the leads", leads.0 * LEAD_TOLERANCE)
        .through(-current.0, Unit::Ohm)
        .estimated(leads.0);
    Some(line.due_to(Cause::LeadResistance))
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;
    use crate::profile::Profile;

    fn search(readings: &[(f64, f64)], profile: &Profile, direction: Direction) -> Search {
        let trace = staircase(readings);
        let course = Course::new(&trace, profile);
        Search::run(&course, &Edges::find(&course), direction)
    }

    fn trip(readings: &[(f64, f64)], profile: &Profile) -> Threshold {
        search(readings, profile, Direction::Down).threshold.expect("a trip")
    }

    fn width(threshold: &Threshold) -> f64 {
        threshold.bracket_uncertainty() * 12.0_f64.sqrt()
    }

    #[test]
    fn the_midpoint_of_the_bracket_and_its_width() {
        let trip = trip(&[on(7.6), on(6.1), on(6.0), off(5.9), off(5.8)], &profile());
        assert!((trip.value.0 - 5.95).abs() < 1e-9);
        assert!((width(&trip) - 0.1).abs() < 1e-9);
        assert_eq!(trip.stayed, 2);
        assert_eq!(trip.smear, None);
    }

    #[test]
    fn a_fine_pass_supersedes_the_coarse_one() {
        let coarse = [on(7.6), on(6.1), on(6.0), off(5.9), off(5.8), off(6.3), on(6.4), on(7.6)];
        let fine = [on(6.0), on(5.98), on(5.96), off(5.94), off(5.0)];
        let trip = trip(&[&coarse[..], &fine[..]].concat(), &profile());
        assert!((trip.value.0 - 5.95).abs() < 1e-9);
        assert!((width(&trip) - 0.02).abs() < 1e-9);
    }

    #[test]
    fn probes_of_different_passes_narrow_one_bracket() {
        let probes = [on(7.6), on(6.0), off(5.8), on(7.6), off(5.9), on(7.6), on(5.95), off(5.0)];
        let trip = trip(&probes, &profile());
        assert!((trip.value.0 - 5.925).abs() < 1e-9, "{}", trip.value);
    }

    #[test]
    fn passes_that_differ_by_a_step_are_averaged_and_their_scatter_counts() {
        let pass = |last_on: f64| {
            [on(7.6), on(last_on + 0.02), on(last_on), off(last_on - 0.02), off(5.0), off(6.3), on(6.4)]
        };
        let trip = trip(&[pass(6.0), pass(5.98), pass(6.0)].concat(), &profile());
        assert!((trip.value.0 - (5.99 + 5.97 + 5.99) / 3.0).abs() < 1e-9);
        let scatter = trip.contributions.iter().find(|part| part.source == "scatter between passes");
        // Three values 20 mV apart at most: s = 11.5 mV, of the mean 6.7 mV.
        assert!((scatter.expect("three passes").standard_uncertainty - 0.006_667).abs() < 1e-6);
    }

    #[test]
    fn steps_shorter_than_the_delay_widen_the_bracket() {
        let mut profile = profile();
        profile.timing.detect_delay = Duration::from_millis(250);
        let trip = trip(&[on(7.6), on(6.4), on(6.3), on(6.2), on(6.1), on(6.0), off(5.9)], &profile);
        // 250 ms are three steps of 100 ms, begun: on until 600 ms, so begun by 250 ms counts.
        assert!((width(&trip) - 0.4).abs() < 1e-9, "{}", width(&trip));
        let smear = trip.smear.expect("a smear");
        assert_eq!((smear.steps, smear.dwell), (3, Duration::from_millis(100)));
    }

    #[test]
    fn a_change_while_held_shows_a_slow_detector_and_withdraws_the_shorter_stays() {
        let fine =
            [on(7.6), on(6.08), on(6.06), on(6.04), on(6.02), on(6.0), off(5.98), off(5.0), on(6.5), on(7.6)];
        let held = [on(6.0), on(6.0), on(6.0), off(6.0)];
        let search = search(&[&fine[..], &held[..]].concat(), &profile(), Direction::Down);
        let slow = search.slow.expect("changed after 200 ms at rest");
        assert_eq!((slow.longer_than.as_millis(), slow.at_most.as_millis()), (200, 400));
        let trip = search.threshold.expect("a trip");
        // Beyond is the set-point of the hold; before, what stood for 400 ms and a step: on until 600 ms, begun by 100 ms.
        assert!((trip.value.0 - (6.0 + 6.08) / 2.0).abs() < 1e-9, "{}", trip.value);
    }

    #[test]
    fn a_change_without_a_stay_before_it_is_no_threshold() {
        assert!(search(&[off(7.6), on(7.6), on(7.5)], &profile(), Direction::Up).threshold.is_none());
    }
}
