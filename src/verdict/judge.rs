//! From an analysis to one outcome.
//!
//! Board, bench and operator fail separately. What casts doubt on the readings themselves makes the run invalid, whatever
//! they say; a board that certainly fails stays failed even if the run was stopped; and what a limit asks for but
//! nobody measured is never passed in silence.

use super::{Decision, Judged, Outcome, Verdict};
use crate::analysis::{About, Analysis, Finding, FindingCode};
use crate::profile::{Profile, QuantityName};
use crate::trace::{Ending, Stop};

/// Judges what an analysis found against the limits of `profile`; `ending` says how the run ended.
pub fn judge(analysis: &Analysis, profile: &Profile, ending: &Ending) -> Verdict {
    let judged: Vec<Judged> = analysis
        .quantities
        .iter()
        .filter(|quantity| quantity.value.is_finite() && quantity.standard_uncertainty.is_finite())
        .map(|quantity| {
            Judged::by(&profile.decision, quantity.clone(), profile.limits.get(&quantity.name).copied())
        })
        .collect();
    let mut findings = analysis.findings.clone();
    let missing: Vec<QuantityName> = profile
        .limits
        .keys()
        .copied()
        .filter(|name| judged.iter().all(|judged| judged.quantity.name != *name))
        .collect();
    let worst = judged.iter().filter_map(|judged| judged.decision).max();
    let outcome = if readings_in_doubt(&findings) {
        Outcome::Invalid
    } else if worst == Some(Decision::Fail) || findings.iter().any(fails_the_board) {
        Outcome::Fail
    } else if ending.stop == Stop::Aborted {
        stopped(worst)
    } else if let Some(worst) = worst.filter(|_| missing.is_empty() && !half_seen(&findings)) {
        Outcome::from(worst)
    } else {
        Outcome::Invalid
    };
    if outcome == Outcome::Invalid && !readings_in_doubt(&findings) {
        findings.extend(not_judged(&missing, profile, &findings));
    }
    Verdict { outcome, judged, findings }
}

/// True when something on the bench was wrong with the readings, so that no decision may rest on them.
fn readings_in_doubt(findings: &[Finding]) -> bool {
    findings.iter().any(|finding| {
        matches!(
            finding.code,
            FindingCode::BenchFault
                | FindingCode::NoLoad
                | FindingCode::NoCurrent
                | FindingCode::Reversed
                | FindingCode::BackFeed
                | FindingCode::LiveBoard
                | FindingCode::SupplyNotArrived
                | FindingCode::CurrentLimit
                | FindingCode::SourceResistance
                | FindingCode::MeterFuse
                | FindingCode::Contact
                | FindingCode::MeterReversed
                | FindingCode::SupplyDisagrees
                | FindingCode::Ripple
                | FindingCode::Temperature
        )
    })
}

/// True when the board rested in neither state somewhere, or did not get to show that it latches: it may not pass on
/// what it did elsewhere.
fn half_seen(findings: &[Finding]) -> bool {
    let half = [FindingCode::NeitherOnNorOff, FindingCode::LatchNotTried];
    findings.iter().any(|finding| half.contains(&finding.code))
}

/// True for what no board may do, limits or not.
fn fails_the_board(finding: &Finding) -> bool {
    finding.about == About::Board
        && matches!(
            finding.code,
            FindingCode::NeverTrips
                | FindingCode::NeverOn
                | FindingCode::NeverReEnables
                | FindingCode::DetectorStuckOn
                | FindingCode::NotLatched
                | FindingCode::Chatter
                | FindingCode::ShortCircuit
                | FindingCode::ConductsWhenDeep
                | FindingCode::UnwantedInBand
                | FindingCode::RestartsAfterRebound
        )
}

/// A stopped run keeps what was already found outside the limits; the rest of it was never judged.
fn stopped(worst: Option<Decision>) -> Outcome {
    match worst {
        Some(Decision::ConditionalFail) => Outcome::ConditionalFail,
        _ => Outcome::Aborted,
    }
}

