//! Results on standard output.

use super::one_run::Kept;
use super::{Exit, Failure, Format};
use crate::report::{self, Paint, Sheet};
use std::io::{IsTerminal, Write};

/// Writes the result of a kept run, with its budgets if wanted, and returns its exit code.
pub(super) fn print_result(kept: &Kept, format: Format, budget: bool) -> Result<Exit, Failure> {
    print_sheet(&Sheet::of(&kept.run).kept_in(&kept.folder), format, budget)?;
    Ok(match &kept.run.ending {
        Some(ending) => Exit::of_run(kept.run.outcome, ending),
        None => Exit::Invalid,
    })
}

/// Writes a result as `format` says; budgets, if wanted, come before it, so that what to do next stays last.
pub(super) fn print_sheet(sheet: &Sheet<'_>, format: Format, budget: bool) -> Result<(), Failure> {
    print(&match format {
        Format::Text if budget => report::budgets(sheet.quantities) + "\n" + &report::text(sheet, paint()),
        Format::Text => report::text(sheet, paint()),
        Format::Json => report::json(sheet) + "\n",
    })
}

/// Writes to standard output. A reader that went away has what it wanted.
pub(super) fn print(text: &str) -> Result<(), Failure> {
    let mut out = anstream::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(error) if error.kind() != std::io::ErrorKind::BrokenPipe => Err(error.into()),
        _ => Ok(()),
    }
}

/// Colour on a terminal; `anstream` honours `NO_COLOR` besides.
pub(super) fn paint() -> Paint {
    if std::io::stdout().is_terminal() { Paint::Coloured } else { Paint::Plain }
}
