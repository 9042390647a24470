//! Lines to send: plain commands, questions, and commands with a place for one number.

use crate::document::{At, Table};
use crate::instrument::scpi::write_number;

/// Text of a command with exactly one `{}`, where the number goes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Template(String);

impl Template {
    const PLACE: &'static str = "{}";

    /// `text` as a template; `None` unless it holds exactly one `{}`.
    pub fn new(text: &str) -> Option<Self> {
        (text.matches(Self::PLACE).count() == 1).then(|| Self(text.to_owned()))
    }

    /// The command with `value` in its place, in SI units.
    pub fn with(&self, value: f64) -> String {
        self.0.replace(Self::PLACE, &write_number(value))
    }
}

/// A required command that is not answered.
pub(super) fn command(table: &mut Table<'_, '_>, key: &str) -> Option<String> {
    let text = table.text_for(key, "a command")?;
    statement(&text, table)
}

/// Commands that are not answered, in order; none when the key is left out.
pub(super) fn commands(table: &mut Table<'_, '_>, key: &str) -> Option<Vec<String>> {
    if !table.has(key) {
        table.optional_texts(key);
        return Some(Vec::new());
    }
    let texts = table.optional_texts(key)?;
    // All are looked at before any is missed, so that every problem is noted.
    let read: Vec<_> = texts.value.iter().map(|text| statement(text, table)).collect();
    read.into_iter().collect()
}

/// A required question.
pub(super) fn question(table: &mut Table<'_, '_>, key: &str) -> Option<String> {
    let text = table.text_for(key, "a question such as \"VOLT?\"")?;
    if !is_line(&text, table) {
        return None;
    }
    if !text.value.contains('?') {
        table.problem(&text, "not a question; wanted one with \"?\", such as \"VOLT?\"");
        return None;
    }
    Some(text.value)
}

/// A required command with a place for a number.
pub(super) fn template(table: &mut Table<'_, '_>, key: &str) -> Option<Template> {
    let text = table.text_for(key, "a command such as \"VOLT {}\"")?;
    let command = statement(&text, table)?;
    let template = Template::new(&command);
    if template.is_none() {
        table.problem(&text, "wanted a command with one \"{}\" where the number goes, such as \"VOLT {}\"");
    }
    template
}

fn statement(text: &At<String>, table: &Table<'_, '_>) -> Option<String> {
    if !is_line(text, table) {
        return None;
    }
    if text.value.contains('?') {
        table.problem(text, "a question, whose reply nobody would read; wanted a command without \"?\"");
        return None;
    }
    Some(text.value.clone())
}

/// One program message unit: printable ASCII, and no `;`, so that every line has at most one reply.
fn is_line(text: &At<String>, table: &Table<'_, '_>) -> bool {
    let printable = text.value.chars().all(|c| matches!(c, ' '..='~'));
    if text.value.trim().is_empty() || !printable || text.value.contains(';') {
        table.problem(text, "wanted one command in printable ASCII, without \";\" and without line end");
        return false;
    }
    true
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_number_stands_in_its_place_without_rounding_dust() {
        let set = Template::new("VOLT {}").expect("one place");
        assert_eq!(set.with(6.0), "VOLT 6");
        assert_eq!(set.with(0.1 + 0.2), "VOLT 0.3");
        assert_eq!(set.with(1e-4), "VOLT 0.0001");
        assert_eq!(set.with(-0.0), "VOLT 0");
        assert_eq!(set.with(30.0), "VOLT 30");
    }

    #[test]
    fn a_command_without_a_place_or_with_two_is_no_template() {
        assert_eq!(Template::new("VOLT 6"), None);
        assert_eq!(Template::new("APPL {},{}"), None);
    }
}
