//! Finds definitions and bench files: those that come with the program, and those in files.

use super::bench_file::BenchFile;
use super::definition::{Definition, builtin, builtin_names};
use crate::document::Problems;
use std::path::{Path, PathBuf};

/// A file that cannot be read.
#[derive(Debug, thiserror::Error)]
#[error("cannot read {}: {cause}", .path.display())]
pub struct Unreadable {
    /// Its path.
    pub path: PathBuf,
    /// What the system says.
    pub cause: std::io::Error,
}

/// Why a definition could not be had.
#[derive(Debug, thiserror::Error)]
pub enum FindError {
    /// Not the name of a built-in definition.
    #[error(
        "no definition \"{name}\" comes with the program; wanted {} or the path of a file ending in .toml",
        known()
    )]
    Unknown {
        /// The name.
        name: String,
    },
    /// The file cannot be read.
    #[error("{0}")]
    Unreadable(Unreadable),
    /// The file was read and is wrong.
    #[error("the definition has problems:\n{}", .0.lines().collect::<Vec<_>>().join("\n"))]
    Wrong(Problems),
}

/// Why a bench file could not be had.
#[derive(Debug, thiserror::Error)]
pub enum OpenError {
    /// The file cannot be read.
    #[error("{0}")]
    Unreadable(Unreadable),
    /// The file was read and is wrong.
    #[error("{0}")]
    Wrong(Problems),
}

/// The definition called `name`: a built-in one, or when it ends in `.toml` the file at that path, seen from `folder`.
///
/// # Errors
/// See [`FindError`].
pub fn find(name: &str, folder: &Path) -> Result<Definition, FindError> {
    if !name.ends_with(".toml") {
        let text = builtin(name).ok_or_else(|| FindError::Unknown { name: name.to_owned() })?;
        return Definition::read(name, text).map_err(FindError::Wrong);
    }
    let path = folder.join(name);
    let text = text_of(&path).map_err(FindError::Unreadable)?;
    Definition::read(&path.display().to_string(), &text).map_err(FindError::Wrong)
}

/// Reads and checks the bench file at `path`, with the definitions it names.
///
/// # Errors
/// See [`OpenError`].
pub fn open_bench(path: &Path) -> Result<BenchFile, OpenError> {
    let text = text_of(path).map_err(OpenError::Unreadable)?;
    let folder = path.parent().unwrap_or_else(|| Path::new(""));
    BenchFile::read(&path.display().to_string(), &text, &|name| find(name, folder)).map_err(OpenError::Wrong)
}

fn text_of(path: &Path) -> Result<String, Unreadable> {
    std::fs::read_to_string(path).map_err(|cause| Unreadable { path: path.to_owned(), cause })
}

fn known() -> String {
    builtin_names().map(|name| format!("\"{name}\"")).collect::<Vec<_>>().join(", ")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_definition_beside_the_bench_file_is_found_and_its_problems_are_shown() {
        let folder = tempfile::tempdir().expect("a temporary folder");
        let supply = builtin("programmable-supply").expect("built in");
        let bench = include_str!("../../instruments/benches/first-bench.toml")
            .replace("\"programmable-supply\"", "\"my-supply.toml\"");
        let path = folder.path().join("bench.toml");
        std::fs::write(&path, bench).expect("written");
        std::fs::write(folder.path().join("my-supply.toml"), supply.replace("115200", "fast"))
            .expect("written");
        let refused = open_bench(&path).expect_err("\"fast\" is no number").to_string();
        assert!(refused.contains("my-supply.toml:21:8"), "{refused}");
        std::fs::write(folder.path().join("my-supply.toml"), supply.replace("115200", "9600"))
            .expect("written");
        let bench = open_bench(&path).unwrap_or_else(|error| panic!("{error}"));
        assert_eq!(bench.instruments()[0].definition.serial.baud, 9600);
    }

    #[test]
    fn a_bench_file_that_is_not_there_is_named_with_its_path() {
        let error = open_bench(Path::new("/nowhere/bench.toml")).expect_err("not there").to_string();
        assert!(error.starts_with("cannot read /nowhere/bench.toml: "), "{error}");
    }
}
