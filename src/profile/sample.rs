//! A good profile, and what is said about it once something in it is changed. For tests only.

use super::Profile;

pub(super) const RIVER_NODE: &str = include_str!("../../profiles/river-node.toml");

/// The problems, a line each, after every `(from, to)` has been replaced in the river node's profile. What stands both
/// in its own tables and in those of its parts is replaced in its own.
pub(super) fn problems(changes: &[(&str, &str)]) -> String {
    let parts = RIVER_NODE.find("[detector]").unwrap_or(RIVER_NODE.len());
    let (own, parts) = RIVER_NODE.split_at(parts);
    let (mut own, mut parts) = (own.to_owned(), parts.to_owned());
    for (from, to) in changes {
        let place = if own.contains(from) { &mut own } else { &mut parts };
        assert!(place.contains(from), "the profile holds no {from}");
        *place = place.replace(from, to);
    }
    let text = own + &parts;
    match Profile::read("p.toml", &text) {
        Ok(_) => String::new(),
        Err(problems) => problems.lines().collect::<Vec<_>>().join("\n"),
    }
}
