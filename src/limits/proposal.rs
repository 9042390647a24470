//! From the parts of a board to its limits.

use super::monte_carlo::{self, Population};
use super::pairs::{self, Warning};
use super::risks::{Risks, risks};
use super::sets::LimitSets;
use super::stack::{CAUSES, Condition, QUANTITIES, ThresholdStack};
use super::study::Study;
use super::window::Window;
use super::worst_case;
use crate::profile::{Limit, Parts, Profile, QuantityName};
use crate::statistics::risk::Process;
use crate::units::Volts;
use serde::Serialize;
use std::collections::BTreeMap;

/// Which method gives the design limits.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Basis {
    /// All parts at their worst ends: no board of good parts lies outside.
    #[default]
    WorstCase,
    /// Root sum square of the deviations at full tolerance.
    RootSumSquare,
    /// The interval of 99.73 % of the boards drawn.
    MonteCarlo,
}

/// What is asked.
#[derive(Clone, Debug, PartialEq)]
pub struct Question {
    /// Which method gives the design limits.
    pub basis: Basis,
    /// Boards to draw.
    pub samples: usize,
    /// Seed of the draw.
    pub seed: u64,
    /// Expanded uncertainty (k = 2) of a threshold as the bench measures it.
    pub uncertainty: Volts,
    /// Guard band as a multiple of the expanded uncertainty.
    pub guard_band: f64,
    /// Spread of real production, where it is known; what is missing is drawn from the parts.
    pub production: BTreeMap<QuantityName, Production>,
}

/// How a quantity spreads over the boards of a production at the test; each as far as known.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Production {
    /// Mean.
    pub mean: Option<f64>,
    /// Standard deviation.
    pub standard_deviation: Option<f64>,
}

/// What is proposed for a board.
#[derive(Clone, Debug, PartialEq)]
pub struct Proposal {
    /// Trip, re-enable, hysteresis.
    pub quantities: Vec<Quantity>,
    /// What an engineer should know before using the limits.
    pub warnings: Vec<Warning>,
}

/// What is proposed for one quantity.
#[derive(Clone, Debug, PartialEq)]
pub struct Quantity {
    /// Which.
    pub name: QuantityName,
    /// The methods side by side, for boards at work.
    pub study: Study,
    /// Data sheet, design and test limits.
    pub sets: LimitSets,
    /// Expanded uncertainty (k = 2) of its measurement.
    pub expanded_uncertainty: f64,
    /// What the profile limits now.
    pub present: Option<Limit>,
    /// Share of the boards drawn that lie outside the profile's present limits at the test.
    pub outside_present: Option<f64>,
    /// Spread of the true values over the production at the test, as given or as drawn from the parts.
    pub process: Process,
    /// How often the test will be wrong; `None` where no test limits are left.
    pub risks: Option<Risks>,
}

impl Proposal {
    /// Works limits out of `parts`, the parts of the board of `profile`.
    pub fn new(profile: &Profile, parts: &Parts, question: &Question) -> Self {
        let stack = ThresholdStack::new(*parts);
        let drawn_under = |condition| {
            let inputs = stack.inputs(condition);
            monte_carlo::draw(&inputs, |values| stack.thresholds(values), question.samples, question.seed)
        };
        let (at_work, at_test) = (drawn_under(Condition::AtWork), drawn_under(Condition::AtTest));
        let quantities: Vec<Quantity> = (0..QUANTITIES.len())
            .map(|index| of_quantity(index, profile, &stack, question, &at_work[index], &at_test[index]))
            .collect();
        let warnings = pairs::warnings(profile, parts, &quantities);
        Self { quantities, warnings }
    }

    /// The proposal for one quantity.
    pub fn quantity(&self, name: QuantityName) -> Option<&Quantity> {
        self.quantities.iter().find(|quantity| quantity.name == name)
    }
}

fn of_quantity(
    index: usize,
    profile: &Profile,
    stack: &ThresholdStack,
    question: &Question,
    at_work: &Population,
    at_test: &Population,
) -> Quantity {
    let name = QUANTITIES[index];
    let value = |values: &[f64]| stack.thresholds(values)[index];
    let study = Study::new(&CAUSES, &stack.inputs(Condition::AtWork), value, at_work);
    let data_sheet = worst_case::extremes(&stack.inputs(Condition::DataSheet), value);
    let shift =
        worst_case::extremes(&stack.inputs(Condition::FromTestToWork), |values| stack.shift(values)[index]);
    let expanded_uncertainty = uncertainty(name, question.uncertainty);
    let design = design(&study, question.basis);
    let sets = LimitSets::new(data_sheet, design, shift, question.guard_band * expanded_uncertainty);
    let present = profile.limits.get(&name).copied();
    let known = question.production.get(&name).copied().unwrap_or_default();
    let process = Process {
        mean: known.mean.unwrap_or(at_test.mean),
        standard_deviation: known.standard_deviation.unwrap_or(at_test.standard_deviation),
    };
    Quantity {
        name,
        sets,
        expanded_uncertainty,
        present,
        outside_present: present.map(|limit| at_test.share_outside(window_of(limit))),
        process,
        risks: risks(&sets, process, expanded_uncertainty / COVERAGE_FACTOR),
        study,
    }
}

/// Of the expanded uncertainty in the question.
const COVERAGE_FACTOR: f64 = 2.0;

/// Both thresholds are measured in one way; their difference holds both errors, taken as independent. One voltmeter
/// serves both, so this is on the safe side.
fn uncertainty(name: QuantityName, of_threshold: Volts) -> f64 {
    match name {
        QuantityName::Hysteresis => of_threshold.0 * std::f64::consts::SQRT_2,
        _ => of_threshold.0,
    }
}

fn design(study: &Study, basis: Basis) -> Window {
    match basis {
        Basis::WorstCase => study.worst_case,
        Basis::RootSumSquare => study.root_sum_square,
        // With too few boards for the interval nothing is claimed beyond what is certain.
        Basis::MonteCarlo => study.practically_all.unwrap_or(study.worst_case),
    }
}

/// A limit with a missing side put out of reach.
pub(super) fn window_of(limit: Limit) -> Window {
    Window { min: limit.min.unwrap_or(f64::NEG_INFINITY), max: limit.max.unwrap_or(f64::INFINITY) }
}
