//! One run with all that its record holds: who and when, instruments, the result, the budget of every quantity.

use super::budget::budgets;
use super::columns::{aligned, wrapped};
use super::{Paint, Sheet, quantities, text, words};
use crate::record::{Instrument, Run};
use std::path::Path;

/// Everything the record in `folder` says of a run but its samples.
pub fn full(run: &Run, folder: &Path, paint: Paint) -> String {
    let mut parts = vec![facts(run), instruments(&run.identity.bench.instruments)];
    parts.extend((!run.quantities.is_empty()).then(|| budgets(&run.quantities)));
    let risks: String =
        run.quantities.iter().filter_map(quantities::risk).map(|risk| wrapped(&risk, "")).collect();
    parts.extend((!risks.is_empty()).then_some(risks));
    parts.push(text(&Sheet::of(run).kept_in(folder), paint));
    parts.join("\n")
}

fn facts(run: &Run) -> String {
    let identity = &run.identity;
    let mut rows: Vec<Vec<String>> = Vec::new();
    let mut fact = |name: &str, value: Option<String>| {
        rows.extend(value.map(|value| vec![name.to_owned(), value]));
    };
    fact("run", Some(identity.run.to_string()));
    fact("board", Some(format!("{} revision {}", identity.board.board, identity.board.revision)));
    fact("serial number", Some(identity.board.serial_number.clone()));
    fact("batch", identity.board.batch.clone());
    fact("work order", identity.board.work_order.clone());
    fact("attempt", Some(identity.attempt.to_string()));
    fact("occasion", words::occasion(&identity.occasion));
    fact("started", Some(format!("{} ({})", identity.started.local, identity.started.utc)));
    fact("ended", run.ended.as_ref().map(|ended| format!("{} ({})", ended.local, ended.utc)));
    fact("duration", run.duration_s.map(|seconds| format!("{seconds:.3} s")));
    fact("station", Some(identity.station.clone()));
    fact("bench", Some(identity.bench.name.clone()));
    fact("operator", identity.operator.clone());
    fact("profile", Some(identity.profile.path.clone()));
    fact("profile sha256", Some(identity.profile.sha256.clone()));
    fact("software", Some(format!("ebbmark {} ({})", identity.software.version, identity.software.build)));
    let trace = run.trace.as_ref();
    fact(
        "trace",
        trace.map(|trace| format!("{} bytes at byte {} of {}", trace.length, trace.offset, trace.file)),
    );
    fact("trace sha256", trace.map(|trace| trace.sha256.clone()));
    aligned(&rows).join("\n") + "\n"
}

fn instruments(instruments: &[Instrument]) -> String {
    let heading = ["instrument", "serial number", "firmware", "port", "calibration due", "plays"];
    let mut rows = vec![heading.map(str::to_owned).to_vec()];
    rows.extend(instruments.iter().map(|instrument| {
        vec![
            format!("{} {}", instrument.maker, instrument.model),
            known(instrument.serial_number.as_ref()),
            known(instrument.firmware.as_ref()),
            instrument.port.clone(),
            known(instrument.calibration_due.as_ref()),
            instrument.roles.join(", "),
        ]
    }));
    aligned(&rows).join("\n") + "\n"
}

/// A dash for what nobody said.
fn known(field: Option<&impl ToString>) -> String {
    field.map_or_else(|| "-".to_owned(), ToString::to_string)
}
