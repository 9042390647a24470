//! Limits as CSV for spreadsheets: a line per quantity and kind of limits, in volts.

use super::LimitsSheet;
use crate::limits::{Quantity, Window};
use std::io::Write;

/// Writes a heading and the lines; an end that is not there is an empty field.
///
/// # Errors
/// Whatever `out` refuses.
pub fn limits_csv(sheet: &LimitsSheet<'_>, out: impl Write) -> Result<(), csv::Error> {
    let mut writer = csv::Writer::from_writer(out);
    writer.write_record(["quantity", "limits", "min_v", "max_v"])?;
    for quantity in &sheet.proposal.quantities {
        for (kind, min, max) in kinds(quantity) {
            let end = |value: Option<f64>| value.map(|value| value.to_string()).unwrap_or_default();
            writer.write_record([quantity.name.key(), kind, &end(min), &end(max)])?;
        }
    }
    writer.flush()?;
    Ok(())
}

type Line = (&'static str, Option<f64>, Option<f64>);

fn kinds(quantity: &Quantity) -> Vec<Line> {
    let (study, sets) = (&quantity.study, &quantity.sets);
    let line = |kind, window: Option<Window>| -> Line {
        (kind, window.map(|window| window.min), window.map(|window| window.max))
    };
    vec![
        line("worst_case", Some(study.worst_case)),
        line("root_sum_square", Some(study.root_sum_square)),
        line("three_sigma", Some(study.three_sigma)),
        line("monte_carlo_0.9973", study.practically_all),
        line("monte_carlo_0.95", study.nineteen_of_twenty),
        line("data_sheet", Some(sets.data_sheet)),
        line("design", Some(sets.design)),
        line("test", sets.written()),
        (
            "profile",
            quantity.present.and_then(|limit| limit.min),
            quantity.present.and_then(|limit| limit.max),
        ),
    ]
}
