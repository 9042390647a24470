//! Limits as JSON: one object, keys fixed, a value that is not known absent.

use super::LimitsSheet;
use crate::limits::{Basis, Contribution, Quantity, Risks, Warning, Window};
use crate::profile::{Limit, QuantityName};
use crate::record::SCHEMA;
use serde::Serialize;

/// The whole answer as one line of JSON, without a newline.
pub fn limits_json(sheet: &LimitsSheet<'_>) -> String {
    let line = LimitsLine {
        schema: SCHEMA,
        board: &sheet.profile.board,
        revision: &sheet.profile.revision,
        basis: sheet.question.basis,
        samples: sheet.question.samples,
        seed: sheet.question.seed,
        guard_band_factor: sheet.question.guard_band,
        quantities: sheet.proposal.quantities.iter().map(QuantityLine::from).collect(),
        warnings: &sheet.proposal.warnings,
    };
    // Only a map whose keys are no texts can fail here, and there is none.
    serde_json::to_string(&line).unwrap_or_else(|cause| format!("{{\"error\":\"{cause}\"}}"))
}

#[derive(Serialize)]
struct LimitsLine<'r> {
    schema: u32,
    board: &'r str,
    revision: &'r str,
    basis: Basis,
    samples: usize,
    seed: u64,
    guard_band_factor: f64,
    quantities: Vec<QuantityLine>,
    warnings: &'r [Warning],
}

#[derive(Serialize)]
struct QuantityLine {
    name: QuantityName,
    unit: &'static str,
    nominal: f64,
    worst_case: Window,
    root_sum_square: Window,
    three_sigma: Window,
    monte_carlo: MonteCarloLine,
    contributions: Vec<ContributionLine>,
    data_sheet: Window,
    design: Window,
    environment_share: ShareLine,
    expanded_uncertainty: f64,
    guard_band: f64,
    #[serde(skip_serializing_if = "Option::is_none")]
    test: Option<Window>,
    #[serde(skip_serializing_if = "Option::is_none")]
    profile: Option<Limit>,
    #[serde(skip_serializing_if = "Option::is_none")]
    good_boards_outside_profile: Option<f64>,
    process: ProcessLine,
    #[serde(skip_serializing_if = "Option::is_none")]
    risks: Option<RisksLine>,
}

#[derive(Serialize)]
struct MonteCarloLine {
    mean: f64,
    standard_deviation: f64,
    #[serde(rename = "coverage_0.9973", skip_serializing_if = "Option::is_none")]
    practically_all: Option<Window>,
    #[serde(rename = "coverage_0.95", skip_serializing_if = "Option::is_none")]
    nineteen_of_twenty: Option<Window>,
}

#[derive(Serialize)]
struct ContributionLine {
    cause: &'static str,
    down: f64,
    up: f64,
    variance_share: f64,
    drawn_share: f64,
}

#[derive(Serialize)]
struct ShareLine {
    down: f64,
    up: f64,
}

#[derive(Serialize)]
struct ProcessLine {
    mean: f64,
    standard_deviation: f64,
}

#[derive(Serialize)]
struct RisksLine {
    nonconforming: f64,
    consumer: f64,
    producer: f64,
    consumer_without_guard_band: f64,
    producer_without_guard_band: f64,
}

impl From<&Quantity> for QuantityLine {
    fn from(quantity: &Quantity) -> Self {
        let (study, sets) = (&quantity.study, &quantity.sets);
        Self {
            name: quantity.name,
            unit: quantity.name.unit().ascii(),
            nominal: study.nominal,
            worst_case: study.worst_case,
            root_sum_square: study.root_sum_square,
            three_sigma: study.three_sigma,
            monte_carlo: MonteCarloLine {
                mean: study.mean,
                standard_deviation: study.standard_deviation,
                practically_all: study.practically_all,
                nineteen_of_twenty: study.nineteen_of_twenty,
            },
            contributions: study.contributions.iter().map(ContributionLine::from).collect(),
            data_sheet: sets.data_sheet,
            design: sets.design,
            environment_share: ShareLine { down: sets.share_down, up: sets.share_up },
            expanded_uncertainty: quantity.expanded_uncertainty,
            guard_band: sets.guard_band,
            test: sets.written(),
            profile: quantity.present,
            good_boards_outside_profile: quantity.outside_present,
            process: ProcessLine {
                mean: quantity.process.mean,
                standard_deviation: quantity.process.standard_deviation,
            },
            risks: quantity.risks.as_ref().map(RisksLine::from),
        }
    }
}

impl From<&Risks> for RisksLine {
    fn from(risks: &Risks) -> Self {
        Self {
            nonconforming: risks.guarded.nonconforming,
            consumer: risks.guarded.consumer,
            producer: risks.guarded.producer,
            consumer_without_guard_band: risks.simple.consumer,
            producer_without_guard_band: risks.simple.producer,
        }
    }
}

impl From<&Contribution> for ContributionLine {
    fn from(part: &Contribution) -> Self {
        let &Contribution { cause, down, up, variance_share, drawn_share } = part;
        Self { cause, down, up, variance_share, drawn_share }
    }
}
