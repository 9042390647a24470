//! What the process tells its caller.

use crate::report::OUTPUT_MAY_BE_ON;
use crate::trace::{Ending, OutputState};
use crate::verdict::Outcome;
use std::process::ExitCode;

/// The exit codes of the program.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Exit {
    /// 0: pass or conditional pass, or a command that did its work.
    Pass,
    /// 1: fail or conditional fail.
    Fail,
    /// 2: usage, profile, definition or file error.
    Usage,
    /// 3: the bench could not judge the board.
    Invalid,
    /// 4: aborted.
    Aborted,
    /// 5: the output may still be on.
    OutputMayBeOn,
}

impl Exit {
    /// The exit code of a finished run. That the output may be on outweighs everything else.
    pub fn of_run(outcome: Outcome, ending: &Ending) -> Self {
        if ending.output == OutputState::MayBeOn {
            return Self::OutputMayBeOn;
        }
        match outcome {
            Outcome::Pass | Outcome::ConditionalPass => Self::Pass,
            Outcome::ConditionalFail | Outcome::Fail => Self::Fail,
            Outcome::Invalid | Outcome::Incomplete => Self::Invalid,
            Outcome::Aborted => Self::Aborted,
        }
    }
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> Self {
        ExitCode::from(match exit {
            Exit::Pass => 0,
            Exit::Fail => 1,
            Exit::Usage => 2,
            Exit::Invalid => 3,
            Exit::Aborted => 4,
            Exit::OutputMayBeOn => 5,
        })
    }
}

/// A command that could not do its work.
#[derive(Debug)]
pub struct Failure {
    /// What the process tells its caller.
    pub exit: Exit,
    /// What went wrong, where, and what to do.
    pub error: anyhow::Error,
}

impl Failure {
    /// A failure of the bench.
    pub fn bench(error: impl Into<anyhow::Error>) -> Self {
        Self { exit: Exit::Invalid, error: error.into() }
    }

    /// A failure that leaves the output perhaps on; the message begins with what to do about that.
    pub fn output_may_be_on(error: impl std::fmt::Display) -> Self {
        Self { exit: Exit::OutputMayBeOn, error: anyhow::anyhow!("{OUTPUT_MAY_BE_ON}\n{error}") }
    }
}

/// Anything not said to be the bench's is a mistake in usage or files.
impl<E: Into<anyhow::Error>> From<E> for Failure {
    fn from(error: E) -> Self {
        Self { exit: Exit::Usage, error: error.into() }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::trace::Stop;

    #[test]
    fn an_output_that_may_be_on_outweighs_every_outcome() {
        let codes = |output| {
            Outcome::ALL.map(|outcome| Exit::of_run(outcome, &Ending { stop: Stop::Completed, output }))
        };
        assert!(codes(OutputState::MayBeOn).iter().all(|exit| *exit == Exit::OutputMayBeOn));
        assert_eq!(
            codes(OutputState::Off),
            [Exit::Pass, Exit::Pass, Exit::Fail, Exit::Fail, Exit::Invalid, Exit::Aborted, Exit::Invalid]
        );
    }
}
