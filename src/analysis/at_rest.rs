//! A threshold at rest and the delay, from what was found at several rates: a straight line over the rate.

use super::edges::Direction;
use crate::statistics::line::{Line, Point};

/// What was found at one rate.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct AtRate {
    /// Rate at the terminals, V/s, positive in the direction of the change.
    pub(super) rate: f64,
    /// Voltage at the terminals at which the board changed.
    pub(super) volts: f64,
    /// Its standard uncertainty, V.
    pub(super) uncertainty: f64,
}

/// A threshold and its delay.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct AtRest {
    /// The threshold at rest, V.
    pub value: f64,
    /// Its standard uncertainty, V, the instrument's accuracy aside.
    pub uncertainty: f64,
    /// The delay, s.
    pub delay: f64,
    /// Its standard uncertainty, s.
    pub delay_uncertainty: f64,
    /// Covariance of the two, V s.
    pub covariance: f64,
}

impl AtRest {
    /// The line through the rates; `None` with fewer than two different ones.
    pub(super) fn fit(rates: &[AtRate], direction: Direction) -> Option<Self> {
        let point = |at: &AtRate| Point { x: at.rate, y: at.volts, weight: at.uncertainty.powi(-2) };
        let line = Line::fit(rates.iter().map(point))?;
        let towards = match direction {
            Direction::Down => -1.0,
            Direction::Up => 1.0,
        };
        Some(Self {
            value: line.at(0.0),
            uncertainty: line.uncertainty_at(0.0, 1.0),
            delay: towards * line.slope,
            delay_uncertainty: line.slope_uncertainty(1.0),
            covariance: towards * line.covariance_at(0.0, 1.0),
        })
    }

    /// Correlation of threshold and delay, from -1 to 1.
    pub fn correlation(&self) -> f64 {
        self.covariance / (self.uncertainty * self.delay_uncertainty)
    }
}
