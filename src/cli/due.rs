//! What the station's log says of its bench, and whether that is good and young enough for a profile.

use super::Failure;
use super::station::Station;
use crate::instrument::bench_file::BenchFile;
use crate::profile::{BenchRules, Profile, WhenOverdue};
use crate::record::{BenchEntry, BenchFound, Instrument, now};
use crate::trace::{Doubt, Zero};
use crate::units::Ohms;
use jiff::Timestamp;
use std::collections::BTreeMap;
use std::time::Duration;

/// The entries about a bench of these instruments, and the present.
pub(super) struct BenchState {
    entries: Vec<BenchEntry>,
    now: Timestamp,
}

impl BenchState {
    /// What the station's log says of these instruments. What was found with another one in a role does not count.
    pub(super) fn of(station: &Station<'_>, instruments: &[Instrument]) -> Result<Self, Failure> {
        let mut entries = station.log.folder().bench_entries()?;
        entries.retain(|entry| entry.is_of(instruments));
        Ok(Self { entries, now: now().utc })
    }

    /// The zeros last taken, unless something was wrong with them.
    pub(super) fn zeros(&self) -> Vec<Zero> {
        self.last(|found| matches!(found, BenchFound::Zero { .. }))
            .map(|entry| entry.zeros(self.now))
            .unwrap_or_default()
    }

    /// What lies between supply and board, leads and ammeter, by the last check that measured it.
    pub(super) fn source_resistance(&self) -> Option<Ohms> {
        self.entries.iter().rev().find_map(|entry| match &entry.found {
            BenchFound::Check(check) => check.leads.as_ref().map(|leads| Ohms(leads.series_ohm)),
            _ => None,
        })
    }

    /// A simulated bench is made anew for every run: there is nothing to verify between two of them.
    pub(super) fn note_exempt(&self, rules: &BenchRules) {
        if *rules != BenchRules::default() {
            anstream::eprintln!(
                "note: a simulated bench need not be checked; the rules in [bench] are for real ones"
            );
        }
    }

    /// Refuses, or says, what the profile asks for and the log does not show.
    pub(super) fn refuse_overdue(&self, profile: &Profile) -> Result<(), Failure> {
        let overdue = self.overdue(profile);
        if overdue.is_empty() {
            return Ok(());
        }
        if profile.bench.when_overdue == WhenOverdue::Warn {
            for line in overdue {
                anstream::eprintln!("note: {line}");
            }
            return Ok(());
        }
        let lines: Vec<String> = overdue.iter().map(|line| format!("\n  {line}")).collect();
        Err(anyhow::anyhow!("no board of {} is tested on this bench:{}", profile.board, lines.concat())
            .into())
    }

    fn overdue(&self, profile: &Profile) -> Vec<String> {
        let rules = &profile.bench;
        let is_check = |found: &BenchFound| matches!(found, BenchFound::Check(_));
        let is_zero = |found: &BenchFound| matches!(found, BenchFound::Zero { .. });
        let check = rules.check_every.and_then(|every| {
            self.not_good("check", self.last(is_check), every, "run `ebbmark bench check <bench file>`")
        });
        let zero = rules.zero_every.and_then(|every| {
            let run = "take the board out, then run `ebbmark bench zero <bench file> --fixture-empty --profile <profile>`";
            self.not_good("zero", self.last(is_zero), every, run)
        });
        let reference = rules.reference_every.into_iter().flat_map(|every| self.references(profile, every));
        check.into_iter().chain(zero).chain(reference).collect()
    }

    /// The latest run of every reference board counts, and at least one must be young enough: that a good one is
    /// found good does not heal that a bad one was passed.
    fn references(&self, profile: &Profile, every: Duration) -> Vec<String> {
        let run = "run `ebbmark bench check <bench file> --profile <profile> --reference <reference file>`";
        let mut latest: BTreeMap<&str, &BenchEntry> = BTreeMap::new();
        for entry in &self.entries {
            if let BenchFound::Reference { profile: of, result, .. } = &entry.found
                && *of == named(profile)
            {
                latest.insert(&result.serial_number, entry);
            }
        }
        let bad = latest.iter().filter(|(_, entry)| !entry.is_good());
        let bad: Vec<String> = bad
            .filter_map(|(serial, entry)| {
                self.not_good(&format!("reference board {serial}"), Some(entry), every, run)
            })
            .collect();
        if !bad.is_empty() {
            return bad;
        }
        let youngest = latest.values().copied().max_by_key(|entry| entry.taken.utc);
        self.not_good("reference board", youngest, every, run).into_iter().collect()
    }

    fn last(&self, of: impl Fn(&BenchFound) -> bool) -> Option<&BenchEntry> {
        self.entries.iter().rev().find(|entry| of(&entry.found))
    }

    fn not_good(&self, what: &str, entry: Option<&BenchEntry>, every: Duration, run: &str) -> Option<String> {
        let Some(entry) = entry else {
            return Some(format!("{what}: never done with these instruments; {run}"));
        };
        let Some(age) = entry.age(self.now) else {
            return Some(format!(
                "{what}: done at {}, which is yet to come; set the clock, then {run}",
                entry.taken.local
            ));
        };
        let ago = spoken(age);
        if let Some(problem) = entry.problems.first() {
            return Some(format!("{what}: {ago} ago it found {problem}. Put that right, then {run}"));
        }
        (age > every).then(|| format!("{what}: done {ago} ago, the profile allows {}; {run}", spoken(every)))
    }
}

