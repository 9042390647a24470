//! Boards of the simulated bench, in virtual time, from the first action to the outcome.

use crate::river;
use ebbmark::analysis::{Analysis, FindingCode, analyse};
use ebbmark::bench::{VirtualBench, drive, run_ready};
use ebbmark::procedure::{Plan, Procedure};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::{Condition, Setup, World};
use ebbmark::verdict::{Outcome, Verdict, judge};

/// Boards whose outcome is looked at, and boards whose uncertainty is.
const BOARDS: u64 = 12;
const COVERED: u64 = 200;

fn judged(profile: &Profile, setup: &Setup) -> (Analysis, Verdict) {
    let mut bench = VirtualBench::new(setup, setup.ability());
    let procedure = Procedure::new(Plan::new(profile, &setup.ability()));
    let trace = run_ready(drive(procedure, &mut bench, setup.claims(), &mut (), std::future::pending()));
    let analysis = analyse(&trace, profile);
    let verdict = judge(&analysis, profile, &trace.ending);
    (analysis, verdict)
}

#[test]
fn every_condition_gets_its_outcome_and_its_finding() {
    let profile = river::profile();
    let wanted = |condition| match condition {
        Condition::Good | Condition::SlowDetector | Condition::NoSink => (Outcome::Pass, None),
        Condition::HighTrip | Condition::NarrowHysteresis => (Outcome::Fail, None),
        Condition::NeverTrips => (Outcome::Fail, Some(FindingCode::NeverTrips)),
        Condition::NeverOn => (Outcome::Fail, Some(FindingCode::NeverOn)),
        Condition::LeakingSwitch | Condition::LowPullUp => (Outcome::Fail, Some(FindingCode::OffCurrentHigh)),
        Condition::NoLoad => (Outcome::Invalid, Some(FindingCode::NoLoad)),
        Condition::Reversed => (Outcome::Invalid, Some(FindingCode::Reversed)),
        Condition::Chatter => (Outcome::Invalid, Some(FindingCode::SourceResistance)),
    };
    for condition in Condition::ALL {
        let (outcome, code) = wanted(condition);
        for seed in 0..BOARDS {
            let (_, verdict) = judged(&profile, &Setup::new(&profile, condition, seed));
            assert_eq!(verdict.outcome, outcome, "{} seed {seed}: {verdict:#?}", condition.key());
            let named = code.is_none_or(|code| verdict.findings.iter().any(|finding| finding.code == code));
            assert!(named, "{} seed {seed}: {:?}", condition.key(), verdict.findings);
        }
    }
}

#[test]
fn good_boards_lie_inside_their_uncertainty_as_often_as_promised() {
    let profile = river::profile();
    let at = profile.limits[&QuantityName::OffCurrent].at.expect("the profile says where");
    let mut inside = [0_u64; 4];
    for seed in 0..COVERED {
        let setup = Setup::new(&profile, Condition::Good, seed);
        let (analysis, _) = judged(&profile, &setup);
        let truth = World::new(&setup).truth();
        let truths = [
            (QuantityName::Trip, truth.trip.0),
            (QuantityName::ReEnable, truth.re_enable.0),
            (QuantityName::Hysteresis, truth.hysteresis.0),
            (QuantityName::OffCurrent, truth.off_current(at).0),
        ];
        for ((name, truth), inside) in truths.into_iter().zip(&mut inside) {
            let found = analysis.quantities.iter().find(|quantity| quantity.name == name);
            let found = found.unwrap_or_else(|| panic!("seed {seed}: no {name:?}"));
            *inside += u64::from((found.value - truth).abs() <= 2.0 * found.standard_uncertainty);
        }
    }
    // At k = 2 at least 95 %.
    assert!(inside.iter().all(|count| count * 20 >= COVERED * 19), "inside of {COVERED}: {inside:?}");
}
