//! What the bench must have shown, and how long ago at most, before a board of this profile is tested on it.

use crate::document::{At, Table};
use std::time::Duration;

/// The table `[bench]` of a profile. Whatever is left out is not asked for.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct BenchRules {
    /// Longest time since a check that found everything in order.
    pub check_every: Option<Duration>,
    /// Longest time since the zeros were taken with an empty fixture.
    pub zero_every: Option<Duration>,
    /// Longest time since a reference board was measured and found to be what it is known to be.
    pub reference_every: Option<Duration>,
    /// What happens when one of these is overdue.
    pub when_overdue: WhenOverdue,
    /// What happens when the calibration of an instrument is overdue; a warning where nothing is said.
    pub when_calibration_overdue: Option<WhenOverdue>,
}

/// What happens when something is overdue.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum WhenOverdue {
    /// No board is tested.
    #[default]
    Refuse,
    /// The operator is told, and the board is tested.
    Warn,
}

impl BenchRules {
    /// True when a board may not be tested on instruments whose calibration is overdue.
    pub fn refuses_overdue_calibration(&self) -> bool {
        self.when_calibration_overdue == Some(WhenOverdue::Refuse)
    }
}

pub(super) fn read(mut table: Table<'_, '_>) -> BenchRules {
    let words = [("refuse", WhenOverdue::Refuse), ("warn", WhenOverdue::Warn)];
    let check = table.optional_duration("check_every");
    let zero = table.optional_duration("zero_every");
    let reference = table.optional_duration("reference_every");
    for every in [&check, &zero, &reference].into_iter().flatten() {
        if every.value.is_zero() {
            table.problem(every, "nothing is ever that young; wanted a time such as \"8 h\"");
        }
    }
    let value = |every: Option<At<Duration>>| every.map(|every| every.value);
    BenchRules {
        check_every: value(check),
        zero_every: value(zero),
        reference_every: value(reference),
        when_overdue: table.optional_choice("when_overdue", &words).map(|at| at.value).unwrap_or_default(),
        when_calibration_overdue: table
            .optional_choice("when_calibration_overdue", &words)
            .map(|at| at.value),
    }
}

#[cfg(test)]
mod tests {
    use super::super::{Profile, sample};
    use super::*;

    fn with(table: &str) -> Result<Profile, String> {
        let text = format!("{}\n[bench]\n{table}\n", sample::RIVER_NODE);
        Profile::read("p.toml", &text).map_err(|problems| problems.lines().collect::<Vec<_>>().join("\n"))
    }

    #[test]
    fn a_profile_without_the_table_asks_for_nothing() {
        let profile = Profile::read("p.toml", sample::RIVER_NODE).expect("a good profile");
        assert_eq!(profile.bench, BenchRules::default());
        assert!(!profile.bench.refuses_overdue_calibration());
    }

    #[test]
    fn rules_are_read_as_written() {
        let rules = with(
            "check_every = \"24 h\"\nzero_every = \"90 min\"\nwhen_overdue = \"warn\"\n\
             when_calibration_overdue = \"refuse\"",
        );
        let rules = rules.expect("good rules").bench;
        assert_eq!(rules.check_every, Some(Duration::from_secs(86_400)));
        assert_eq!(rules.zero_every, Some(Duration::from_secs(5_400)));
        assert_eq!((rules.reference_every, rules.when_overdue), (None, WhenOverdue::Warn));
        assert!(rules.refuses_overdue_calibration());
    }

    #[test]
    fn what_cannot_be_is_refused_at_its_place() {
        let told = with("check_evry = \"24 h\"\nzero_every = \"0 h\"\nwhen_overdue = \"ignore\"")
            .expect_err("three mistakes");
        for phrase in [
            "unknown key \"check_evry\" in [bench]; did you mean \"check_every\"?",
            "bench.zero_every = \"0 h\": nothing is ever that young",
            "bench.when_overdue = \"ignore\": wanted \"refuse\" or \"warn\"",
        ] {
            assert!(told.contains(phrase), "no {phrase:?} in {told}");
        }
    }
}
