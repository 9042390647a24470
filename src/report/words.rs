//! The words of the other rooms as text: a decision, the code of a finding.

use crate::analysis::FindingCode;
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
