//! Colour, where the caller wants it. It repeats what the words say and never stands alone.

use crate::verdict::{Decision, Outcome};
use anstyle::{AnsiColor, Style};

/// Whether a text carries colour.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Paint {
    /// Letters only.
    Plain,
    /// With ANSI colours, for a terminal.
    Coloured,
}

impl Paint {
    /// `text` in `style`.
    pub(super) fn on(self, style: Style, text: &str) -> String {
        match self {
            Paint::Plain => text.to_owned(),
            Paint::Coloured => format!("{style}{text}{style:#}"),
        }
    }
}

pub(super) fn of_outcome(outcome: Outcome) -> Style {
    let colour = match outcome {
        Outcome::Pass => AnsiColor::Green,
        Outcome::ConditionalPass | Outcome::ConditionalFail => AnsiColor::Yellow,
        Outcome::Fail => AnsiColor::Red,
        Outcome::Invalid | Outcome::Aborted | Outcome::Incomplete => AnsiColor::Magenta,
    };
    colour.on_default().bold()
}

pub(super) fn of_decision(decision: Option<Decision>) -> Style {
    match decision {
        Some(Decision::Fail) => of_outcome(Outcome::Fail),
        Some(Decision::ConditionalPass | Decision::ConditionalFail) => of_outcome(Outcome::ConditionalPass),
        Some(Decision::Pass) | None => Style::new(),
    }
}

pub(super) fn of_danger() -> Style {
    AnsiColor::Red.on_default().bold().invert()
}
