//! All that the cycles of a study say, condition by condition.

use super::proposal::Wanted;
use super::tempco::AtTemperature;
use super::{Cycle, Delay, Drift, Edge, Jitter, Place, Plan, Proposal, TemperatureCoefficient, Threshold};
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
const QUANTITIES: [QuantityName; 3] = [QuantityName::Trip, QuantityName::ReEnable, QuantityName::Hysteresis];

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

/// The cycles of one board at one temperature and load, by rate.
struct Here<'c> {
    board: &'c str,
    temperature_c: Option<f64>,
    load_ohm: f64,
    rates: Vec<(Option<f64>, Vec<&'c Cycle>)>,
    confidence: f64,
}

impl<'c> Here<'c> {
    fn new(plan: &'c Plan, cycles: &[&'c Cycle], place: Place, confidence: f64) -> Self {
        let here: Vec<&Cycle> = cycles.iter().copied().filter(|it| it.order.place() == place).collect();
        let temperatures: Vec<f64> = here.iter().filter_map(|it| it.temperature).map(|it| it.0).collect();
        let loads: Vec<f64> = here.iter().map(|cycle| cycle.load.0).collect();
        let at = |rate: usize| here.iter().copied().filter(|it| it.order.rate == rate).collect();
        Self {
            board: &plan.boards[place.board],
            temperature_c: mean(&temperatures),
            load_ohm: mean(&loads).unwrap_or(plan.loads[place.load].0),
            rates: plan.rates.iter().enumerate().map(|(index, rate)| (*rate, at(index))).collect(),
            confidence,
        }
    }

    fn threshold(&self, cycles: &[&Cycle], edge: Edge) -> Option<Threshold> {
        Threshold::of(cycles, edge, self.confidence)
    }

    fn cells(&self) -> Vec<Cell> {
        let mut cells = Vec::new();
        for (rate, cycles) in &self.rates {
            for edge in Edge::ALL {
                cells.extend(self.threshold(cycles, edge).map(|threshold| Cell {
                    board: self.board.to_owned(),
                    temperature_c: self.temperature_c,
                    load_ohm: self.load_ohm,
                    rate_v_per_s: *rate,
                    quantity: edge.quantity(),
                    threshold,
                    drift: Drift::of(cycles, edge, self.confidence),
                }));
            }
        }
        cells
    }

    fn at_rest(&self) -> Vec<AtRest> {
        let [trip, re_enable] = Edge::ALL.map(|edge| self.edge_at_rest(edge));
        let hysteresis = trip.as_ref().zip(re_enable.as_ref()).map(|(trip, re_enable)| {
            let value_v = re_enable.value_v - trip.value_v;
            let claim = self.rates.iter().flat_map(|(_, cycles)| cycles).find_map(|cycle| cycle.claim);
            AtRest {
                quantity: QuantityName::Hysteresis,
                value_v,
                delay_included: trip.delay_included,
                statistical_v: trip.statistical_v.hypot(re_enable.statistical_v),
                // What the instrument errs in common at both thresholds cancels (JCGM 100:2008, 5.2.2).
                instrument_v: claim.map(|claim| claim.standard_uncertainty(value_v)),
                delay: None,
                ..trip.clone()
            }
        });
        trip.into_iter().chain(re_enable).chain(hysteresis).collect()
    }

    fn edge_at_rest(&self, edge: Edge) -> Option<AtRest> {
        let found: Vec<(Option<f64>, &Vec<&Cycle>, Threshold)> = self
            .rates
            .iter()
            .filter_map(|(rate, cycles)| Some((*rate, cycles, self.threshold(cycles, edge)?)))
            .collect();
        let ramps: Vec<(Vec<&Cycle>, &Threshold)> = found
            .iter()
            .filter(|(rate, ..)| rate.is_some())
            .map(|(_, cycles, threshold)| ((*cycles).clone(), threshold))
            .collect();
        let delay = Delay::of(&ramps, edge);
        let slowest = || {
            let speed = |rate: Option<f64>| rate.unwrap_or(0.0);
            found.iter().min_by(|a, b| speed(a.0).total_cmp(&speed(b.0)))
        };
        let (rate, _, threshold) = slowest()?;
        let (value_v, statistical_v) = match (rate, &delay) {
            (Some(_), Some(delay)) => (delay.at_rest_v, delay.statistical_v),
            _ => (threshold.mean_v, threshold.statistical_v),
        };
        Some(AtRest {
            board: self.board.to_owned(),
            temperature_c: self.temperature_c,
            load_ohm: self.load_ohm,
            quantity: edge.quantity(),
            value_v,
            delay_included: rate.is_some() && delay.is_none(),
            statistical_v,
            instrument_v: threshold.instrument_v,
            delay,
        })
    }
}

