//! Files named on the command line.

use super::Failure;
use crate::instrument::bench_file::BenchFile;
use crate::instrument::library;
use crate::procedure::Misfit;
use crate::profile::Profile;
use anyhow::Context;
use std::path::Path;

/// The profile the demonstration and the simulated bench use when none is named.
pub(super) const RIVER_NODE: (&str, &str) =
    ("profiles/river-node.toml", include_str!("../../profiles/river-node.toml"));

/// Reads a text file; the message names it.
pub(super) fn text(path: &Path) -> Result<String, Failure> {
    Ok(std::fs::read_to_string(path).with_context(|| format!("cannot read {}", path.display()))?)
}

/// Reads and checks a profile.
pub(super) fn profile(path: &Path) -> Result<Profile, Failure> {
    Ok(Profile::read(&path.display().to_string(), &text(path)?)?)
}

/// The profile that comes with the program.
pub(super) fn river_node() -> Result<Profile, Failure> {
    Ok(Profile::read(RIVER_NODE.0, RIVER_NODE.1)?)
}

/// Reads and checks a bench file.
pub(super) fn bench(path: &Path) -> Result<BenchFile, Failure> {
    Ok(library::open_bench(path)?)
}

/// Makes sure that profile and bench fit each other, before anything is opened.
pub(super) fn fit(profile: &Profile, bench: &BenchFile) -> Result<(), Failure> {
    refuse(profile, bench, &bench.misfits(profile))
}

/// Refuses a board for what its profile asks for and `bench` cannot do.
pub(super) fn refuse(profile: &Profile, bench: &BenchFile, misfits: &[Misfit]) -> Result<(), Failure> {
    let misfits: Vec<String> = misfits.iter().map(|misfit| format!("\n  {misfit}")).collect();
    if misfits.is_empty() {
        return Ok(());
    }
    Err(anyhow::anyhow!(
        "board {} cannot be tested on bench {}:{}",
        profile.board,
        bench.name,
        misfits.concat()
    )
    .into())
}
