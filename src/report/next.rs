//! The one thing to do next, in plain language.

use super::{Sheet, quantities, words};
use crate::analysis::{About, Finding, FindingCode};
use crate::trace::OutputState;
use crate::verdict::{Decision, Outcome};

/// What outranks every other instruction while the output is not known to be off.
pub const OUTPUT_MAY_BE_ON: &str = "THE OUTPUT MAY STILL BE ON: switch the supply off at its own switch or at the \
     mains, then measure zero volts at the board before you touch it.";

/// The one thing to do next.
pub fn next_action(sheet: &Sheet<'_>) -> String {
    if sheet.output == Some(OutputState::MayBeOn) {
        return OUTPUT_MAY_BE_ON.to_owned();
    }
    let charged = sheet.findings.iter().any(|finding| finding.code == FindingCode::StillCharged);
    let caution = if charged { STILL_CHARGED } else { "" };
    format!("{caution}{}", usual(sheet))
}

/// What comes first when the board was not seen to discharge.
const STILL_CHARGED: &str = "WAIT: the board still held a charge when the run ended. Measure less than 0.1 V across \
     its terminals before you touch it. Then: ";

fn usual(sheet: &Sheet<'_>) -> String {
    match sheet.outcome {
        Outcome::Pass => match remarks(sheet) {
            none if none.is_empty() => "Take the board off and scan the next one.".to_owned(),
            remarks => {
                format!("Take the board off and scan the next one. It passes with a remark: {remarks}.")
            }
        },
        Outcome::ConditionalPass => format!(
            "Take the board off and scan the next one. It passes with a note: {}.",
            reasons(sheet, Decision::ConditionalPass, About::Board)
        ),
        Outcome::ConditionalFail => format!(
            "Put the board aside with a tag for the engineer: {}.",
            reasons(sheet, Decision::ConditionalFail, About::Board)
        ),
        Outcome::Fail => {
            format!("Put the board aside with a fail tag: {}.", reasons(sheet, Decision::Fail, About::Board))
        }
        Outcome::Invalid => format!(
            "The bench could not judge the board ({}). Look at what is named above, then test the same board again.",
            reasons(sheet, Decision::Fail, About::Bench)
        ),
        Outcome::Aborted => {
            "The run was stopped. Test the same board again before it goes anywhere else.".to_owned()
        }
        Outcome::Incomplete => {
            "The run never ended. Make sure that the output is off, then test the same board again."
                .to_owned()
        }
    }
}

/// Why, in a few words: the quantities decided as badly as `decision`, else the findings about the board or the bench.
fn reasons(sheet: &Sheet<'_>, decision: Decision, about: About) -> String {
    let complaints: Vec<String> = sheet
        .quantities
        .iter()
        .filter(|judged| about == About::Board && judged.decision == Some(decision))
        .map(quantities::complaint)
        .collect();
    let diagnoses = spoken(sheet.findings.iter().filter(|finding| finding.about == about));
    match (complaints.is_empty(), diagnoses.is_empty()) {
        (false, _) => complaints.join("; "),
        (true, false) => diagnoses,
        (true, true) => "the reason is in the table above".to_owned(),
    }
}

/// What was found about a board that passed, mere notes aside.
fn remarks(sheet: &Sheet<'_>) -> String {
    let about_board = |finding: &&Finding| finding.about == About::Board && !finding.code.is_note();
    spoken(sheet.findings.iter().filter(about_board))
}

/// Codes as people say them, each once where two of a kind follow each other.
fn spoken<'f>(findings: impl Iterator<Item = &'f Finding>) -> String {
    let mut words: Vec<String> = findings.map(|finding| words::spoken(&words::code(finding.code))).collect();
    words.dedup();
    words.join("; ")
}
