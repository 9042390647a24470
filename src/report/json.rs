//! A run as JSON for other programs. The keys up to `findings` are fixed; further keys may be added after them.

use super::Sheet;
use crate::analysis::Finding;
use crate::record::{Moment, Occasion, Run, RunId, SCHEMA, Simulated};
use crate::trace::OutputState;
use crate::verdict::{Outcome, QuantityLine};
use serde::Serialize;

/// A recorded run as one line of JSON, without a newline.
pub fn run_json(run: &Run) -> String {
    json(&Sheet::of(run))
}

/// Several runs, a line of JSON each.
pub fn runs_json(runs: &[Run]) -> String {
    runs.iter().map(|run| run_json(run) + "\n").collect()
}

/// One run as one line of JSON, without a newline. A key whose value is not known is absent.
pub fn json(sheet: &Sheet<'_>) -> String {
    let identity = sheet.run.map(|run| &run.identity);
    let line = RunLine {
        schema: SCHEMA,
        outcome: sheet.outcome,
        board: sheet.board,
        revision: sheet.revision,
        serial_number: sheet.serial_number,
        quantities: sheet.quantities.iter().map(QuantityLine::from).collect(),
        findings: sheet.findings,
        output: sheet.output,
        run: identity.map(|identity| &identity.run),
        station: identity.map(|identity| identity.station.as_str()),
        attempt: identity.map(|identity| identity.attempt),
        started: identity.map(|identity| &identity.started),
        ended: sheet.run.and_then(|run| run.ended.as_ref()),
        simulated: identity.and_then(|identity| identity.bench.simulated.as_ref()),
        occasion: identity
            .map(|identity| &identity.occasion)
            .filter(|occasion| **occasion != Occasion::Production),
    };
    // Only a map whose keys are no texts can fail here, and there is none.
    serde_json::to_string(&line).unwrap_or_else(|cause| format!("{{\"error\":\"{cause}\"}}"))
}

#[derive(Serialize)]
struct RunLine<'r> {
    schema: u32,
    outcome: Outcome,
    board: &'r str,
    revision: &'r str,
    #[serde(skip_serializing_if = "Option::is_none")]
    serial_number: Option<&'r str>,
    quantities: Vec<QuantityLine>,
    findings: &'r [Finding],
    #[serde(skip_serializing_if = "Option::is_none")]
    output: Option<OutputState>,
    #[serde(skip_serializing_if = "Option::is_none")]
    run: Option<&'r RunId>,
    #[serde(skip_serializing_if = "Option::is_none")]
    station: Option<&'r str>,
    #[serde(skip_serializing_if = "Option::is_none")]
    attempt: Option<u32>,
    #[serde(skip_serializing_if = "Option::is_none")]
    started: Option<&'r Moment>,
    #[serde(skip_serializing_if = "Option::is_none")]
    ended: Option<&'r Moment>,
    #[serde(skip_serializing_if = "Option::is_none")]
    simulated: Option<&'r Simulated>,
    #[serde(skip_serializing_if = "Option::is_none")]
    occasion: Option<&'r Occasion>,
}