fn mean(values: &[f64]) -> Option<f64> {
    (!values.is_empty()).then(|| values.iter().sum::<f64>() / values.len() as f64)
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

/// Limits at each temperature and load: over the boards, or over the cycles of the only one.
fn limits(plan: &Plan, measured: &[(Place, AtRest)], cells: &[Cell], question: Question) -> Vec<Limits> {
    let wanted = Wanted { content: question.content, confidence: question.confidence };
    let mut limits = Vec::new();
    for (temperature, degrees) in plan.temperatures.iter().enumerate() {
        for (load, ohms) in plan.loads.iter().enumerate() {
            for quantity in QUANTITIES {
                let here: Vec<&AtRest> = measured
                    .iter()
                    .filter(|(place, _)| (place.temperature, place.load) == (temperature, load))
                    .map(|(_, at_rest)| at_rest)
                    .filter(|at_rest| at_rest.quantity == quantity)
                    .collect();
                let values: Vec<f64> = here.iter().map(|at_rest| at_rest.value_v).collect();
                let instrument = here.iter().filter_map(|at_rest| at_rest.instrument_v).reduce(f64::max);
                let proposal = match &here[..] {
                    [only] => over_cycles(only, cells, instrument, wanted),
                    _ => Proposal::over_boards(&values, instrument, wanted),
                };
                let temperature_c = degrees.map(|degrees| degrees.0);
                limits.push(Limits { temperature_c, load_ohm: ohms.0, quantity, proposal });
            }
        }
    }
    limits
}

/// From the jitter of the only board, at the rate with the narrowest brackets, which show it best; that of the hysteresis
/// is of both thresholds.
fn over_cycles(only: &AtRest, cells: &[Cell], instrument: Option<f64>, wanted: Wanted) -> Option<Proposal> {
    let of = |quantity: QuantityName| {
        cells
            .iter()
            .filter(|cell| {
                cell.quantity == quantity
                    && cell.board == only.board
                    && cell.temperature_c == only.temperature_c
                    && (cell.load_ohm - only.load_ohm).abs() < 1e-9 * only.load_ohm
            })
            .min_by(|a, b| a.threshold.bracket_v.total_cmp(&b.threshold.bracket_v))
            .and_then(|cell| Some((jitter(&cell.threshold)?, cell.threshold.count)))
    };
    let (jitter, count) = match only.quantity {
        QuantityName::Hysteresis => {
            let ((down, n), (up, m)) = (of(QuantityName::Trip)?, of(QuantityName::ReEnable)?);
            (down.hypot(up), n.min(m))
        }
        quantity => of(quantity)?,
    };
    Proposal::over_cycles(only.value_v, jitter, count, instrument, wanted)
}

/// The standard deviation to reckon with: where none was seen, the largest there may be.
fn jitter(threshold: &Threshold) -> Option<f64> {
    match threshold.jitter {
        Jitter::Found { standard_deviation_v, .. } => Some(standard_deviation_v),
        Jitter::NoneSeen { at_most_v } => at_most_v,
    }
}

#[cfg(test)]
pub(super) mod fixture {
    use super::super::{Crossing, Cycle, Order};
    use crate::units::{Ohms, Volts};

    /// Cycles that tripped in brackets about these middles.
    pub(in crate::study) fn cycles(middles: &[f64], width: f64) -> Vec<Cycle> {
        let crossing = |middle: f64| Crossing {
            low: Volts(middle - width / 2.0),
            high: Volts(middle + width / 2.0),
            set: Volts(middle),
            rate: 0.0,
            period: 0.0,
            seen_after: 0.0,
        };
        let cycle = |(number, &middle): (usize, &f64)| Cycle {
            order: Order { board: 0, temperature: 0, load: 0, cycle: number as u32, rate: 0 },
            temperature: None,
            load: Ohms(55.0),
            trip: Some(crossing(middle)),
            re_enable: None,
            claim: None,
            settle: 0.0,
            integration: 0.0,
            duration: 1.0,
        };
        middles.iter().enumerate().map(cycle).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::fixture::cycles;
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
