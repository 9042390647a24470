//! What a case is, and whether a run came out as it should.

use crate::relay;
use crate::virtual_run::{Run, run_able};
use ebbmark::procedure::Ability;
use ebbmark::sim::{Condition, Setup};
use ebbmark::verdict::Outcome;

/// One board or bench, and what the program must make of it.
pub(super) struct Case {
    /// Number in the list of cases, with a letter where there are several of a kind.
    pub(super) number: &'static str,
    /// What it is.
    pub(super) what: &'static str,
    /// The conditions of the simulation.
    pub(super) conditions: &'static [Condition],
    /// Figures of the case in place of those the conditions draw.
    pub(super) figures: fn(&mut Setup),
    /// What the bench lacks.
    pub(super) bench: fn(&mut Ability),
    /// Limits besides the profile's, or instead of them.
    pub(super) limits: &'static [(&'static str, &'static str)],
    /// Outcomes it may have.
    pub(super) outcomes: &'static [Outcome],
    /// What is to be found.
    pub(super) finding: Wanted,
}

/// The finding a run must begin with.
#[derive(Clone, Copy, Debug)]
pub(super) enum Wanted {
    /// This one, by its name in files.
    First(&'static str),
    /// One of these: what is seen of one fault is a matter of chance.
    OneOf(&'static [&'static str]),
    /// None at all.
    Nothing,
}

impl Wanted {
    fn is(self, first: Option<&str>) -> bool {
        match self {
            Self::First(name) => first == Some(name),
            Self::OneOf(names) => first.is_some_and(|first| names.contains(&first)),
            Self::Nothing => first.is_none(),
        }
    }
}

/// A passing run.
pub(super) const PASS: &[Outcome] = &[Outcome::Pass];
/// A failing run.
pub(super) const FAIL: &[Outcome] = &[Outcome::Fail];
/// A run that says nothing about the board.
pub(super) const INVALID: &[Outcome] = &[Outcome::Invalid];

impl Case {
    /// A case as its conditions have it.
    pub(super) const fn new(
        number: &'static str,
        what: &'static str,
        conditions: &'static [Condition],
        outcomes: &'static [Outcome],
        finding: Wanted,
    ) -> Self {
        Self { number, what, conditions, figures: |_| {}, bench: |_| {}, limits: &[], outcomes, finding }
    }

    /// The same with these figures.
    pub(super) const fn figures(self, figures: fn(&mut Setup)) -> Self {
        Self { figures, ..self }
    }

    /// The same on a bench that lacks something.
    pub(super) const fn bench(self, bench: fn(&mut Ability)) -> Self {
        Self { bench, ..self }
    }

    /// The same with other limits.
    pub(super) const fn limits(self, limits: &'static [(&'static str, &'static str)]) -> Self {
        Self { limits, ..self }
    }

    /// Tests its board.
    pub(super) fn run(&self, seed: u64) -> Run {
        let profile = relay::profile(self.limits);
        let mut setup = relay::in_order(seed).under(self.conditions, &profile);
        (self.figures)(&mut setup);
        let mut ability = setup.ability();
        (self.bench)(&mut ability);
        run_able(&profile, &setup, ability)
    }

    /// How the run of this seed differs from what is wanted, if it does.
    pub(super) fn wrong(&self, seed: u64) -> Option<String> {
        let run = self.run(seed);
        let codes: Vec<String> = run.verdict.findings.iter().map(|finding| name(&finding.code)).collect();
        let right = self.outcomes.contains(&run.verdict.outcome)
            && self.finding.is(codes.first().map(String::as_str));
        (!right).then(|| {
            let wanted: Vec<String> = self.outcomes.iter().map(ToString::to_string).collect();
            format!(
                "{} {}, seed {seed}: {} {codes:?}, wanted {} {:?}; {:?}",
                self.number,
                self.what,
                run.verdict.outcome,
                wanted.join(" or "),
                self.finding,
                run.trace.ending.stop,
            )
        })
    }
}

/// A finding's name in files.
fn name(code: &ebbmark::analysis::FindingCode) -> String {
    serde_json::to_string(code).map(|quoted| quoted.trim_matches('"').to_owned()).unwrap_or_default()
}

/// Runs every case with every seed; all must come out right.
pub(super) fn check(cases: &[Case], seeds: std::ops::Range<u64>) {
    let wrong = |case: &Case| seeds.clone().filter_map(|seed| case.wrong(seed)).collect::<Vec<String>>();
    let complaints: Vec<String> = cases.iter().flat_map(wrong).collect();
    assert!(complaints.is_empty(), "{} complaints:\n{}", complaints.len(), complaints.join("\n"));
}
