//! All that the cycles of a study say, condition by condition.

use super::here::Here;
use super::limits::limits;
use super::tempco::AtTemperature;
use super::{Cycle, Delay, Drift, Edge, Place, Plan, Proposal, TemperatureCoefficient, Threshold};
use crate::profile::QuantityName;
use serde::Serialize;

/// How sure the answers are to be.
#[derive(Clone, Copy, Debug, PartialEq, Serialize)]
pub struct Question {
    /// Part of the population that the proposed limits are to hold, between 0 and 1.
    pub content: f64,
    /// Confidence of that, and of the intervals for jitter and drift, between 0 and 1.
    pub confidence: f64,
}

/// What a study found. Temperatures in degC, resistances in ohm, rates in V/s, everything else as its name says.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Estimates {
    /// How sure the answers are.
    pub question: Question,
    /// Cycles measured.
    pub cycles: usize,
    /// Cycles ordered.
    pub ordered: usize,
    /// Each threshold of each board under each condition.
    pub cells: Vec<Cell>,
    /// Each board at each temperature and load: thresholds at rest, hysteresis, delays.
    pub at_rest: Vec<AtRest>,
    /// How they go with temperature, where there are several.
    pub temperature: Vec<Line>,
    /// Limits that follow, at each temperature and load.
    pub limits: Vec<Limits>,
}

/// One threshold of one board under one condition.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Cell {
    /// Serial number.
    pub board: String,
    /// Temperature of the board as measured, on average.
    pub temperature_c: Option<f64>,
    /// Load as measured, on average.
    pub load_ohm: f64,
    /// Rate as ordered; absent for the pace of the profile.
    pub rate_v_per_s: Option<f64>,
    /// Trip or re-enable.
    pub quantity: QuantityName,
    /// What it is. At a rate, the board's delay is in it.
    pub threshold: Threshold,
    /// Whether it wanders; absent for fewer than three cycles.
    pub drift: Option<Drift>,
}

/// What one board is at one temperature and load.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct AtRest {
    /// Serial number.
    pub board: String,
    /// Temperature as measured.
    pub temperature_c: Option<f64>,
    /// Load as measured.
    pub load_ohm: f64,
    /// Trip, re-enable or hysteresis.
    pub quantity: QuantityName,
    /// Its value: at the pace of the profile, else from several rates, else at the only rate and not corrected for delay.
    pub value_v: f64,
    /// Whether the delay is in the value: there was one rate only.
    pub delay_included: bool,
    /// Standard uncertainty without the instrument's, V.
    pub statistical_v: f64,
    /// Standard uncertainty of the instrument, V; absent where nothing is claimed.
    pub instrument_v: Option<f64>,
    /// From the slope over the rate, where there were several.
    pub delay: Option<Delay>,
}

/// How one threshold of one board goes with temperature.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Line {
    /// Serial number.
    pub board: String,
    /// Load as ordered.
    pub load_ohm: f64,
    /// Trip, re-enable or hysteresis.
    pub quantity: QuantityName,
    /// The slope.
    pub coefficient: TemperatureCoefficient,
}

/// Limits proposed at one temperature and load.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Limits {
    /// Temperature as ordered.
    pub temperature_c: Option<f64>,
    /// Load as ordered.
    pub load_ohm: f64,
    /// Trip, re-enable or hysteresis.
    pub quantity: QuantityName,
    /// The limits; absent where there is too little to tell.
    pub proposal: Option<Proposal>,
}

/// The quantities a study is about.
pub(super) const QUANTITIES: [QuantityName; 3] =
    [QuantityName::Trip, QuantityName::ReEnable, QuantityName::Hysteresis];

impl Edge {
    /// The threshold of this direction.
    pub fn quantity(self) -> QuantityName {
        match self {
            Self::Trip => QuantityName::Trip,
            Self::ReEnable => QuantityName::ReEnable,
        }
    }
}

impl Estimates {
    /// Of the cycles kept so far, in any order. The same cycles give the same estimates.
    pub fn of(plan: &Plan, kept: &[Cycle], question: Question) -> Self {
        let mut cycles: Vec<&Cycle> = kept.iter().collect();
        cycles.sort_by_key(|cycle| cycle.order);
        let mut estimates = Self {
            question,
            cycles: cycles.len(),
            ordered: plan.total(),
            cells: Vec::new(),
            at_rest: Vec::new(),
            temperature: Vec::new(),
            limits: Vec::new(),
        };
        let mut measured: Vec<(Place, AtRest)> = Vec::new();
        for place in plan.places() {
            let here = Here::new(plan, &cycles, place, question.confidence);
            estimates.cells.extend(here.cells());
            measured.extend(here.at_rest().into_iter().map(|at_rest| (place, at_rest)));
        }
        estimates.temperature = lines(plan, &measured);
        estimates.limits = limits(plan, &measured, &estimates.cells, question);
        estimates.at_rest = measured.into_iter().map(|(_, at_rest)| at_rest).collect();
        estimates
    }
}

