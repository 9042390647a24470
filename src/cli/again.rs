//! A board that has passed already is tested again only on purpose.

use super::one_run::Order;
use super::station::Station;
use super::{Exit, Failure, ask, due};
use crate::record::{Occasion, Run, now};
use std::io::IsTerminal;
use std::time::Duration;

/// What becomes of a board that has passed already.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Again {
    /// Whoever sits at the terminal is asked; without one it is refused.
    Ask,
    /// It is tested, as the command line wants.
    Wanted,
    /// It is tested, and nothing is made of it: a demonstration shows the same boards every time.
    Shown,
}

/// Why the board of `order` is tested: for the first time, or once more though it passed, where the command line or whoever sits at
/// the terminal wants it so. Anything else ends here, with nothing switched on.
pub(super) fn occasion(order: &Order<'_>, station: &Station<'_>) -> Result<Occasion, Failure> {
    if order.again == Again::Shown {
        return Ok(Occasion::Production);
    }
    let passed = station.log.folder().passed(&order.board, order.simulated.is_some())?;
    let Some(passed) = passed else { return Ok(Occasion::Production) };
    let told = told(&passed);
    if order.again == Again::Wanted {
        anstream::eprintln!("note: {told}; it is tested again, as --again asks for");
    } else if std::io::stdin().is_terminal() {
        anstream::eprintln!("{told}");
        match ask::line(&station.runtime, "is it to be tested again? (y for yes, Enter for no): ")? {
            None => return Err(stopped()),
            Some(answer) if ["y", "yes"].contains(&answer.trim().to_lowercase().as_str()) => {}
            Some(_) => return Err(anyhow::anyhow!("the board was not tested again").into()),
        }
    } else {
        return Err(anyhow::anyhow!(
            "{told}. Is it the right board? One that has passed is tested again only on purpose: with --again"
        )
        .into());
    }
    Ok(Occasion::Again(passed.identity.run))
}

fn stopped() -> Failure {
    Failure { exit: Exit::Aborted, error: anyhow::anyhow!("stopped before anything was switched on") }
}

/// Which board passed when, and in which run.
fn told(passed: &Run) -> String {
    let identity = &passed.identity;
    let moment = passed.ended.as_ref().unwrap_or(&identity.started);
    // A clock that was set back tells no age.
    let age = Duration::try_from(now().utc.duration_since(moment.utc)).ok();
    let ago = age.map_or_else(String::new, |age| format!(" {} ago,", due::spoken(age)));
    format!(
        "board {} {} passed{ago} at {} (run {})",
        identity.board.board,
        identity.board.serial_number,
        moment.on_the_wall(),
        identity.run
    )
}
