//! The tolerance stack of a board's thresholds.
//!
//! With the detector's own trip `V`, its hysteresis `h` as a share of the trip, a divider of `R1` above `R2`, the
//! current `I` into the detector's pin, and the current `S` that flows there besides at the moment of release:
//!
//! - trip = V (1 + R1/R2) + I R1
//! - re-enable = V (1 + h) (1 + R1/R2) + (I + S) R1
//! - hysteresis = re-enable - trip
//!
//! Release is not trimmed by itself: its spread is that of trip and hysteresis together. Each rises or falls steadily
//! with each part, so the extremes lie at corners.

use super::input::{Input, Shape};
use crate::profile::{Environment, Parts, QuantityName, Spread};

/// Quantities of the stack, in this order wherever they stand together.
pub(super) const QUANTITIES: [QuantityName; 3] =
    [QuantityName::Trip, QuantityName::ReEnable, QuantityName::Hysteresis];

/// What each input is, in this order.
pub(super) const CAUSES: [&str; 12] = [
    "detector accuracy",
    "detector hysteresis",
    "top resistor tolerance",
    "bottom resistor tolerance",
    "sense current",
    "switching current",
    "detector temperature",
    "detector ageing",
    "top resistor temperature",
    "bottom resistor temperature",
    "top resistor ageing",
    "bottom resistor ageing",
];

/// So many inputs a board is made with; the rest happens to it afterwards.
const MADE_WITH: usize = 6;

/// What acts on the parts of a board.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Condition {
    /// As the data sheet of the detector has it: nothing but its own accuracy and hysteresis.
    DataSheet,
    /// New, at any temperature of the test.
    AtTest,
    /// Of any age, at any temperature at which boards work.
    AtWork,
    /// From its test to its work: the temperature changes by as much as it can, and it ages.
    FromTestToWork,
}

/// The parts of a board and how they make its thresholds.
#[derive(Clone, Copy, Debug)]
pub struct ThresholdStack {
    parts: Parts,
}

impl ThresholdStack {
    /// The stack of `parts`.
    pub fn new(parts: Parts) -> Self {
        Self { parts }
    }

    /// What varies under `condition`, in the order of the causes.
    ///
    /// A temperature coefficient is unknown within its claim, either sign, and the board stands at the temperature
    /// farthest from the data sheet's: what a limit must cover that is to hold over the whole range.
    pub fn inputs(&self, condition: Condition) -> Vec<Input> {
        self.made_with(condition).into_iter().chain(self.drifts(condition)).collect()
    }

    /// The board as it leaves production, at the temperature of the data sheets.
    fn made_with(&self, condition: Condition) -> [Input; MADE_WITH] {
        let Parts { detector, divider, .. } = self.parts;
        let of_board = divider.filter(|_| condition != Condition::DataSheet);
        let tolerance = of_board.map_or(0.0, |divider| divider.tolerance);
        let sense = match divider.and_then(|divider| divider.sense_current) {
            Some(current) if of_board.is_some() => spread(current.map(|current| current.0)),
            Some(current) => Input::fixed(current.centre().0),
            None => Input::fixed(0.0),
        };
        let switching = of_board.and_then(|divider| divider.switching_current);
        [
            Input::within(0.0, detector.accuracy),
            spread(detector.hysteresis),
            Input::within(0.0, tolerance),
            Input::within(0.0, tolerance),
            sense,
            switching.map_or(Input::fixed(0.0), |most| Input { low: 0.0, ..Input::within(0.0, most.0) }),
        ]
    }

    /// What happens to it afterwards.
    fn drifts(&self, condition: Condition) -> [Input; CAUSES.len() - MADE_WITH] {
        let Parts { detector, divider, environment } = self.parts;
        let (kelvins, ages) = reach(condition, &environment);
        let ageing = |share: f64| Input::within(0.0, if ages { share } else { 0.0 });
        let (resistor_drift, resistor_ageing) =
            divider.map_or((0.0, 0.0), |divider| (divider.tempco.0 * kelvins, divider.ageing));
        [
            Input::within(0.0, detector.tempco.0 * kelvins),
            ageing(detector.ageing),
            Input::within(0.0, resistor_drift),
            Input::within(0.0, resistor_drift),
            ageing(resistor_ageing),
            ageing(resistor_ageing),
        ]
    }

    /// Trip, re-enable and hysteresis in volts for one value of each input.
    pub fn thresholds(&self, values: &[f64]) -> [f64; 3] {
        let at = |index: usize| values.get(index).copied().unwrap_or_default();
        let detector = self.parts.detector.trip.0 * (1.0 + at(0)) * (1.0 + at(6)) * (1.0 + at(7));
        let (top, ratio) = self.parts.divider.map_or((0.0, 1.0), |divider| {
            let top = divider.top.0 * (1.0 + at(2)) * (1.0 + at(8)) * (1.0 + at(10));
            let bottom = divider.bottom.0 * (1.0 + at(3)) * (1.0 + at(9)) * (1.0 + at(11));
            (top, 1.0 + top / bottom)
        });
        let trip = detector * ratio + at(4) * top;
        let hysteresis = detector * at(1) * ratio + at(5) * top;
        [trip, trip + hysteresis, hysteresis]
    }

    /// How much the thresholds of one board move, from the values it was made with to all `values`.
    pub(super) fn shift(&self, values: &[f64]) -> [f64; 3] {
        let (moved, made) =
            (self.thresholds(values), self.thresholds(&values[..MADE_WITH.min(values.len())]));
        std::array::from_fn(|quantity| moved[quantity] - made[quantity])
    }
}

/// Kelvins away from where the coefficients count from, and whether the board ages.
fn reach(condition: Condition, environment: &Environment) -> (f64, bool) {
    match condition {
        Condition::DataSheet => (0.0, false),
        Condition::AtTest => (environment.test.farthest_from(environment.reference), false),
        Condition::AtWork => (environment.temperature.farthest_from(environment.reference), true),
        Condition::FromTestToWork => (environment.from_test_to_work(), true),
    }
}

fn spread(spread: Spread<f64>) -> Input {
    Input {
        nominal: spread.centre(),
        low: spread.min,
        high: spread.max,
        shape: spread.typical.map_or(Shape::Rectangular, |mode| Shape::Triangular { mode }),
    }
}
