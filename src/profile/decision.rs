//! How a measured value is held against its limits: the table `[decision]` of a profile, which may be left out.
//!
//! ```toml
//! [decision]
//! coverage = "95 %"                   # probability with which U covers the true value
//! rule = "guard_band"                 # or "simple", or "wrong_acceptance"
//! guard_band = "100 %"                # of U; for the rule of that name
//! wrong_acceptance = "2.5 %"          # largest probability that an accepted board lies outside; likewise
//! least_ratio = 4                     # of the limits' width to twice the U to be expected, before a run
//! when_below = "warn"                 # or "refuse"
//! ```

use crate::document::{At, Table};

/// How values are held against limits.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct DecisionRule {
    /// Probability with which the expanded uncertainty covers the true value, as a fraction of one.
    pub coverage: f64,
    /// When a value is accepted.
    pub acceptance: Acceptance,
    /// Least ratio of a limit's width to twice the expanded uncertainty to be expected.
    pub least_ratio: f64,
    /// What becomes of a run whose ratio is smaller.
    pub when_below: WhenBelow,
}

/// When a value is accepted.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Acceptance {
    /// Inside its limits (ILAC-G8:09/2019, 4.2.1): pass or fail, and nothing between.
    Simple,
    /// Inside by a guard band (ILAC-G8:09/2019, 4.2.3): four statements.
    GuardBand {
        /// Width of the guard band in expanded uncertainties.
        of_expanded: f64,
    },
    /// Inside, and the probability that it lies outside after all is small enough (JCGM 106:2012): four statements.
    WrongAcceptance {
        /// Largest such probability, as a fraction of one.
        largest: f64,
    },
}

/// What becomes of a run whose uncertainty is too large for its limits.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum WhenBelow {
    /// It is said, and the run goes on.
    Warn,
    /// The run does not begin.
    Refuse,
}

impl Default for DecisionRule {
    /// What holds without the table: 95 %, a guard band as wide as U, and a word of warning below 4:1.
    fn default() -> Self {
        Self {
            coverage: 0.95,
            acceptance: Acceptance::GuardBand { of_expanded: 1.0 },
            least_ratio: 4.0,
            when_below: WhenBelow::Warn,
        }
    }
}

/// The table as far as it was read, each value by itself good.
#[derive(Default)]
pub(super) struct DecisionDraft {
    coverage: Option<At<f64>>,
    rule: Option<At<RuleWord>>,
    guard_band: Option<At<f64>>,
    wrong_acceptance: Option<At<f64>>,
    least_ratio: Option<At<f64>>,
    when_below: Option<At<WhenBelow>>,
}

#[derive(Clone, Copy)]
enum RuleWord {
    Simple,
    GuardBand,
    WrongAcceptance,
}

/// Coverage probabilities that mean something: more often right than not, and no certainty.
const COVERAGE: (f64, f64) = (0.5, 0.999);
/// Widest guard band, in expanded uncertainties.
const WIDEST_GUARD_BAND: f64 = 5.0;
/// Probabilities of wrong acceptance; half is what a value right at its limit has.
const WRONG_ACCEPTANCE: (f64, f64) = (1e-6, 0.5);
/// Largest ratio anybody asks for.
const LARGEST_RATIO: f64 = 1000.0;

impl DecisionDraft {
    pub(super) fn read(mut table: Table<'_, '_>) -> Self {
        let rules = [
            ("simple", RuleWord::Simple),
            ("guard_band", RuleWord::GuardBand),
            ("wrong_acceptance", RuleWord::WrongAcceptance),
        ];
        let draft = Self {
            coverage: table.optional_fraction("coverage"),
            rule: table.optional_choice("rule", &rules),
            guard_band: table.optional_fraction("guard_band"),
            wrong_acceptance: table.optional_fraction("wrong_acceptance"),
            least_ratio: table.optional_number("least_ratio"),
            when_below: table
                .optional_choice("when_below", &[("warn", WhenBelow::Warn), ("refuse", WhenBelow::Refuse)]),
        };
        draft.check(&table);
        draft
    }

    fn check(&self, table: &Table<'_, '_>) {
        let within = |value: &Option<At<f64>>, (low, high): (f64, f64), wanted: &str| {
            if let Some(value) = value
                && !(value.value >= low && value.value <= high)
            {
                table.problem(value, &format!("wanted {wanted}"));
            }
        };
        within(&self.coverage, COVERAGE, "50 % to 99.9 %");
        within(&self.guard_band, (0.0, WIDEST_GUARD_BAND), "0 % to 500 % of U");
        within(
            &self.wrong_acceptance,
            WRONG_ACCEPTANCE,
            "0.0001 % to 50 %, which is what a value right at its limit has",
        );
        within(&self.least_ratio, (0.0, LARGEST_RATIO), "0 to 1000; 4 is common practice");
    }

