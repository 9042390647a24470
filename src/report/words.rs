//! The words of the other rooms as text: a decision, the code of a finding.

use crate::analysis::{FindingCode, Shape};
use crate::record::Occasion;
use crate::verdict::Decision;
use serde::Serialize;

/// `conditional_pass`
pub(super) fn decision(decision: Decision) -> String {
    in_files(&decision)
}

/// `never_trips`
pub(super) fn code(code: FindingCode) -> String {
    in_files(&code)
}

/// `rectangular`
pub(super) fn shape(shape: Shape) -> String {
    in_files(&shape)
}

/// Why a run was made, where that was not to judge a board for the first time.
pub(super) fn occasion(occasion: &Occasion) -> Option<String> {
    match occasion {
        Occasion::Production => None,
        Occasion::Again(run) => Some(format!("again, passed in {run}")),
        Occasion::Reference => Some("reference board".to_owned()),
    }
}

/// A coverage factor: `1.68`, `2`.
pub(super) fn factor(factor: f64) -> String {
    format!("{factor:.2}").trim_end_matches('0').trim_end_matches('.').to_owned()
}

/// A probability in per cent, with no needless zeros: `95 %`, `2.5 %`, `0.0001 %`; below that only that it is less.
pub(super) fn percent(probability: f64) -> String {
    let percent = 100.0 * probability;
    if percent > 0.0 && percent < 1e-4 {
        return "less than 0.0001 %".to_owned();
    }
    let decimals = if percent >= 1.0 || percent == 0.0 { 1 } else { 4 };
    let text = format!("{percent:.decimals$}");
    format!("{} %", text.trim_end_matches('0').trim_end_matches('.'))
}

/// `never_re_enables` as people say it: `never re-enables`.
pub(super) fn spoken(code: &str) -> String {
    code.replace("re_enable", "re-enable").replace('_', " ")
}

/// The word as it stands in files, so that there is no second list of them.
pub(super) fn in_files(word: &impl Serialize) -> String {
    match serde_json::to_value(word) {
        Ok(serde_json::Value::String(text)) => text,
        other => format!("{other:?}"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn words_are_those_of_the_files() {
        assert_eq!(decision(Decision::ConditionalFail), "conditional_fail");
        assert_eq!(spoken(&code(FindingCode::NeverReEnables)), "never re-enables");
    }
}