/// Names what a limit asks for and nothing explains.
fn not_judged(missing: &[QuantityName], profile: &Profile, findings: &[Finding]) -> Option<Finding> {
    let explained = |name: &QuantityName| {
        findings.iter().any(|finding| match finding.code {
            FindingCode::NeitherOnNorOff | FindingCode::NothingToSee => true,
            FindingCode::DeepFloorNotReached => *name == QuantityName::DeepCurrent,
            FindingCode::DelayNotResolved | FindingCode::DelaysDiffer => {
                matches!(name, QuantityName::DetectDelay | QuantityName::ReleaseDelay)
            }
            FindingCode::RangeNotAdequate | FindingCode::OffCurrentMoves => matches!(
                name,
                QuantityName::OffCurrent
                    | QuantityName::OffConductance
                    | QuantityName::OffConstantCurrent
                    | QuantityName::StorageTime
            ),
            _ => false,
        })
    };
    let names: Vec<&str> = missing.iter().filter(|name| !explained(name)).map(|name| name.title()).collect();
    let text = if profile.limits.is_empty() {
        "the profile sets no limit, so there is nothing to judge.".to_owned()
    } else if names.is_empty() {
        return None;
    } else {
        format!(
            "the profile limits the {}, but this run did not measure it. Measure it or take the limit out.",
            names.join(", the ")
        )
    };
    Some(Finding { code: FindingCode::NotJudged, about: About::Bench, text })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::Quantity;
    use crate::analysis::fixture::profile;
    use crate::trace::{BenchFault, FaultKind, OutputState};
    use crate::units::Volts;

    fn quantity(name: QuantityName, value: f64, standard_uncertainty: f64) -> Quantity {
        Quantity { name, value, standard_uncertainty, contributions: Vec::new() }
    }

    /// A board in the middle of every limit.
    fn good() -> Analysis {
        let quantities = vec![
            quantity(QuantityName::Trip, 6.0, 0.001),
            quantity(QuantityName::ReEnable, 6.4, 0.001),
            quantity(QuantityName::Hysteresis, 0.4, 0.001),
            quantity(QuantityName::OffCurrent, 2.5e-6, 1e-8),
        ];
        Analysis { quantities, findings: Vec::new() }
    }

    fn with(about: About, codes: &[FindingCode]) -> Vec<Finding> {
        codes.iter().map(|code| Finding { code: *code, about, text: "seen".to_owned() }).collect()
    }

    fn verdict(analysis: &Analysis, stop: Stop) -> Verdict {
        judge(analysis, &profile(), &Ending { stop, output: OutputState::Off })
    }

    fn outcome(analysis: &Analysis) -> Outcome {
        verdict(analysis, Stop::Completed).outcome
    }

    #[test]
    fn the_worst_decision_is_the_outcome() {
        assert_eq!(outcome(&good()), Outcome::Pass);
        for (trip, expected) in
            [(6.1195, Outcome::ConditionalPass), (6.1205, Outcome::ConditionalFail), (6.13, Outcome::Fail)]
        {
            let mut analysis = good();
            analysis.quantities[0].value = trip;
            assert_eq!(outcome(&analysis), expected, "{trip}");
        }
    }

    #[test]
    fn a_limited_quantity_nobody_measured_is_never_passed() {
        let mut analysis = good();
        analysis.quantities.pop();
        let verdict = verdict(&analysis, Stop::Completed);
        assert_eq!(verdict.outcome, Outcome::Invalid);
        assert_eq!(verdict.findings[0].code, FindingCode::NotJudged);
        assert!(verdict.findings[0].text.contains("off current"), "{}", verdict.findings[0].text);
    }

    #[test]
    fn a_quantity_that_is_not_a_number_is_not_measured() {
        let mut analysis = good();
        analysis.quantities[0].value = f64::NAN;
        assert_eq!(outcome(&analysis), Outcome::Invalid);
    }

    #[test]
    fn without_limits_there_is_nothing_to_pass() {
        let mut profile = profile();
        profile.limits.clear();
        let ending = Ending { stop: Stop::Completed, output: OutputState::Off };
        let verdict = judge(&good(), &profile, &ending);
        assert_eq!((verdict.outcome, verdict.findings[0].code), (Outcome::Invalid, FindingCode::NotJudged));
    }

    #[test]
    fn what_no_board_may_do_fails_even_without_a_quantity() {
        for code in [FindingCode::NeverTrips, FindingCode::NeverOn, FindingCode::ShortCircuit] {
            let analysis = Analysis { quantities: Vec::new(), findings: with(About::Board, &[code]) };
            let verdict = verdict(&analysis, Stop::Completed);
            assert_eq!(verdict.outcome, Outcome::Fail);
            assert_eq!(verdict.findings.len(), 1, "the finding explains what is missing");
        }
    }

    #[test]
    fn chatter_is_the_boards_unless_the_source_explains_it() {
        let mut analysis =
            Analysis { quantities: Vec::new(), findings: with(About::Board, &[FindingCode::Chatter]) };
        assert_eq!(outcome(&analysis), Outcome::Fail);
        analysis.findings.extend(with(About::Bench, &[FindingCode::SourceResistance]));
        assert_eq!(outcome(&analysis), Outcome::Invalid);
    }

    /// What is dropped beside its cause must not make the difference between a failed board and a passed one.
    #[test]
    fn a_cause_stops_a_pass_wherever_what_it_explains_would() {
        for (cause, consequences, _) in crate::analysis::ranking::EXPLAINS {
            let of = |code| {
                let about = [About::Board, About::Bench];
                about.map(|about| outcome(&Analysis { findings: with(about, &[code]), ..good() }))
            };
            for consequence in *consequences {
                let passes = |code| of(code) == [Outcome::Pass, Outcome::Pass];
                assert!(passes(*consequence) || !passes(*cause), "{cause:?} hides {consequence:?}");
            }
        }
    }

    #[test]
    fn a_latch_that_was_not_tried_is_not_passed() {
        let analysis = Analysis { findings: with(About::Bench, &[FindingCode::LatchNotTried]), ..good() };
        assert_eq!(outcome(&analysis), Outcome::Invalid);
    }

    #[test]
    fn a_bench_fault_never_counts_as_a_failed_board() {
        let mut analysis = good();
        analysis.quantities[0].value = 7.0;
        analysis.findings = with(About::Bench, &[FindingCode::BenchFault]);
        let fault = BenchFault { kind: FaultKind::NoReply, text: "no reply".to_owned() };
        assert_eq!(verdict(&analysis, Stop::Fault(fault)).outcome, Outcome::Invalid);
    }

    #[test]
    fn a_failed_board_never_hides_behind_an_aborted_run() {
        let stopped = |trip| {
            let analysis = Analysis {
                quantities: vec![quantity(QuantityName::Trip, trip, 0.001)],
                findings: Vec::new(),
            };
            verdict(&analysis, Stop::Aborted).outcome
        };
        assert_eq!(stopped(6.0), Outcome::Aborted);
        assert_eq!(stopped(6.1205), Outcome::ConditionalFail);
        assert_eq!(stopped(6.5), Outcome::Fail);
    }

    #[test]
    fn remarks_about_the_bench_do_not_stop_a_judgement() {
        let mut analysis = good();
        analysis.findings = with(
            About::Bench,
            &[FindingCode::AccuracyNotIncluded, FindingCode::NoVoltmeter, FindingCode::DwellShorterThanDelay],
        );
        assert_eq!(outcome(&analysis), Outcome::Pass);
    }

    #[test]
    fn the_wrong_way_round_is_invalid_and_an_inadequate_range_explains_itself() {
        let (at, current) = (Volts(0.3), crate::units::Amps(0.005));
        let analysis =
            Analysis { quantities: Vec::new(), findings: with(About::Bench, &[FindingCode::Reversed]) };
        assert_eq!(verdict(&analysis, Stop::ConductsBackwards { at, current }).outcome, Outcome::Invalid);
        let mut analysis = good();
        analysis.quantities.pop();
        analysis.findings = with(About::Bench, &[FindingCode::RangeNotAdequate]);
        let verdict = verdict(&analysis, Stop::Completed);
        assert_eq!((verdict.outcome, verdict.findings.len()), (Outcome::Invalid, 1));
    }
}
