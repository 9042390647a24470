//! The pattern of a board's serial numbers.

use crate::document::{At, Table};
use regex_lite::Regex;

/// The pattern as the profile has it, for messages.
pub(super) fn as_written(pattern: &Regex) -> &str {
    let text = pattern.as_str();
    text.strip_prefix(FRONT).and_then(|text| text.strip_suffix(BACK)).unwrap_or(text)
}

/// What makes a pattern match in full.
const FRONT: &str = "^(?:";
const BACK: &str = ")$";

/// Compiles the pattern so that it must match a serial number in full; notes what is wrong with it.
pub(super) fn pattern(text: &At<String>, root: &Table<'_, '_>) -> Option<Regex> {
    // The pattern must stand on its own first: "a)|(b" would become valid between the anchors' brackets.
    let anchored = Regex::new(&text.value).and_then(|_| Regex::new(&format!("{FRONT}{}{BACK}", text.value)));
    match anchored {
        Ok(regex) if regex.is_match("") => {
            root.problem(
                text,
                "matches a serial number without any character; wanted a pattern that asks for some",
            );
            None
        }
        Ok(regex) => Some(regex),
        Err(error) => {
            root.problem(
                text,
                &format!("not a regular expression: {error}; wanted one such as \"RN[0-9]{{6}}\""),
            );
            None
        }
    }
}
