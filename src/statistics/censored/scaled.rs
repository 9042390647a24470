//! Brackets about zero and of a size near one, so that neither microvolts on ten volts nor picoamps lose digits.

use super::likelihood::{Place, likelihood};
use super::{Bracket, Estimate};

/// One over the standard deviation, in scaled units, below which there is no bound for the standard deviation.
pub(super) const NOTHING: f64 = 1e-7;

/// How brackets are moved and stretched.
#[derive(Clone, Copy, Debug)]
pub(super) struct Scale {
    origin: f64,
    unit: f64,
}

impl Scale {
    /// About the middle of all finite ends, in units of half of what they span.
    pub(super) fn of(brackets: &[Bracket]) -> Self {
        let ends =
            brackets.iter().flat_map(|bracket| [bracket.low, bracket.high]).filter(|end| end.is_finite());
        let (least, most) = ends
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(least, most), end| (least.min(end), most.max(end)));
        let half = 0.5 * (most - least);
        Self { origin: least + half, unit: if half > 0.0 { half } else { 1.0 } }
    }

    pub(super) fn apply(&self, brackets: &[Bracket]) -> Vec<Bracket> {
        let move_end = |end: f64| (end - self.origin) / self.unit;
        brackets.iter().map(|b| Bracket { low: move_end(b.low), high: move_end(b.high) }).collect()
    }

    /// A standard deviation in scaled units.
    pub(super) fn shrink(&self, standard_deviation: f64) -> f64 {
        standard_deviation / self.unit
    }

    /// A scaled standard deviation in the unit of the brackets.
    pub(super) fn stretch(&self, standard_deviation: f64) -> f64 {
        standard_deviation * self.unit
    }

    /// Mean and standard deviation of the middles, of the finite end where a bracket is open. Where all middles are the
    /// same the brackets are wide.
    pub(super) fn start(&self, scaled: &[Bracket]) -> Place {
        let middle = |bracket: &Bracket| match (bracket.low.is_finite(), bracket.high.is_finite()) {
            (true, true) => 0.5 * (bracket.low + bracket.high),
            (true, false) => bracket.low,
            _ => bracket.high,
        };
        let count = scaled.len() as f64;
        let mean = scaled.iter().map(middle).sum::<f64>() / count;
        let variance = scaled.iter().map(|bracket| (middle(bracket) - mean).powi(2)).sum::<f64>() / count;
        // No bracket may start so far out that its probability is zero.
        let over = 1.0 / variance.sqrt().max(0.1);
        Place { over, mean: mean * over }
    }

    /// The top of the hill as an estimate; `None` where the curvature there is not a hill's.
    pub(super) fn estimate(&self, scaled: &[Bracket], top: Place) -> Option<Estimate> {
        let curve = likelihood(scaled, top);
        let determinant = curve.curve_oo * curve.curve_mm - curve.curve_om * curve.curve_om;
        // The inverse of the information, then carried over to mean and standard deviation.
        let (oo, mm, om) =
            (-curve.curve_mm / determinant, -curve.curve_oo / determinant, curve.curve_om / determinant);
        let standard_deviation = 1.0 / top.over;
        let mean = top.mean / top.over;
        let sd_by_o = -standard_deviation * standard_deviation;
        let (mean_by_o, mean_by_m) = (-mean * standard_deviation, standard_deviation);
        let sd_variance = sd_by_o * sd_by_o * oo;
        let mean_variance =
            mean_by_o * mean_by_o * oo + 2.0 * mean_by_o * mean_by_m * om + mean_by_m * mean_by_m * mm;
        let covariance = sd_by_o * (mean_by_o * oo + mean_by_m * om);
        if !(sd_variance > 0.0 && mean_variance > 0.0) {
            return None;
        }
        Some(Estimate {
            mean: self.origin + self.unit * mean,
            standard_deviation: self.stretch(standard_deviation),
            mean_uncertainty: self.unit * mean_variance.sqrt(),
            standard_deviation_uncertainty: self.stretch(sd_variance.sqrt()),
            correlation: covariance / (sd_variance * mean_variance).sqrt(),
        })
    }
}
