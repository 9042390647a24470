//! A hand-written TOML file, read in full: every problem is found in one pass and shown at its place.
//!
//! A [`Document`] hands out [`Table`]s; each getter either returns a value with the place it came from or notes a
//! problem and returns `None`. When all has been read, [`Document::read`] gives the checked value or [`Problems`].
//! A table that goes out of use with keys nobody asked for notes them as unknown, with the nearest known key.

mod at;
mod problems;
mod table;

pub use at::At;
pub use problems::{Problem, Problems};
pub use table::Table;

use std::cell::RefCell;
use std::ops::Range;
use toml::de::DeTable;

/// Where in the text something stands, in bytes.
pub type Span = Range<usize>;

/// The text of one file and what was found wrong in it so far.
pub struct Document<'t> {
    name: &'t str,
    text: &'t str,
    problems: RefCell<Vec<Problem>>,
}

impl<'t> Document<'t> {
    /// Begins to read `text`, which came from the file called `name`.
    pub fn new(name: &'t str, text: &'t str) -> Self {
        Self { name, text, problems: RefCell::new(Vec::new()) }
    }

    /// Reads the whole file: `read` takes what it needs from the root table and returns the value it stands for.
    ///
    /// # Errors
    /// All problems of the file: broken syntax, or whatever `read` and its tables noted.
    pub fn read<T>(self, read: impl FnOnce(&mut Table<'_, 't>) -> Option<T>) -> Result<T, Problems> {
        let (root, errors) = DeTable::parse_recoverable(self.text);
        if errors.is_empty() {
            let mut table = Table::new(&self, String::new(), 0..0, root.get_ref());
            let value = read(&mut table);
            drop(table);
            if let Some(value) = value
                && self.problems.borrow().is_empty()
            {
                return Ok(value);
            }
        } else {
            for error in errors {
                let span = error.span().unwrap_or(0..0);
                self.note(Problem::new(span, error.message().to_owned()));
            }
        }
        let mut list = self.problems.into_inner();
        list.sort_by_key(|problem| (problem.span.start, problem.span.end));
        Err(Problems::new(self.name, self.text, list))
    }

    fn note(&self, problem: Problem) {
        self.problems.borrow_mut().push(problem);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::units::Volts;

    fn read(text: &str) -> Result<(f64, f64), Problems> {
        Document::new("test.toml", text).read(|root| {
            let mut supply = root.table("supply")?;
            let start = supply.quantity::<Volts>("start");
            let floor = supply.quantity::<Volts>("floor");
            let (start, floor) = (start?, floor?);
            if floor.value >= start.value {
                supply.problem(&floor, &format!("not below {start}"));
            }
            Some((start.value.0, floor.value.0))
        })
    }

    #[test]
    fn a_good_file_gives_its_values() {
        assert_eq!(read("[supply]\nstart = \"7.6 V\"\nfloor = \"5.2 V\"\n").ok(), Some((7.6, 5.2)));
    }

    #[test]
    fn every_problem_is_reported_with_its_place() {
        let problems = read("[supply]\nstart = \"7.6 A\"\nflor = \"5.2 V\"\n").expect_err("two mistakes");
        let shown: Vec<String> = problems.lines().collect();
        assert_eq!(
            shown,
            [
                "test.toml:1:1: [supply] has no key \"floor\"; wanted a voltage such as \"6.00 V\"",
                "test.toml:2:9: supply.start: read \"7.6 A\", which is a current, wanted a voltage such as \"6.00 V\"",
                "test.toml:3:1: unknown key \"flor\" in [supply]; did you mean \"floor\"?",
            ]
        );
    }

    #[test]
    fn a_number_without_unit_is_refused() {
        let problems = read("[supply]\nstart = 7.6\nfloor = \"5.2 V\"\n").expect_err("no unit");
        assert_eq!(
            problems.lines().next().as_deref(),
            Some("test.toml:2:9: supply.start: read a float, wanted a voltage such as \"6.00 V\" in quotes")
        );
    }

    #[test]
    fn broken_syntax_and_crossed_values_are_shown_with_their_line() {
        assert!(read("[supply\n").expect_err("syntax").to_string().contains("test.toml:1:8"));
        let text = read("[supply]\nstart = \"5 V\"\nfloor = \"6 V\"\n").expect_err("crossed").to_string();
        assert!(text.contains("supply.floor = \"6 V\": not below supply.start = \"5 V\""), "{text}");
        assert!(text.contains("3 | floor = \"6 V\""), "{text}");
    }
}
