//! A study cut off after any cycle, or in the middle of one, goes on and says the same in the end.

use super::{Boards, QUESTION, plan};
use crate::river;
use ebbmark::record::{Log, Moment, StudyHeading};
use ebbmark::report::{StudySheet, study_json};
use ebbmark::sim::Faults;
use ebbmark::study::{Estimates, Plan};
use ebbmark::trace::{OutputState, Stop};
use ebbmark::units::Volts;
use jiff::tz::TimeZone;
use std::path::Path;
use std::time::Duration;

const NAME: &str = "first";

struct Study {
    boards: Boards,
    heading: StudyHeading,
    moment: Moment,
}

/// How a sitting at the bench ends.
#[derive(Clone, Copy)]
enum Until {
    /// All is measured.
    Done,
    /// The program is killed after so many cycles: what it kept is all there is.
    Killed(usize),
    /// The operator stops it in the middle of the next cycle.
    Stopped(usize),
}

impl Study {
    fn new(seed: u64) -> Self {
        let moment = Moment::new("2026-12-01T08:00:00Z".parse().expect("RFC 3339"), &TimeZone::UTC);
        let boards = ["RN000001", "RN000002"].map(str::to_owned).to_vec();
        let plan = Plan { boards, rates: vec![None, Some(0.2)], ..plan(2) };
        let heading = StudyHeading::new("RN-204", "C", "0", None, plan, moment.clone());
        Self { boards: Boards { jitter: Volts(2e-3), ..Boards::still(seed) }, heading, moment }
    }

    /// One sitting: a program that starts, goes on behind what is kept, and ends.
    fn sit(&self, root: &Path, until: Until) {
        let profile = river::profile();
        let log = Log::open(root, "s", &self.moment).expect("a log").log;
        let (study, _) = log.open_study(NAME, &self.heading, &self.moment).expect("a study");
        let mut kept = log.folder().study(NAME).expect("readable").expect("there").cycles;
        for (measured, order) in self.heading.plan.orders().skip(kept.len()).enumerate() {
            let faults = match until {
                Until::Killed(cycles) if measured == cycles => return,
                Until::Stopped(cycles) if measured == cycles => Faults::abort_at(Duration::from_secs(2)),
                _ => Faults::none(),
            };
            let (cycle, trace, is_on) = self.boards.cycle(&profile, &self.heading.plan, &kept, order, faults);
            assert!(!is_on && trace.ending.output == OutputState::Off);
            if trace.ending.stop == Stop::Aborted {
                return;
            }
            study.keep(&cycle, &trace).expect("kept");
            kept.push(cycle);
        }
    }

    /// What is said in the end, and the file itself.
    fn result(&self, root: &Path) -> (String, String) {
        let log = Log::open(root, "s", &self.moment).expect("a log").log;
        let kept = log.folder().study(NAME).expect("readable").expect("there");
        let estimates = Estimates::of(&kept.heading.plan, &kept.cycles, QUESTION);
        assert_eq!(estimates.cycles, estimates.ordered);
        let sheet = StudySheet { name: NAME, heading: &kept.heading, estimates: &estimates };
        let file = log.folder().study_file(NAME).expect("a plain name");
        (study_json(&sheet).expect("text"), std::fs::read_to_string(file).expect("text"))
    }
}

#[test]
fn an_interruption_at_any_cycle_costs_nothing() {
    for seed in [3, 4] {
        let study = Study::new(seed);
        let folder = || tempfile::tempdir().expect("a temporary folder");
        let whole = folder();
        study.sit(whole.path(), Until::Done);
        let wanted = study.result(whole.path());
        for cycles in 0..study.heading.plan.total() {
            for first in [Until::Killed(cycles), Until::Stopped(cycles)] {
                let root = folder();
                study.sit(root.path(), first);
                study.sit(root.path(), Until::Killed(1));
                study.sit(root.path(), Until::Done);
                assert!(study.result(root.path()) == wanted, "seed {seed}, interrupted at cycle {cycles}");
            }
        }
    }
}
