//! Many runs as CSV, with the unit in the name of every column and a point as the decimal sign.

use super::words;
use crate::profile::QuantityName;
use crate::record::Run;
use crate::units::Unit;
use std::io::Write;

/// Writes a heading and a line per run. What is not known is an empty field, never a zero.
///
/// # Errors
/// Whatever `out` refuses.
pub fn runs_csv<'r>(runs: impl IntoIterator<Item = &'r Run>, out: impl Write) -> Result<(), csv::Error> {
    let mut writer = csv::Writer::from_writer(out);
    writer.write_record(heading())?;
    for run in runs {
        writer.write_record(fields(run))?;
    }
    writer.flush()?;
    Ok(())
}

fn heading() -> Vec<String> {
    let identity = [
        "run",
        "started_utc",
        "started_local",
        "duration_s",
        "station",
        "operator",
        "board",
        "revision",
        "serial_number",
        "batch",
        "attempt",
        "simulated",
        "outcome",
        "findings",
    ];
    let quantities = QuantityName::ALL.into_iter().flat_map(|name| {
        let (key, unit) = (name.key(), suffix(name.unit()));
        [format!("{key}_{unit}"), format!("{key}_expanded_uncertainty_{unit}"), format!("{key}_decision")]
    });
    identity.map(str::to_owned).into_iter().chain(quantities).collect()
}

fn fields(run: &Run) -> Vec<String> {
    let identity = &run.identity;
    let board = &identity.board;
    let findings: Vec<String> = run.findings.iter().map(|finding| words::code(finding.code)).collect();
    let mut fields = vec![
        identity.run.to_string(),
        identity.started.utc.to_string(),
        identity.started.local.clone(),
        run.duration_s.map(|seconds| seconds.to_string()).unwrap_or_default(),
        identity.station.clone(),
        identity.operator.clone().unwrap_or_default(),
        board.board.clone(),
        board.revision.clone(),
        board.serial_number.clone(),
        board.batch.clone().unwrap_or_default(),
        identity.attempt.to_string(),
        u8::from(run.is_simulated()).to_string(),
        run.outcome.to_string(),
        findings.join(" "),
    ];
    for name in QuantityName::ALL {
        let found = run.quantities.iter().find(|judged| judged.quantity.name == name);
        let decision = found.and_then(|judged| judged.decision).map(words::decision);
        fields.push(found.map(|judged| judged.quantity.value.to_string()).unwrap_or_default());
        fields.push(
            found
                .map(|judged| (judged.coverage_factor * judged.quantity.standard_uncertainty).to_string())
                .unwrap_or_default(),
        );
        fields.push(decision.unwrap_or_default());
    }
    fields
}

/// The unit as the end of a column's name; small letters, so that seconds and siemens need different words.
fn suffix(unit: Unit) -> String {
    match unit {
        Unit::Siemens => "siemens".to_owned(),
        other => other.ascii().to_lowercase(),
    }
}