    pub(super) fn finish(&self) -> DecisionRule {
        let usual = DecisionRule::default();
        let value = |field: &Option<At<f64>>| field.as_ref().map(|at| at.value);
        let rule = self.rule.as_ref().map_or(RuleWord::GuardBand, |rule| rule.value);
        let acceptance = match rule {
            RuleWord::Simple => Acceptance::Simple,
            RuleWord::GuardBand => {
                Acceptance::GuardBand { of_expanded: value(&self.guard_band).unwrap_or(1.0) }
            }
            RuleWord::WrongAcceptance => Acceptance::WrongAcceptance {
                largest: value(&self.wrong_acceptance).unwrap_or(USUAL_WRONG_ACCEPTANCE),
            },
        };
        DecisionRule {
            coverage: value(&self.coverage).unwrap_or(usual.coverage),
            acceptance,
            least_ratio: value(&self.least_ratio).unwrap_or(usual.least_ratio),
            when_below: self.when_below.as_ref().map_or(usual.when_below, |word| word.value),
        }
    }
}

/// What a guard band of U at 95 % comes to for one limit (ILAC-G8:09/2019, table 1).
const USUAL_WRONG_ACCEPTANCE: f64 = 0.025;

#[cfg(test)]
mod tests {
    use super::*;
    use crate::profile::Profile;
    use crate::profile::sample::{RIVER_NODE, problems};
    use insta::assert_snapshot as says;

    fn rule(table: &str) -> DecisionRule {
        let profile = Profile::read("p.toml", &format!("{RIVER_NODE}\n{table}"));
        profile.unwrap_or_else(|problems| panic!("{problems}")).decision
    }

    fn told(table: &str) -> String {
        problems(&[("[limits]", &format!("[decision]\n{table}\n[limits]"))])
    }

    #[test]
    fn without_a_table_the_usual_rule_holds() {
        assert_eq!(rule(""), DecisionRule::default());
        assert_eq!(rule("[decision]"), DecisionRule::default());
    }

    #[test]
    fn each_rule_takes_its_own_number() {
        let table = |rule| {
            format!("[decision]\nrule = \"{rule}\"\nguard_band = \"150 %\"\nwrong_acceptance = \"1 %\"\n")
        };
        assert_eq!(rule(&table("simple")).acceptance, Acceptance::Simple);
        assert_eq!(rule(&table("guard_band")).acceptance, Acceptance::GuardBand { of_expanded: 1.5 });
        assert_eq!(
            rule(&table("wrong_acceptance")).acceptance,
            Acceptance::WrongAcceptance { largest: 0.01 }
        );
        let read = rule("[decision]\ncoverage = \"99 %\"\nleast_ratio = 2.5\nwhen_below = \"refuse\"");
        assert_eq!((read.coverage, read.least_ratio, read.when_below), (0.99, 2.5, WhenBelow::Refuse));
    }

    #[test]
    fn what_makes_no_sense_is_refused_at_its_place() {
        says!(told("coverage = \"100 %\"\nguard_band = \"-1 %\"\nwrong_acceptance = \"60 %\"\nleast_ratio = -1"), @r#"
        p.toml:39:12: decision.coverage = "100 %": wanted 50 % to 99.9 %
        p.toml:40:14: decision.guard_band = "-1 %": wanted 0 % to 500 % of U
        p.toml:41:20: decision.wrong_acceptance = "60 %": wanted 0.0001 % to 50 %, which is what a value right at its limit has
        p.toml:42:15: decision.least_ratio = -1: wanted 0 to 1000; 4 is common practice
        "#);
        says!(told("coverage = 0.95\nrule = \"strict\"\nwhen_below = \"ignore\"\nleast_ratio = \"4\""), @r#"
        p.toml:39:12: decision.coverage: read a float, wanted a share in per cent such as "1 %" in quotes
        p.toml:40:8: decision.rule = "strict": wanted "simple" or "guard_band" or "wrong_acceptance"
        p.toml:41:14: decision.when_below = "ignore": wanted "warn" or "refuse"
        p.toml:42:15: decision.least_ratio: read a string, wanted a number without quotes
        "#);
        says!(told("covrage = \"95 %\""), @r#"p.toml:39:1: unknown key "covrage" in [decision]; did you mean "coverage"?"#);
    }
}
