//! How much the readings of the off current scatter by themselves, and what that makes a point of its line worth.

use super::plateau::Course;
use super::settled::Settled;
use crate::statistics::line::Point;

/// What the ammeter does at random on each range, from all plateaus there: one plateau is too short to tell.
pub(super) struct Noise {
    ranges: Vec<RangeNoise>,
    /// Whether every range has readings enough to know it.
    pub(super) is_known: bool,
    pub(super) degrees_of_freedom: f64,
    /// Bend that the ammeter's claim leaves room for, in amperes.
    pub(super) meter_bends: f64,
}

struct RangeNoise {
    scale: f64,
    /// Variance of one reading.
    variance: f64,
    /// Variance of the last digit.
    digit: f64,
    degrees_of_freedom: f64,
}

impl Noise {
    /// From all readings of the line.
    pub(super) fn of(course: &Course<'_>, readings: &[Settled]) -> Self {
        let mut scales: Vec<f64> = readings.iter().map(scale).collect();
        scales.sort_by(f64::total_cmp);
        scales.dedup();
        let claim = |settled: &Settled| course.trace.claims.current_accuracy(settled.range, settled.amps);
        let ranges: Vec<RangeNoise> = scales
            .into_iter()
            .map(|scale_of| {
                let here = || readings.iter().filter(|it| scale(it).total_cmp(&scale_of).is_eq());
                let degrees_of_freedom: f64 = here().map(|it| it.count as f64 - 1.0).sum();
                let squares: f64 = here().map(|it| it.squares).sum();
                let digit = here().find_map(claim).map_or(0.0, |claim| claim.resolution.powi(2) / 12.0);
                RangeNoise {
                    scale: scale_of,
                    variance: squares / degrees_of_freedom,
                    digit,
                    degrees_of_freedom,
                }
            })
            .collect();
        // Readings that all agree to the last digit are known to that digit, and no better.
        let known = |range: &RangeNoise| range.degrees_of_freedom > 0.0 && range.variance + range.digit > 0.0;
        Self {
            is_known: ranges.iter().all(known),
            degrees_of_freedom: ranges.iter().map(|range| range.degrees_of_freedom).sum(),
            meter_bends: readings.iter().filter_map(claim).map(|claim| claim.absolute).fold(0.0, f64::max),
            ranges,
        }
    }

    /// The point of a reading, with the inverse of its variance as weight; how often it was read, where noise is not known.
    pub(super) fn point(&self, settled: &Settled) -> Point {
        let range = self.ranges.iter().find(|range| range.scale.total_cmp(&scale(settled)).is_eq());
        let variance = range.map(|range| range.variance / settled.count as f64 + range.digit);
        let weight = match variance {
            Some(variance) if self.is_known => 1.0 / variance,
            _ => settled.count as f64,
        };
        Point { x: settled.volts.0, y: settled.amps.0, weight }
    }
}

/// Full scale of the range, in amperes; endless where it is not known.
pub(super) fn scale(settled: &Settled) -> f64 {
    settled.range.map_or(f64::INFINITY, |range| range.0)
}
