//! A good profile, and what is said about it once something in it is changed. For tests only.

use super::Profile;

pub(super) const RIVER_NODE: &str = include_str!("../../profiles/river-node.toml");

/// The problems, a line each, after every `(from, to)` has been replaced in the river node's profile.
pub(super) fn problems(changes: &[(&str, &str)]) -> String {
    let mut text = RIVER_NODE.to_owned();
    for (from, to) in changes {
        assert!(text.contains(from), "the profile holds no {from}");
        text = text.replace(from, to);
    }
    match Profile::read("p.toml", &text) {
        Ok(_) => String::new(),
        Err(problems) => problems.lines().collect::<Vec<_>>().join("\n"),
    }
}
