//! Looks at every instrument of a bench without running a board.

use super::connect::{greeted, open};
use crate::clock::Clock;
use crate::instrument::bench_file::BenchFile;
use crate::instrument::error::{InstrumentError, Place};
use crate::instrument::session::{Greeting, Session};
use crate::units::Volts;
use std::sync::Arc;
use std::time::Duration;

/// Questions asked to find the usual time of one; odd, so that the median is one of them.
const QUESTIONS: usize = 21;

/// What was found of one instrument that is ready for a run.
#[derive(Clone, Debug, PartialEq)]
pub struct Report {
    /// Which instrument, at which port.
    pub place: Arc<Place>,
    /// Who answered, whether it echoes, and what its error queue held from before.
    pub greeting: Greeting,
    /// Median time from a short question to its answer, on the wall.
    pub round_trip: Duration,
    /// The longest of them.
    pub slowest: Duration,
    /// The port's settings as the system reports them, for people; `None` where it cannot say.
    pub port_settings: Option<String>,
}

/// Connects each instrument as for a run, and reports on it; the output stays off.
///
/// An entry for each instrument, in the order of the file; one that fails does not hide the others.
pub async fn check(bench: &BenchFile, maximum: Volts, clock: Clock) -> Vec<Result<Report, InstrumentError>> {
    let opened: Vec<_> = bench.instruments().iter().map(|seat| open(seat, maximum, clock)).collect();
    let mut reports = Vec::with_capacity(opened.len());
    for opened in opened {
        reports.push(match greeted(opened).await {
            Ok((instrument, greeting)) => instrument.ask(|session| report(session, greeting)).wait().await,
            Err(error) => Err(error),
        });
    }
    reports
}

fn report(session: &mut Session, greeting: Greeting) -> Result<Report, InstrumentError> {
    let wall = Clock::real();
    let mut times = Vec::with_capacity(QUESTIONS);
    for _ in 0..QUESTIONS {
        let begun = wall.now();
        session.query("*STB?")?;
        times.push(wall.now().saturating_sub(begun));
    }
    times.sort_unstable();
    Ok(Report {
        place: Arc::clone(session.place()),
        greeting,
        round_trip: times.get(QUESTIONS / 2).copied().unwrap_or_default(),
        slowest: times.last().copied().unwrap_or_default(),
        port_settings: session.port_settings(),
    })
}