/// Refuses instruments past their calibration where the profile says so. Elsewhere the run carries the doubt.
pub(super) fn refuse_overdue_calibration(profile: &Profile, bench: &BenchFile) -> Result<(), Failure> {
    let doubts = bench.doubts(now().date());
    let overdue: Vec<String> = doubts
        .iter()
        .filter_map(|doubt| match doubt {
            Doubt::CalibrationOverdue { instrument, due } => Some(format!("{instrument}, due {due}")),
            Doubt::OutsideTemperature { .. } => None,
        })
        .collect();
    if overdue.is_empty() || !profile.bench.refuses_overdue_calibration() {
        return Ok(());
    }
    Err(anyhow::anyhow!(
        "no board of {} is tested with instruments past their calibration: {}; have them calibrated, then put the next \
         date into the bench file",
        profile.board,
        overdue.join("; ")
    )
    .into())
}

/// What a reference result is filed under.
pub(super) fn named(profile: &Profile) -> String {
    format!("{} {}", profile.board, profile.revision)
}

/// `35 min`, `8.2 h`, `3.0 d`.
pub(super) fn spoken(time: Duration) -> String {
    let minutes = time.as_secs_f64() / 60.0;
    match minutes {
        ..90.0 => format!("{minutes:.0} min"),
        ..2880.0 => format!("{:.1} h", minutes / 60.0),
        _ => format!("{:.1} d", minutes / 1440.0),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::record::{BenchUsed, CheckFound, Moment, RunId};
    use crate::verdict::Outcome;
    use crate::verification::{Must, ReferenceResult};
    use jiff::tz::TimeZone;

    fn profile(rules: &str) -> Profile {
        let text = include_str!("../../profiles/river-node.toml");
        Profile::read("p.toml", &format!("{text}\n[bench]\n{rules}\n"))
            .unwrap_or_else(|told| panic!("{told}"))
    }

    fn entry(hour: u8, found: BenchFound, problem: Option<&str>) -> BenchEntry {
        let utc = format!("2026-12-01T{hour:02}:00:00Z").parse().expect("RFC 3339");
        let used = BenchUsed { name: "b".to_owned(), instruments: Vec::new(), simulated: None };
        let problems = problem.map(str::to_owned).into_iter().collect();
        BenchEntry::new("s", Moment::new(utc, &TimeZone::UTC), used, found, problems)
    }

    fn check() -> BenchFound {
        BenchFound::Check(CheckFound::default())
    }

    fn reference(serial_number: &str) -> BenchFound {
        let run: RunId = serde_json::from_str("\"s-1\"").expect("a name");
        let result = ReferenceResult {
            serial_number: serial_number.to_owned(),
            must: Must::Pass,
            outcome: Outcome::Pass,
            compared: Vec::new(),
            problems: Vec::new(),
        };
        BenchFound::Reference { profile: named(&profile("")), run, result }
    }

    /// At noon.
    fn overdue(entries: Vec<BenchEntry>, rules: &str) -> Vec<String> {
        let now = "2026-12-01T12:00:00Z".parse().expect("RFC 3339");
        BenchState { entries, now }.overdue(&profile(rules))
    }

    #[test]
    fn a_profile_without_rules_asks_for_nothing() {
        assert!(overdue(Vec::new(), "").is_empty());
    }

    #[test]
    fn what_was_never_done_is_old_or_went_wrong_is_told_with_what_to_run() {
        let rules = "check_every = \"4 h\"";
        for (entries, phrase) in [
            (vec![], Some("never done")),
            (vec![entry(9, check(), None)], None),
            (vec![entry(7, check(), None)], Some("done 5.0 h ago, the profile allows 4.0 h")),
            (
                vec![entry(9, check(), None), entry(11, check(), Some("noise"))],
                Some("60 min ago it found noise"),
            ),
            (vec![entry(9, check(), Some("noise")), entry(11, check(), None)], None),
            (vec![entry(13, check(), None)], Some("yet to come")),
            (vec![entry(11, BenchFound::Zero { zeros: vec![] }, None)], Some("never done")),
        ] {
            let told = overdue(entries, rules).join("\n");
            assert_eq!(told.is_empty(), phrase.is_none(), "{told}");
            assert!(told.contains(phrase.unwrap_or_default()), "no {phrase:?} in {told}");
            assert!(told.is_empty() || told.contains("ebbmark bench check <bench file>"), "{told}");
        }
    }

    #[test]
    fn every_reference_board_must_be_found_as_it_is_when_last_measured() {
        let rules = "reference_every = \"8 h\"";
        let told = |entries| overdue(entries, rules).join("\n");
        assert!(told(vec![]).contains("never done"));
        let good = || entry(10, reference("RN900001"), None);
        assert_eq!(told(vec![good()]), "");
        let passed_the_bad_one = entry(9, reference("RN900002"), Some("it came out as PASS and must FAIL"));
        assert!(
            told(vec![passed_the_bad_one, good()]).contains("reference board RN900002: 3.0 h ago it found")
        );
        assert!(told(vec![entry(2, reference("RN900001"), None)]).contains("10.0 h ago"));
    }
}
