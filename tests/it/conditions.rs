//! Every named condition comes out with its outcome and is called by its name, on every shipped profile and many seeds.

use crate::virtual_run::run;
use ebbmark::analysis::FindingCode;
use ebbmark::profile::Profile;
use ebbmark::sim::Condition;
use ebbmark::verdict::Outcome;

const SEEDS: u64 = 100;

const PROFILES: [(&str, &str); 3] = [
    ("river-node", include_str!("../../profiles/river-node.toml")),
    ("garden-probe", include_str!("../../profiles/garden-probe.toml")),
    ("mast-beacon", include_str!("../../profiles/mast-beacon.toml")),
];

/// Condition, the outcomes it may have, and what the first finding must say where there must be one.
const EXPECTED: [(Condition, &[Outcome], Option<FindingCode>); 12] = [
    (Condition::Good, &[Outcome::Pass, Outcome::ConditionalPass], None),
    (Condition::NeverTrips, &[Outcome::Fail], Some(FindingCode::NeverTrips)),
    (Condition::NeverOn, &[Outcome::Fail], Some(FindingCode::NeverOn)),
    (Condition::HighTrip, &[Outcome::Fail], None),
    (Condition::NarrowHysteresis, &[Outcome::Fail], None),
    (Condition::LeakingSwitch, &[Outcome::Fail], Some(FindingCode::OffCurrentHigh)),
    (Condition::LowPullUp, &[Outcome::Fail], Some(FindingCode::OffCurrentHigh)),
    (
        Condition::SlowDetector,
        &[Outcome::Pass, Outcome::ConditionalPass],
        Some(FindingCode::DwellShorterThanDelay),
    ),
    (Condition::NoLoad, &[Outcome::Invalid], Some(FindingCode::NoLoad)),
    (Condition::Reversed, &[Outcome::Invalid], Some(FindingCode::Reversed)),
    (Condition::Chatter, &[Outcome::Invalid], Some(FindingCode::SourceResistance)),
    (Condition::NoSink, &[Outcome::Pass, Outcome::ConditionalPass], None),
];

#[test]
fn every_condition_has_its_outcome_and_its_name() {
    let mut wrong = Vec::new();
    for (name, text) in PROFILES {
        let profile = Profile::read(name, text).expect("a shipped profile");
        for (condition, outcomes, finding) in EXPECTED {
            for seed in 0..SEEDS {
                let run = run(&profile, condition, seed);
                let first = run.verdict.findings.first().map(|finding| finding.code);
                if !outcomes.contains(&run.verdict.outcome) || finding.is_some_and(|code| first != Some(code))
                {
                    wrong.push(format!(
                        "{name} {condition} seed {seed}: {} {:?}",
                        run.verdict.outcome,
                        run.verdict.findings.iter().map(|f| f.code).collect::<Vec<_>>()
                    ));
                }
            }
        }
    }
    assert!(
        wrong.is_empty(),
        "{} wrong:\n{}",
        wrong.len(),
        wrong.iter().take(60).cloned().collect::<Vec<_>>().join("\n")
    );
}
