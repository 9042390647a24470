//! A whole run in virtual time: procedure, simulated bench, analysis and verdict.

use ebbmark::analysis::analyse;
use ebbmark::bench::{VirtualBench, drive, run_ready};
use ebbmark::procedure::{Ability, Plan, Procedure};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::{Condition, Faults, Setup, Truth};
use ebbmark::trace::{OutputState, Stop, Trace};
use ebbmark::units::Volts;
use ebbmark::verdict::{Verdict, judge};
use std::time::Duration;

/// What came of a run, and what the board really was.
pub(crate) struct Run {
    pub(crate) trace: Trace,
    pub(crate) verdict: Verdict,
    pub(crate) truth: Truth,
}

/// One quantity of a board: what was found, how sure that is, and what is true.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Measured {
    pub(crate) name: QuantityName,
    pub(crate) value: f64,
    pub(crate) expanded_uncertainty: f64,
    pub(crate) truth: f64,
}

impl Measured {
    /// True when U covers the truth.
    pub(crate) fn is_covered(&self) -> bool {
        (self.value - self.truth).abs() <= self.expanded_uncertainty
    }
}

/// The quantities of every run whose truth is known.
pub(crate) const MEASURED: [QuantityName; 5] = [
    QuantityName::Trip,
    QuantityName::ReEnable,
    QuantityName::Hysteresis,
    QuantityName::OnCurrent,
    QuantityName::OffCurrent,
];

impl Run {
    /// All that was measured and whose truth is known.
    pub(crate) fn all_measured(&self, profile: &Profile) -> Vec<Measured> {
        let of = |name| {
            let (value, expanded_uncertainty) = self.measured(name)?;
            Some(Measured { name, value, expanded_uncertainty, truth: self.true_value(name, profile)? })
        };
        MEASURED.into_iter().filter_map(of).collect()
    }

    /// The true value of a quantity of this profile, where it is known.
    pub(crate) fn true_value(&self, name: QuantityName, profile: &Profile) -> Option<f64> {
        self.truth.value(name, profile)
    }

    /// What was measured, with its expanded uncertainty.
    pub(crate) fn measured(&self, name: QuantityName) -> Option<(f64, f64)> {
        let judged = self.verdict.judged.iter().find(|judged| judged.quantity.name == name)?;
        Some((judged.quantity.value, judged.expanded_uncertainty()))
    }
}

/// Tests the board of `condition` and `seed`.
pub(crate) fn run(profile: &Profile, condition: Condition, seed: u64) -> Run {
    run_setup(profile, &Setup::new(profile, condition, seed))
}

/// Tests the board of `setup`.
pub(crate) fn run_setup(profile: &Profile, setup: &Setup) -> Run {
    run_able(profile, setup, setup.ability())
}

/// Tests the board of `setup` on a bench that can do this.
pub(crate) fn run_able(profile: &Profile, setup: &Setup, ability: Ability) -> Run {
    let mut bench = VirtualBench::new(setup, ability);
    let trace = run_on(profile, setup, &mut bench);
    let verdict = judge(&analyse(&trace, profile), profile, &trace.ending);
    Run { trace, verdict, truth: bench.world().truth() }
}

/// Tests a board while faults strike the bench; also tells whether the output was on at the end.
pub(crate) fn faulty_run(profile: &Profile, condition: Condition, seed: u64) -> (Trace, bool) {
    /// About as long as a run takes, so that faults strike anywhere in it.
    const HORIZON: Duration = Duration::from_secs(10);
    let setup = Setup::new(profile, condition, seed);
    let mut bench = VirtualBench::new(&setup, setup.ability()).with_faults(Faults::random(seed, HORIZON));
    let trace = run_on(profile, &setup, &mut bench);
    (trace, bench.output_is_on())
}

fn run_on(profile: &Profile, setup: &Setup, bench: &mut VirtualBench) -> Trace {
    let procedure = Procedure::new(Plan::new(profile, bench.ability()));
    run_ready(drive(procedure, bench, setup.claims(), &mut (), std::future::pending()))
}

/// The run came to its end, no set-point was above the profile's maximum, and the output is off.
pub(crate) fn assert_safe(run: &Run, profile: &Profile, what: &str) {
    let highest = run.trace.samples.iter().map(|sample| sample.set).fold(Volts::ZERO, Volts::max);
    assert!(highest <= profile.supply.maximum, "{what}: {highest}");
    assert_eq!(run.trace.ending.output, OutputState::Off, "{what}");
    assert_eq!(run.trace.ending.stop, Stop::Completed, "{what}");
}
