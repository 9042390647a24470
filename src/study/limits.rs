//! Limits from what a study measured: over the boards, or over the cycles of the only one.

use super::estimates::QUANTITIES;
use super::proposal::Wanted;
use super::{AtRest, Cell, Jitter, Limits, Place, Plan, Proposal, Question, Threshold};
use crate::profile::QuantityName;

/// Limits at each temperature and load: over the boards, or over the cycles of the only one.
pub(super) fn limits(
    plan: &Plan,
    measured: &[(Place, AtRest)],
    cells: &[Cell],
    question: Question,
) -> Vec<Limits> {
    let wanted = Wanted { content: question.content, confidence: question.confidence };
    let mut limits = Vec::new();
    for (temperature, degrees) in plan.temperatures.iter().enumerate() {
        for (load, ohms) in plan.loads.iter().enumerate() {
            for quantity in QUANTITIES {
                let here: Vec<&AtRest> = measured
                    .iter()
                    .filter(|(place, _)| (place.temperature, place.load) == (temperature, load))
                    .map(|(_, at_rest)| at_rest)
                    .filter(|at_rest| at_rest.quantity == quantity)
                    .collect();
                let values: Vec<f64> = here.iter().map(|at_rest| at_rest.value_v).collect();
                let instrument = here.iter().filter_map(|at_rest| at_rest.instrument_v).reduce(f64::max);
                let proposal = match &here[..] {
                    [only] => over_cycles(only, cells, instrument, wanted),
                    _ => Proposal::over_boards(&values, instrument, wanted),
                };
                let temperature_c = degrees.map(|degrees| degrees.0);
                limits.push(Limits { temperature_c, load_ohm: ohms.0, quantity, proposal });
            }
        }
    }
    limits
}

/// From the jitter of the only board, at the rate with the narrowest brackets, which show it best; that of the hysteresis
/// is of both thresholds.
fn over_cycles(only: &AtRest, cells: &[Cell], instrument: Option<f64>, wanted: Wanted) -> Option<Proposal> {
    let of = |quantity: QuantityName| {
        cells
            .iter()
            .filter(|cell| {
                cell.quantity == quantity
                    && cell.board == only.board
                    && cell.temperature_c == only.temperature_c
                    && (cell.load_ohm - only.load_ohm).abs() < 1e-9 * only.load_ohm
            })
            .min_by(|a, b| a.threshold.bracket_v.total_cmp(&b.threshold.bracket_v))
            .and_then(|cell| Some((jitter(&cell.threshold)?, cell.threshold.count)))
    };
    let (jitter, count) = match only.quantity {
        QuantityName::Hysteresis => {
            let ((down, n), (up, m)) = (of(QuantityName::Trip)?, of(QuantityName::ReEnable)?);
            (down.hypot(up), n.min(m))
        }
        quantity => of(quantity)?,
    };
    Proposal::over_cycles(only.value_v, jitter, count, instrument, wanted)
}

/// The standard deviation to reckon with: where none was seen, the largest there may be.
fn jitter(threshold: &Threshold) -> Option<f64> {
    match threshold.jitter {
        Jitter::Found { standard_deviation_v, .. } => Some(standard_deviation_v),
        Jitter::NoneSeen { at_most_v } => at_most_v,
    }
}
