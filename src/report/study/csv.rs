//! The thresholds of a study as CSV for spreadsheets: a line for each board, condition and threshold.

use super::StudySheet;
use crate::study::{Cell, Jitter};
use std::io::Write;

/// Columns, each with its unit.
const HEADING: [&str; 17] = [
    "board",
    "temperature_degc",
    "load_ohm",
    "rate_v_per_s",
    "quantity",
    "cycles",
    "missing",
    "mean_v",
    "statistical_v",
    "instrument_v",
    "jitter_v",
    "jitter_low_v",
    "jitter_high_v",
    "first_to_last_v",
    "first_to_last_uncertainty_v",
    "drifts",
    "bracket_v",
];

/// Writes a heading and the lines; what is not known is an empty field, never a zero. Where no jitter was seen its field
/// is empty, and `jitter_high_v` is the bound.
///
/// # Errors
/// Whatever `out` refuses.
pub fn study_csv(sheet: &StudySheet<'_>, out: impl Write) -> Result<(), csv::Error> {
    let mut writer = csv::Writer::from_writer(out);
    writer.write_record(HEADING)?;
    for cell in &sheet.estimates.cells {
        writer.write_record(line(cell))?;
    }
    writer.flush()?;
    Ok(())
}

fn line(cell: &Cell) -> [String; HEADING.len()] {
    let number = |value: Option<f64>| value.map(|value| value.to_string()).unwrap_or_default();
    let threshold = &cell.threshold;
    let (jitter, low, high) = match threshold.jitter {
        Jitter::Found { standard_deviation_v, low_v, high_v } => (Some(standard_deviation_v), low_v, high_v),
        Jitter::NoneSeen { at_most_v } => (None, None, at_most_v),
    };
    let drift = cell.drift;
    [
        cell.board.clone(),
        number(cell.temperature_c),
        number(Some(cell.load_ohm)),
        number(cell.rate_v_per_s),
        cell.quantity.key().to_owned(),
        threshold.count.to_string(),
        threshold.missing.to_string(),
        number(Some(threshold.mean_v)),
        number(Some(threshold.statistical_v)),
        number(threshold.instrument_v),
        number(jitter),
        number(low),
        number(high),
        number(drift.map(|drift| drift.first_to_last_v)),
        number(drift.map(|drift| drift.expanded_uncertainty_v)),
        drift.map_or(String::new(), |drift| u8::from(drift.significant).to_string()),
        number(Some(threshold.bracket_v)),
    ]
}
