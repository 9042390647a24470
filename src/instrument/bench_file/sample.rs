//! The shipped bench file, and what is said about it once something in it is changed. For tests only.

use super::BenchFile;
use crate::instrument::library::find;
use std::path::Path;

pub(super) const FIRST_BENCH: &str = include_str!("../../../instruments/benches/first-bench.toml");

/// Reads `text` as a bench file; definitions are the built-in ones.
pub(super) fn read(text: &str) -> Result<BenchFile, crate::document::Problems> {
    BenchFile::read("b.toml", text, &|name| find(name, Path::new("/nowhere")))
}

/// The first bench with every `(from, to)` replaced once, which must still be good.
pub(super) fn bench(changes: &[(&str, &str)]) -> BenchFile {
    read(&changed(changes)).unwrap_or_else(|problems| panic!("{problems}"))
}

/// The problems, a line each, after every `(from, to)` has been replaced once.
pub(super) fn problems(changes: &[(&str, &str)]) -> String {
    match read(&changed(changes)) {
        Ok(_) => String::new(),
        Err(problems) => problems.lines().collect::<Vec<_>>().join("\n"),
    }
}

fn changed(changes: &[(&str, &str)]) -> String {
    let mut text = FIRST_BENCH.to_owned();
    for (from, to) in changes {
        assert!(text.contains(from), "the bench file holds no {from}");
        text = text.replacen(from, to, 1);
    }
    text
}
