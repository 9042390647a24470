//! Why a run stopped, said as a finding.

use super::finding::{About, Finding, FindingCode};
use crate::trace::{Ending, OutputState, Stop};

/// What an ending says about board or bench; empty for a run that completed with its output off.
pub(super) fn stop_findings(ending: &Ending) -> Vec<Finding> {
    let mut findings = Vec::new();
    if ending.output == OutputState::MayBeOn {
        findings.push(bench(
            FindingCode::OutputMayBeOn,
            "the output was not confirmed off. Switch the supply off by hand before touching the board."
                .to_owned(),
        ));
    }
    findings.extend(stop_finding(&ending.stop));
    findings
}

fn stop_finding(stop: &Stop) -> Option<Finding> {
    let finding = match stop {
        // A board that is not on is told apart by the readings themselves.
        Stop::Completed | Stop::NotOn { .. } => return None,
        Stop::Aborted => bench(FindingCode::Aborted, "the operator stopped the run.".to_owned()),
        Stop::ShortCircuit { at, current } => Finding {
            code: FindingCode::ShortCircuit,
            about: About::Board,
            text: format!(
                "{current} flowed at only {at}, more than the load can draw. Look first for solder bridges and shorted \
                 parts between the supply terminals."
            ),
        },
        Stop::ConductsBackwards { at, current } => bench(
            FindingCode::Reversed,
            format!(
                "{current} flowed at only {at}, like a diode in forward direction. Is the board connected the wrong way round?"
            ),
        ),
        Stop::BackFeed { at, current } => bench(
            FindingCode::BackFeed,
            format!(
                "{current} flowed out of the board at {at}. Look first for another source on it (charger, USB, programmer, \
                 backup cell), then for swapped ammeter leads."
            ),
        ),
        Stop::LiveBoard { at } => bench(
            FindingCode::LiveBoard,
            format!(
                "{at} stood at the terminals before the output was on. Remove every other source from the board."
            ),
        ),
        Stop::NotArrived { set, sense } => bench(
            FindingCode::SupplyNotArrived,
            format!(
                "the terminals stood at {sense} when time was up, set to {set}. Look first at the leads; below the \
                 set-point at the current limit, above it at a supply that cannot sink (fit a bleed resistor)."
            ),
        ),
        Stop::Undecided { at, current } => bench(
            FindingCode::NeitherOnNorOff,
            format!(
                "{current} at {at} is neither the load's current nor that of an open switch. Look first at the load's \
                 resistance against the profile, then at contacts and the current limit."
            ),
        ),
        Stop::CurrentLimited { at, current } => bench(
            FindingCode::CurrentLimit,
            format!(
                "the supply limited the current to {current} at {at}. Raise the limit or look for a load too small."
            ),
        ),
        Stop::Fault(fault) => bench(FindingCode::BenchFault, fault.text.clone()),
    };
    Some(finding)
}

fn bench(code: FindingCode, text: String) -> Finding {
    Finding { code, about: About::Bench, text }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::trace::{BenchFault, FaultKind};
    use crate::units::{Amps, Volts};

    fn codes(stop: Stop, output: OutputState) -> Vec<FindingCode> {
        stop_findings(&Ending { stop, output }).iter().map(|finding| finding.code).collect()
    }

    #[test]
    fn an_output_that_may_be_on_comes_first() {
        let fault = BenchFault { kind: FaultKind::LinkLost, text: "the port is gone".to_owned() };
        assert_eq!(
            codes(Stop::Fault(fault), OutputState::MayBeOn),
            [FindingCode::OutputMayBeOn, FindingCode::BenchFault]
        );
    }

    #[test]
    fn only_a_short_circuit_is_the_boards_own() {
        let (at, current) = (Volts(0.3), Amps(0.005));
        for stop in [
            Stop::ShortCircuit { at, current },
            Stop::ConductsBackwards { at, current },
            Stop::BackFeed { at, current: -current },
            Stop::LiveBoard { at },
            Stop::NotArrived { set: at, sense: at },
            Stop::Undecided { at, current },
            Stop::CurrentLimited { at, current },
        ] {
            let own = matches!(stop, Stop::ShortCircuit { .. });
            let finding = stop_finding(&stop).expect("a finding");
            assert_eq!(finding.about == About::Board, own, "{finding:?}");
        }
    }

    #[test]
    fn a_completed_run_says_nothing() {
        assert!(codes(Stop::Completed, OutputState::Off).is_empty());
    }
}
