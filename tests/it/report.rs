//! What a run says, as text, JSON and CSV.
#![expect(clippy::expect_used, reason = "a test that cannot be set up has failed")]

mod many_runs;
mod one_run;
