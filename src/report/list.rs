//! Many runs, a line each, for `log show`.

use super::columns::aligned;
use super::words;
use crate::profile::QuantityName;
use crate::record::Run;
use crate::units::prefixed;
use std::collections::VecDeque;

/// Which runs to show.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Filter {
    /// Only this serial number.
    pub serial_number: Option<String>,
    /// Only so many, the latest.
    pub last: Option<usize>,
}

impl Filter {
    /// The runs that match, in their order. Holds no more of them than it gives back.
    pub fn apply(&self, runs: impl IntoIterator<Item = Run>) -> Vec<Run> {
        let wanted = |run: &Run| {
            self.serial_number.as_ref().is_none_or(|number| *number == run.identity.board.serial_number)
        };
        let mut kept = VecDeque::new();
        for run in runs.into_iter().filter(wanted) {
            kept.push_back(run);
            if self.last.is_some_and(|last| kept.len() > last) {
                kept.pop_front();
            }
        }
        kept.into()
    }
}

const SHOWN: [QuantityName; 4] =
    [QuantityName::Trip, QuantityName::ReEnable, QuantityName::Hysteresis, QuantityName::OffCurrent];

/// The runs as a table: local time, serial number, outcome, the four quantities everybody asks for, findings.
pub fn list(runs: &[Run]) -> String {
    if runs.is_empty() {
        return "no runs\n".to_owned();
    }
    let heading = [
        "run",
        "time",
        "serial number",
        "outcome",
        "trip",
        "re-enable",
        "hysteresis",
        "off current",
        "findings",
    ];
    let mut rows = vec![heading.map(str::to_owned).to_vec()];
    rows.extend(runs.iter().map(row));
    aligned(&rows).join("\n") + "\n"
}

fn row(run: &Run) -> Vec<String> {
    let value = |name: QuantityName| {
        let found = run.quantities.iter().find(|judged| judged.quantity.name == name);
        found.map_or_else(|| "-".to_owned(), |judged| prefixed(judged.quantity.value, name.unit()))
    };
    let mut remarks: Vec<String> =
        run.findings.iter().map(|finding| words::spoken(&words::code(finding.code))).collect();
    if run.is_simulated() {
        remarks.push("(simulated)".to_owned());
    }
    let identity = &run.identity;
    let name = identity.run.as_str();
    let mut cells = vec![
        // The ending of its name, by which `log show` finds it.
        name.rsplit('-').next().unwrap_or(name).to_owned(),
        identity.started.on_the_wall(),
        identity.board.serial_number.clone(),
        run.outcome.to_string(),
    ];
    cells.extend(SHOWN.map(value));
    cells.push(remarks.join(", "));
    cells
}
