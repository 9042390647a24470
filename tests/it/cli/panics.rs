//! A mistake in the program itself, in the middle of a run over serial ports: unwinding switches the output off.

use super::workplace::Workplace;
use crate::river;
use ebbmark::bench::serial::connect;
use ebbmark::bench::{Watch, drive};
use ebbmark::clock::Clock;
use ebbmark::instrument::library;
use ebbmark::procedure::{Action, Event, Plan, Procedure, Progress};
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::time::Duration;

/// Fails on purpose at the first reading with the output on.
struct Failing<'w> {
    place: &'w Workplace,
}

impl Watch for Failing<'_> {
    fn saw(&mut self, _: Duration, _: Progress, _: &Action, event: &Event) {
        let is_on = matches!(event, Event::Reading(_)) && self.place.bench.output();
        assert!(!is_on, "a mistake of this program, on purpose");
    }
}

#[test]
fn the_output_goes_off_when_the_program_fails_in_the_middle_of_a_run() {
    let place = Workplace::new();
    let file = library::open_bench(&place.folder().join("bench.toml")).expect("a sound bench file");
    let profile = river::profile();
    let runtime = tokio::runtime::Builder::new_current_thread().enable_time().build().expect("a runtime");
    let failed = catch_unwind(AssertUnwindSafe(|| {
        runtime.block_on(async {
            let maximum = profile.supply.maximum;
            let mut bench = connect(&file, maximum, Clock::real()).await.expect("a bench in order");
            bench.begin_run().await.expect("fit for a run");
            let procedure = Procedure::new(Plan::new(&profile, &file.ability(maximum)));
            let mut watch = Failing { place: &place };
            let claims = file.claims(&profile.supply);
            drive(procedure, &mut bench, claims, &mut watch, std::future::pending()).await
        })
    }));
    let words = failed.expect_err("it panics");
    let words = words.downcast_ref::<&str>().copied().or(words.downcast_ref::<String>().map(String::as_str));
    assert_eq!(words, Some("a mistake of this program, on purpose"));
    assert!(!place.bench.output(), "the output is on");
}
