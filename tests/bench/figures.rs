//! What the benchmarks share: quantiles, and the last line that says whether a bar holds.

use std::process::ExitCode;

/// The value below which `share` of `values` lie, by the nearest rank; zero of none.
pub(crate) fn quantile(values: &[f64], share: f64) -> f64 {
    let mut sorted = values.to_vec();
    sorted.sort_by(f64::total_cmp);
    let last = sorted.len().saturating_sub(1);
    sorted.get((share * last as f64).round() as usize).copied().unwrap_or(0.0)
}

/// Says how a figure stands to its bar. A missed bar is a failed process, so that a script notices.
pub(crate) fn conclude(figure: &str, bar: &str, holds: bool) -> ExitCode {
    println!("\n{figure}; wanted {bar}: {}", if holds { "holds" } else { "MISSED" });
    if holds { ExitCode::SUCCESS } else { ExitCode::FAILURE }
}
