//! What the cycles of one board at one temperature and load say, rate by rate and at rest.

use super::{AtRest, Cell, Cycle, Delay, Drift, Edge, Place, Plan, Threshold};
use crate::profile::QuantityName;

/// The cycles of one board at one temperature and load, by rate.
pub(super) struct Here<'c> {
    board: &'c str,
    temperature_c: Option<f64>,
    load_ohm: f64,
    rates: Vec<(Option<f64>, Vec<&'c Cycle>)>,
    confidence: f64,
}

impl<'c> Here<'c> {
    pub(super) fn new(plan: &'c Plan, cycles: &[&'c Cycle], place: Place, confidence: f64) -> Self {
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

    pub(super) fn cells(&self) -> Vec<Cell> {
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

    pub(super) fn at_rest(&self) -> Vec<AtRest> {
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
