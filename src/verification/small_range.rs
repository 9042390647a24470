//! The ammeter on its small ranges, while next to nothing flows.

use super::fuse;
use super::mean::Mean;
use crate::trace::{Accuracy, Sample, Trace};
use crate::units::{Amps, Volts};

/// Means at one set-point on one small range.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct OnSmallRange {
    /// Full scale of the range.
    pub(super) range: Amps,
    /// The set-point.
    pub(super) set: Volts,
    /// Voltage at the terminals.
    pub(super) at: Mean,
    /// The ammeter.
    pub(super) reading: Mean,
    /// What its maker claims there.
    pub(super) claim: Option<Accuracy>,
    /// What the voltmeter draws of that, by its stated input resistance, A.
    pub(super) passing: f64,
}

/// Share by which a voltmeter may draw more or less than stated: 1 % of its input resistance is common practice.
pub(super) const INPUT_TOLERANCE: f64 = 0.01;

/// Runs of samples at one set-point on one range.
pub(super) fn groups(trace: &Trace) -> Vec<&[Sample]> {
    let same = |a: &Sample, b: &Sample| a.range == b.range && (a.set - b.set).abs().0 < 1e-6;
    trace.samples.chunk_by(same).collect()
}

/// The last `readings` of every group on a range below `large_range`, or what is wrong with the ammeter there.
/// `overload_hint` says what to look for when it overloads.
pub(super) fn on_small_ranges(
    trace: &Trace,
    large_range: Amps,
    readings: usize,
    overload_hint: &str,
) -> Vec<Result<OnSmallRange, String>> {
    let mut found = Vec::new();
    for group in groups(trace) {
        let Some(range) = group[0].range.filter(|range| *range < large_range) else { continue };
        let taken = &group[group.len().saturating_sub(readings)..];
        found.push(means(trace, range, taken, overload_hint));
    }
    found
}

fn means(trace: &Trace, range: Amps, taken: &[Sample], overload_hint: &str) -> Result<OnSmallRange, String> {
    let amps: Option<Vec<f64>> =
        taken.iter().map(|sample| sample.current.amps().map(|amps| amps.0)).collect();
    let volts: Vec<f64> = taken.iter().map(|sample| sample.terminals().0).collect();
    let (Some(reading), Some(at)) = (amps.and_then(|amps| Mean::of(&amps)), Mean::of(&volts)) else {
        return Err(format!("the ammeter overloads on its {range} range: {overload_hint}"));
    };
    let claim = trace.claims.current_accuracy(Some(range), Amps(reading.value));
    if let Some(told) = fuse::suspicion(&reading, claim, range.0) {
        return Err(format!("ammeter on its {range} range at {}: {told}", Volts(at.value)));
    }
    let passing = trace.claims.sense_resistance.map_or(0.0, |input| at.value / input.0);
    Ok(OnSmallRange { range, set: taken[0].set, at, reading, claim, passing })
}

impl OnSmallRange {
    /// What flows besides what the voltmeter draws, A.
    pub(super) fn current(&self) -> f64 {
        self.reading.value - self.passing
    }

    /// The voltage did not come to the terminals: what was read there was not read at that voltage. `or_else` is what
    /// may be the reason besides an open path.
    pub(super) fn not_arrived(&self, tolerance: Volts, or_else: &str) -> Option<String> {
        let (set, at) = (self.set, Volts(self.at.value));
        let arrived = (at - set).abs() <= tolerance;
        (!arrived).then(|| {
            format!(
                "set to {set}, but {at} stand at the terminals: no path through the ammeter (its fuse, a lead), or {or_else}"
            )
        })
    }
}
