//! Every quantity a profile can ask for in one run, on every shipped profile, with and without faults of the bench.

#![expect(clippy::expect_used, reason = "a test stops at what it cannot read")]

use crate::virtual_run::{faulty_run, run};
use ebbmark::analysis::FindingCode;
use ebbmark::profile::{InBand, Profile, QuantityName, WantedInBand};
use ebbmark::sim::Condition;
use ebbmark::trace::{OutputState, Stop, Trace};
use ebbmark::units::Volts;
use ebbmark::verdict::Outcome;

const PROFILES: [(&str, &str); 3] = [
    ("river-node", include_str!("../../profiles/river-node.toml")),
    ("garden-probe", include_str!("../../profiles/garden-probe.toml")),
    ("mast-beacon", include_str!("../../profiles/mast-beacon.toml")),
];

/// The profile with all measurements asked for.
fn asking((name, text): (&str, &str)) -> Profile {
    let mut profile = Profile::read(name, text).unwrap_or_else(|problems| panic!("{problems}"));
    let limit =
        |name, end: fn(&ebbmark::profile::Limit) -> Option<f64>| profile.limits.get(&name).and_then(end);
    let trip = limit(QuantityName::Trip, |limit| limit.max).expect("a limited trip");
    let back = limit(QuantityName::ReEnable, |limit| limit.min).expect("a limited re-enable");
    let measure = &mut profile.measure;
    (measure.detect_delay, measure.release_delay) = (true, true);
    measure.deep_floor = Some(Volts(0.3));
    let at = Volts((trip + back) / 2.0);
    measure.in_band = Some(InBand { at, times: 2, wanted: Some(WantedInBand::Off) });
    profile
}

fn highest(trace: &Trace) -> Volts {
    trace.samples.iter().map(|sample| sample.set).fold(Volts::ZERO, Volts::max)
}

#[test]
fn good_boards_of_every_profile_pass_and_the_truth_lies_inside() {
    for named in PROFILES {
        let profile = asking(named);
        for seed in 0..25 {
            let run = run(&profile, Condition::Good, seed);
            let what = format!("{} seed {seed}", named.0);
            assert_eq!(
                (&run.trace.ending.stop, run.trace.ending.output),
                (&Stop::Completed, OutputState::Off)
            );
            assert!(highest(&run.trace) <= profile.supply.maximum, "{what}");
            let codes = run.verdict.findings.iter().map(|finding| finding.code);
            // What drains the battery is told wherever its storage time is limited.
            let codes: Vec<_> = codes.filter(|code| *code != FindingCode::StorageDrain).collect();
            assert_eq!(codes, [FindingCode::InBand], "{what}: {:?}", run.verdict.findings);
            assert!(
                matches!(run.verdict.outcome, Outcome::Pass | Outcome::ConditionalPass),
                "{what}: {:#?}",
                run.verdict
            );
            for (name, truth) in [
                (QuantityName::DetectDelay, run.truth.detect_delay),
                (QuantityName::ReleaseDelay, run.truth.release_delay),
            ] {
                let (value, expanded) = run.measured(name).unwrap_or_else(|| panic!("{what}: no {name:?}"));
                let error = (value - truth.as_secs_f64()).abs();
                assert!(error <= expanded, "{what}: {name:?} {value} +- {expanded} s, truth {truth:?}");
            }
            assert!(run.measured(QuantityName::DeepCurrent).is_some(), "{what}");
        }
    }
}

#[test]
fn whatever_fails_the_output_is_off_and_no_set_point_above_the_maximum() {
    let profile = asking(PROFILES[0]);
    for seed in 0..300 {
        let (trace, output_is_on) = faulty_run(&profile, Condition::Good, seed);
        assert!(
            !output_is_on || trace.ending.output == OutputState::MayBeOn,
            "seed {seed}: {:?}",
            trace.ending
        );
        assert!(highest(&trace) <= profile.supply.maximum, "seed {seed}");
    }
}

/// Every condition comes out as without the further measurements, but for what those find themselves.
#[test]
fn faulty_boards_and_benches_keep_their_outcome() {
    for named in PROFILES {
        let (plain, asked) = (Profile::read(named.0, named.1).expect("a shipped profile"), asking(named));
        // Conduction far below the trip is what only the deep sweep finds. A contact that comes and goes, and a limit that
        // holds the load's capacitor back, strike by chance: a run that switches the board more often sees more of them.
        let told_by_more =
            [Condition::DeepConduction, Condition::LargeLoadCapacitor, Condition::IntermittentContact];
        for condition in Condition::ALL.into_iter().filter(|it| !told_by_more.contains(it)) {
            for seed in 0..8 {
                let (without, with) = (run(&plain, condition, seed), run(&asked, condition, seed));
                let what = format!(
                    "{} {condition} seed {seed}: {:?}, without {:?}",
                    named.0, with.verdict.findings, without.verdict.findings
                );
                assert_eq!(with.verdict.outcome, without.verdict.outcome, "{what}");
                assert_eq!(with.trace.ending.output, OutputState::Off, "{what}");
                // Down to 0.3 V there is no charge left to warn of, and notes come in any order.
                let first = without.verdict.findings.first().map(|finding| finding.code);
                let first = first
                    .filter(|code| !matches!(code, FindingCode::StillCharged | FindingCode::StorageDrain));
                // A hysteresis too narrow for the battery is worked out in both; in the band it shows first.
                let told = |code| with.verdict.findings.iter().position(|finding| finding.code == code);
                let last = first.map(|code| if code == FindingCode::Rebound { 1 } else { 0 });
                let in_place = first.is_none_or(|code| told(code).is_some_and(|at| Some(at) <= last));
                assert!(in_place, "{what}");
            }
        }
    }
}
