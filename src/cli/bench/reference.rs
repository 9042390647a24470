//! A reference board through a normal run, and what that says of the bench.

use super::place::{Found, Place};
use crate::cli::again::Again;
use crate::cli::one_run::Order;
use crate::cli::station::Station;
use crate::cli::test::Keeping;
use crate::cli::{Exit, Failure, due, files};
use crate::profile::Profile;
use crate::record::{BenchEntry, BenchFound, Log, now};
use crate::trace::OutputState;
use crate::verification::{Reference, compare};
use std::path::Path;

/// Reads the file of a reference board.
pub(super) fn read(path: &Path) -> Result<Reference, Failure> {
    Ok(Reference::read(&path.display().to_string(), &files::text(path)?)?)
}

/// Tests the board, compares it, and keeps both.
pub(super) fn measure(
    reference: &Reference,
    profile: &Profile,
    place: &Place,
    found: &Found,
) -> Result<(BenchEntry, Exit), Failure> {
    let keeping = Keeping {
        logs: place.logs.clone(),
        station: Some(found.station.clone()),
        operator: place.operator.clone(),
        batch: None,
        work_order: None,
    };
    let board = keeping.board(profile, &reference.serial_number)?;
    let station = Station::open(&found.file, found.clock, &place.logs, &found.station)?;
    let order = Order {
        profile,
        profile_path: place.profile.as_ref().map(|path| path.display().to_string()).unwrap_or_default(),
        simulated: found.simulated.clone(),
        board,
        operator: place.operator.clone(),
        fixture: None,
        again: Again::Shown,
        is_reference: true,
    };
    let run = order.carry_out(station)?.run;
    let result = compare(reference, run.outcome, &run.quantities);
    let problems = result.problems.clone();
    let is_good = problems.is_empty();
    let bench = run.identity.bench.clone();
    let what = BenchFound::Reference { profile: due::named(profile), run: run.identity.run.clone(), result };
    let mut entry = BenchEntry::new(&found.station, now(), bench, what, problems);
    entry.operator.clone_from(&place.operator);

    let may_be_on = run.ending.as_ref().is_none_or(|ending| ending.output == OutputState::MayBeOn);
    let kept = Log::open(&place.logs, &found.station, &now()).and_then(|opened| opened.log.keep(&entry));
    match kept {
        Err(error) if may_be_on => Err(Failure::output_may_be_on(error)),
        Err(error) => Err(error.into()),
        Ok(()) if may_be_on => Ok((entry, Exit::OutputMayBeOn)),
        Ok(()) if is_good => Ok((entry, Exit::Pass)),
        Ok(()) => Ok((entry, Exit::Invalid)),
    }
}
