//! What a reader must know to trust the numbers: steps shorter than the delay, and accuracy nobody stated.

use super::accuracy::voltage_claim;
use super::edges::Direction;
use super::finding::{About, Finding, FindingCode};
use super::noise::Noise;
use super::plateau::Course;
use super::threshold::Search;
use std::time::Duration;

/// Steps that were too short for the board's delay: the board is slow, or the bench was too fast.
pub(super) fn delays(course: &Course<'_>, searches: [(Direction, &Search); 2]) -> Vec<Finding> {
    let mut findings = Vec::new();
    for (direction, search) in searches {
        let edge = match direction {
            Direction::Down => "trip",
            Direction::Up => "re-enable",
        };
        let declared = text(direction.delay(&course.profile.timing));
        if let Some(slow) = search.slow {
            findings.push(Finding {
                code: FindingCode::SlowerThanDesign,
                about: About::Board,
                text: format!(
                    "slow detector at the {edge}, or noise there: at a resting set-point it took between {} and {} to switch, the design \
                     allows {declared}. Shorter stays were left out. Look first at the delay capacitor and filters.",
                    text(slow.longer_than),
                    text(slow.at_most)
                ),
            });
        } else if let Some(smear) = search.threshold.as_ref().and_then(|threshold| threshold.smear) {
            findings.push(Finding {
                code: FindingCode::DwellShorterThanDelay,
                about: About::Bench,
                text: format!(
                    "steps of {} before the {edge} are shorter than the board's delay of {}, so the change may belong to an \
                     earlier step: the bracket was widened by {} set-points. Dwell longer to narrow it.",
                    text(smear.dwell),
                    text(smear.delay),
                    smear.steps
                ),
            });
        }
    }
    findings
}

/// Noise worth a word, as a share of the start voltage: 0.4 mV on 7.6 V.
const NOISY: f64 = 5e-5;

/// Standard deviations above the known level up to which noise is as it was to be expected: one board in forty has more.
const USUALLY: f64 = 2.0;

/// Thresholds that noise moves from pass to pass hold for the pace of this run only.
pub(super) fn noise(course: &Course<'_>, noise: &Noise) -> Option<Finding> {
    let start = course.profile.supply.start;
    let known = course.profile.detector_noise(start).above(USUALLY);
    if noise.at_least < known.max(start * NOISY).0 {
        return None;
    }
    let dwells = course.in_scope().map(|plateau| plateau.ended.saturating_sub(plateau.began));
    let dwell = dwells.filter(|dwell| !dwell.is_zero()).min()?;
    let deviation = crate::units::prefixed(noise.deviation, crate::units::Unit::Volt);
    let text = format!(
        "the board changed its state at a voltage at which it had stayed before: noise of about {deviation} at the \
         detector. The longer it is left near a threshold, the sooner it trips and comes back; with steps of {} that is \
         allowed for as far as one run can tell. Look first at ripple, leads and the detector's filter.",
        text(dwell)
    );
    Some(Finding { code: FindingCode::DetectorNoise, about: About::Board, text })
}

/// A bench without a voltmeter at the board, or without stated accuracy.
pub(super) fn accuracy(course: &Course<'_>) -> Vec<Finding> {
    let mut findings = Vec::new();
    if course.trace.samples.is_empty() {
        return findings;
    }
    if !course.has_voltmeter() {
        let text = match course.trace.claims.lead_resistance {
            Some(leads) => format!(
                "no voltmeter at the board: the voltages are set-points less the drop in leads of {leads}, as stated in the bench file."
            ),
            None => "no voltmeter at the board: the voltages are set-points, and the drop in the leads is not in them. Put a \
                     voltmeter at the board's terminals or state the resistance of the leads."
                .to_owned(),
        };
        findings.push(Finding { code: FindingCode::NoVoltmeter, about: About::Bench, text });
    }
    let mut unstated = Vec::new();
    if voltage_claim(course).is_none() {
        unstated.push(if course.has_voltmeter() { "the voltmeter" } else { "the supply's set-point" });
    }
    if course.trace.claims.current.is_empty() {
        unstated.push("the ammeter");
    }
    if !unstated.is_empty() {
        let text = format!(
            "the accuracy of {} is not stated, so it is not in the uncertainty: that covers steps and scatter only.",
            unstated.join(" and ")
        );
        findings.push(Finding { code: FindingCode::AccuracyNotIncluded, about: About::Bench, text });
    }
    findings
}

fn text(time: Duration) -> String {
    crate::units::prefixed(time.as_secs_f64(), crate::units::Unit::Second)
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{on, profile, staircase};
    use super::*;
    use crate::trace::{Accuracy, RangeAccuracy, Trace};
    use crate::units::{Amps, Ohms};

    fn codes(trace: &Trace) -> Vec<FindingCode> {
        let profile = profile();
        accuracy(&Course::new(trace, &profile)).iter().map(|finding| finding.code).collect()
    }

    #[test]
    fn a_bench_with_voltmeter_and_claims_needs_no_remark() {
        let claim = Accuracy { relative: 0.0, absolute: 0.0, resolution: 0.0 };
        let mut trace = staircase(&[on(7.6)]);
        assert_eq!(codes(&trace), [FindingCode::AccuracyNotIncluded]);
        trace.claims.sense = Some(claim);
        trace.claims.current = vec![RangeAccuracy { full_scale: Amps(1.0), accuracy: claim }];
        assert!(codes(&trace).is_empty());
    }

    #[test]
    fn a_bench_without_voltmeter_says_whether_its_leads_are_known() {
        let profile = profile();
        let mut trace = staircase(&[on(7.6)]);
        trace.samples[0].sense = None;
        let text = |trace: &Trace| accuracy(&Course::new(trace, &profile))[0].text.clone();
        assert!(text(&trace).contains("the drop in the leads is not in them"));
        trace.claims.lead_resistance = Some(Ohms(0.3));
        assert!(text(&trace).contains("300.0 mΩ"));
    }
}
