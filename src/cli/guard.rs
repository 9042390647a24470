//! The program's own failures: a panic ends a run as any fault does, with the output off and the record kept.

use crate::analysis::{About, Finding, FindingCode, analyse};
use crate::bench::{Bench, Watch, drive};
use crate::procedure::{Action, Event, Procedure, Progress};
use crate::profile::Profile;
use crate::trace::{BenchFault, Claims, Ending, FaultKind, OutputState, Sample, Stop, Trace};
use crate::verdict::{Outcome, Verdict, judge};
use std::any::Any;
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::time::Duration;

/// Times the output is commanded off after a panic, as at the end of any run.
const TRIES: usize = 3;

/// Drives `bench` to the end of a run as [`drive`] does. After a panic half way the output is commanded off and read
/// back here, and the trace holds what had been measured by then.
pub(super) fn driven<B: Bench>(
    procedure: Procedure,
    bench: &mut B,
    claims: Claims,
    watch: &mut impl Watch,
    abort: impl Future<Output = ()>,
    runner: &impl Runner,
) -> Trace {
    let mut witness = Witness { watch, samples: Vec::new() };
    // Nothing the panic may have left half done is used again, but the bench: and that is told to switch off.
    let drove = catch_unwind(AssertUnwindSafe(|| {
        runner.run(drive(procedure, bench, claims.clone(), &mut witness, abort))
    }));
    drove.unwrap_or_else(|panic| {
        let is_off = |_: usize| runner.run(bench.perform(&Action::OutputOff)) == Event::Done;
        let output = if (0..TRIES).any(is_off) { OutputState::Off } else { OutputState::MayBeOn };
        let fault = BenchFault { kind: FaultKind::Internal, text: blamed(panic.as_ref()) };
        Trace {
            samples: witness.samples,
            settings: Vec::new(),
            claims,
            ending: Ending { stop: Stop::Fault(fault), output },
        }
    })
}

/// Runs futures to their end.
pub(super) trait Runner {
    fn run<F: Future>(&self, future: F) -> F::Output;
}

impl Runner for tokio::runtime::Runtime {
    fn run<F: Future>(&self, future: F) -> F::Output {
        self.block_on(future)
    }
}

/// Judges a trace. A panic on the way must not cost what was measured: the run is invalid, and its trace is kept.
pub(super) fn judged(trace: &Trace, profile: &Profile) -> Verdict {
    let judging = AssertUnwindSafe(|| judge(&analyse(trace, profile), profile, &trace.ending));
    catch_unwind(judging).unwrap_or_else(|panic| Verdict {
        outcome: Outcome::Invalid,
        judged: Vec::new(),
        findings: vec![Finding {
            code: FindingCode::BenchFault,
            about: About::Bench,
            text: blamed(panic.as_ref()),
        }],
    })
}

fn blamed(panic: &(dyn Any + Send)) -> String {
    let words = panic.downcast_ref::<String>().map(String::as_str);
    let words = words.or_else(|| panic.downcast_ref::<&str>().copied()).unwrap_or("no reason given");
    format!(
        "the program itself failed: {words}. This is no fault of board or bench; report it with the record \
         of this run."
    )
}

/// Passes on what it sees, and keeps the readings.
struct Witness<'w, W> {
    watch: &'w mut W,
    samples: Vec<Sample>,
}

impl<W: Watch> Watch for Witness<'_, W> {
    fn saw(&mut self, at: Duration, progress: Progress, action: &Action, event: &Event) {
        if let Event::Reading(sample) = event {
            self.samples.push(*sample);
        }
        self.watch.saw(at, progress, action, event);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bench::{VirtualBench, run_ready};
    use crate::cli::files::river_node;
    use crate::procedure::Plan;
    use crate::sim::{Condition, Faults, Setup};

    struct InVirtualTime;

    impl Runner for InVirtualTime {
        fn run<F: Future>(&self, future: F) -> F::Output {
            run_ready(future)
        }
    }

    /// Fails on purpose when it sees the reading with this number; 0 fails at once.
    struct Failing {
        at: usize,
        seen: usize,
    }

    impl Watch for Failing {
        fn saw(&mut self, _: Duration, _: Progress, _: &Action, event: &Event) {
            self.seen += usize::from(matches!(event, Event::Reading(_)));
            assert!(self.seen < self.at, "a mistake of this program, on purpose");
        }
    }

    /// A run that panics at a reading; its trace, and whether the output is truly on.
    fn panicked(at: usize, faults: Faults) -> (Trace, bool) {
        let profile = profile();
        let setup = Setup::new(&profile, Condition::Good, 4);
        let procedure = Procedure::new(Plan::new(&profile, &setup.ability()));
        let mut bench = VirtualBench::new(&setup, setup.ability()).with_faults(faults);
        let mut watch = Failing { at, seen: 0 };
        let never = std::future::pending();
        let trace = driven(procedure, &mut bench, setup.claims(), &mut watch, never, &InVirtualTime);
        (trace, bench.output_is_on())
    }

    fn profile() -> Profile {
        river_node().unwrap_or_else(|failure| panic!("{}", failure.error))
    }

    #[test]
    fn a_panic_half_way_ends_with_the_output_off_and_what_was_measured_kept() {
        let (trace, is_on) = panicked(20, Faults::none());
        assert!(!is_on && trace.ending.output == OutputState::Off, "{:?}", trace.ending);
        assert_eq!(trace.samples.len(), 20);
        assert!(trace.samples.iter().any(|sample| sample.terminals() > profile().supply.floor), "it was on");
        let Stop::Fault(fault) = &trace.ending.stop else { panic!("{:?}", trace.ending) };
        assert_eq!(fault.kind, FaultKind::Internal);
        assert!(fault.text.contains("a mistake of this program, on purpose"), "{fault}");
        assert_eq!(judged(&trace, &profile()).outcome, Outcome::Invalid);
    }

    #[test]
    fn an_output_that_cannot_be_switched_off_after_a_panic_is_said_to_be_perhaps_on() {
        let (trace, _) = panicked(0, Faults::lasting(FaultKind::LinkLost));
        assert_eq!(trace.ending.output, OutputState::MayBeOn);
    }
}
