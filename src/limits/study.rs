//! One quantity of a tolerance stack by all methods side by side, with what each part contributes.

use super::input::Input;
use super::monte_carlo::Population;
use super::root_sum_square::root_sum_square;
use super::window::Window;
use super::worst_case;

/// Coverage of three standard deviations of a normal distribution, which people mean by "practically all".
pub(super) const PRACTICALLY_ALL: f64 = 0.9973;

/// Coverage for a usual expanded uncertainty.
pub(super) const NINETEEN_OF_TWENTY: f64 = 0.95;

/// What the methods say of one quantity.
#[derive(Clone, Debug, PartialEq)]
pub struct Study {
    /// Value of a board on which every part is as it is called.
    pub nominal: f64,
    /// All parts at their worst ends; exact.
    pub worst_case: Window,
    /// Root sum square of the deviations at full tolerance, first order.
    pub root_sum_square: Window,
    /// Mean and three standard deviations, first order.
    pub three_sigma: Window,
    /// Mean of the boards drawn.
    pub mean: f64,
    /// Standard deviation of the boards drawn.
    pub standard_deviation: f64,
    /// Of the boards drawn, 99.73 %, as many below as above; `None` with too few boards.
    pub practically_all: Option<Window>,
    /// Of the boards drawn, 95 %.
    pub nineteen_of_twenty: Option<Window>,
    /// What each part that varies contributes, the largest share of the variance first.
    pub contributions: Vec<Contribution>,
}

/// What one part does to one quantity.
#[derive(Clone, Debug, PartialEq)]
pub struct Contribution {
    /// The part and what of it.
    pub cause: &'static str,
    /// The part alone at its worst ends, all others nominal: farthest down (zero or less).
    pub down: f64,
    /// Farthest up (zero or more).
    pub up: f64,
    /// Share of the variance to first order.
    pub variance_share: f64,
    /// Squared correlation among the boards drawn.
    pub drawn_share: f64,
}

impl Study {
    /// Puts the methods side by side. `drawn` are boards drawn from the same inputs.
    pub fn new(
        causes: &[&'static str],
        inputs: &[Input],
        model: impl Fn(&[f64]) -> f64,
        drawn: &Population,
    ) -> Self {
        let linear = root_sum_square(inputs, &model);
        let alone = worst_case::alone(inputs, &model);
        let mut contributions: Vec<Contribution> = causes
            .iter()
            .enumerate()
            .filter(|(index, _)| inputs[*index].varies() && alone[*index] != [0.0, 0.0])
            .map(|(index, cause)| Contribution {
                cause,
                down: alone[index][0].min(alone[index][1]),
                up: alone[index][0].max(alone[index][1]),
                variance_share: linear.shares[index],
                drawn_share: drawn.shares[index],
            })
            .collect();
        // Twins such as the two resistors keep their order, whatever the last digits of a derivative are.
        let rank = |part: &Contribution| (part.variance_share * 1e6).round();
        contributions.sort_by(|one, other| rank(other).total_cmp(&rank(one)));
        Self {
            nominal: model(&worst_case::nominals(inputs)),
            worst_case: worst_case::extremes(inputs, &model),
            root_sum_square: linear.full_tolerance,
            three_sigma: linear.three_sigma(),
            mean: drawn.mean,
            standard_deviation: drawn.standard_deviation,
            practically_all: drawn.interval(PRACTICALLY_ALL),
            nineteen_of_twenty: drawn.interval(NINETEEN_OF_TWENTY),
            contributions,
        }
    }
}