/// A line over temperature for each board, load and quantity.
fn lines(plan: &Plan, measured: &[(Place, AtRest)]) -> Vec<Line> {
    let mut lines = Vec::new();
    for (board, name) in plan.boards.iter().enumerate() {
        for (load, ohms) in plan.loads.iter().enumerate() {
            for quantity in QUANTITIES {
                let points: Vec<AtTemperature> = measured
                    .iter()
                    .filter(|(place, it)| {
                        (place.board, place.load) == (board, load) && it.quantity == quantity
                    })
                    .filter_map(|(_, it)| Some((it.temperature_c?, it.value_v, it.statistical_v)))
                    .collect();
                lines.extend(TemperatureCoefficient::of(&points).map(|coefficient| Line {
                    board: name.clone(),
                    load_ohm: ohms.0,
                    quantity,
                    coefficient,
                }));
            }
        }
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::super::fixture::cycles;
    use super::*;
    use crate::trace::Accuracy;
    use crate::units::{Celsius, Ohms};

    const QUESTION: Question = Question { content: 0.99, confidence: 0.95 };

    fn plan(boards: usize, temperatures: &[f64]) -> Plan {
        Plan {
            boards: (0..boards).map(|number| format!("B{number}")).collect(),
            temperatures: temperatures.iter().map(|degrees| Some(Celsius(*degrees))).collect(),
            loads: vec![Ohms(55.0)],
            rates: vec![None],
            cycles: 4,
        }
    }

    /// Three boards at two temperatures, 10 mV apart from board to board, 6 mV lower in the heat.
    fn kept(plan: &Plan) -> Vec<Cycle> {
        let claim = Accuracy { relative: 0.0, absolute: 3.0_f64.sqrt() * 1e-3, resolution: 0.0 };
        plan.places()
            .flat_map(|place| {
                let middle = 6.0 + 0.01 * place.board as f64 - 0.006 * place.temperature as f64;
                let degrees = plan.temperatures[place.temperature];
                cycles(&[middle; 4], 2e-3).into_iter().map(move |mut cycle| {
                    cycle.order.board = place.board;
                    cycle.order.temperature = place.temperature;
                    cycle.re_enable = cycle.trip.clone().map(|mut crossing| {
                        (crossing.low.0, crossing.high.0) = (crossing.low.0 + 0.4, crossing.high.0 + 0.4);
                        crossing
                    });
                    Cycle { temperature: degrees, claim: Some(claim), ..cycle }
                })
            })
            .collect()
    }

    /// The standard deviation of 6.00, 6.01 and 6.02 V is 10 mV; the factor for three boards, 99 % and 95 %, is that of
    /// statistics::tolerance, which is held against published tables there.
    #[test]
    fn boards_make_limits_and_temperatures_make_a_coefficient() {
        let plan = plan(3, &[20.0, 80.0]);
        let mut cycles = kept(&plan);
        let estimates = Estimates::of(&plan, &cycles, QUESTION);
        assert_eq!((estimates.cycles, estimates.ordered, estimates.cells.len()), (24, 24, 12));
        let trip = estimates.limits[0].proposal.expect("three boards");
        assert!((trip.standard_deviation_v - 0.01).abs() < 1e-9, "{trip:?}");
        assert!((trip.expanded_uncertainty_v - 2e-3).abs() < 1e-9, "{trip:?}");
        assert!((trip.max_v - 6.01 - trip.factor * 0.01 - 2e-3).abs() < 1e-9, "{trip:?}");
        // -6 mV in 60 K at 5.9995 V.
        let line = &estimates.temperature[0].coefficient;
        assert!((line.relative_per_k + 1e-4 / 5.9995).abs() < 1e-9, "{line:?}");
        let hysteresis = estimates.at_rest.iter().find(|it| it.quantity == QuantityName::Hysteresis);
        assert!((hysteresis.expect("both thresholds").value_v - 0.4).abs() < 1e-9);

        cycles.reverse();
        assert_eq!(
            Estimates::of(&plan, &cycles, QUESTION),
            estimates,
            "the order of the cycles tells nothing"
        );
    }

    #[test]
    fn nothing_measured_says_nothing() {
        let plan = plan(2, &[25.0]);
        let estimates = Estimates::of(&plan, &[], QUESTION);
        assert!(estimates.cells.is_empty() && estimates.at_rest.is_empty());
        assert!(estimates.limits.iter().all(|limits| limits.proposal.is_none()));
    }
}
