//! Good definitions, and what is said about one once something in it is changed. For tests only.

use super::{Definition, builtin};

/// The built-in definition called `name`, read.
pub(in crate::instrument) fn good(name: &str) -> Definition {
    Definition::read(name, builtin(name).expect("built in")).unwrap_or_else(|problems| panic!("{problems}"))
}

/// The problems, a line each, after every `(from, to)` has been replaced in the built-in definition called `name`.
pub(super) fn problems(name: &str, changes: &[(&str, &str)]) -> String {
    let mut text = builtin(name).expect("built in").to_owned();
    for (from, to) in changes {
        assert!(text.contains(from), "the definition holds no {from}");
        text = text.replacen(from, to, 1);
    }
    match Definition::read("d.toml", &text) {
        Ok(_) => String::new(),
        Err(problems) => problems.lines().collect::<Vec<_>>().join("\n"),
    }
}
