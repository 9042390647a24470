//! What is to be measured: boards, temperatures, loads, rates, and how often.

use crate::units::{Celsius, Ohms};
use serde::{Deserialize, Serialize};

/// A study as it was ordered. No list is empty.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Plan {
    /// Serial numbers.
    pub boards: Vec<String>,
    /// Temperatures of the board, degC; `None` for the room as it is.
    #[serde(rename = "temperatures_c")]
    pub temperatures: Vec<Option<Celsius>>,
    /// Loads behind the switch, ohm.
    #[serde(rename = "loads_ohm")]
    pub loads: Vec<Ohms>,
    /// Rates of the ramp, V/s; `None` for the pace of the profile, which waits out the board's delays.
    #[serde(rename = "rates_v_per_s")]
    pub rates: Vec<Option<f64>>,
    /// Cycles of each board at each temperature, load and rate.
    pub cycles: u32,
}

/// One cycle to be measured, as positions in the lists of the plan.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord, Serialize, Deserialize)]
pub struct Order {
    /// Which board.
    pub board: usize,
    /// Which temperature.
    pub temperature: usize,
    /// Which load.
    pub load: usize,
    /// Which cycle at this rate, counted from 0.
    pub cycle: u32,
    /// Which rate.
    pub rate: usize,
}

/// What somebody must bring about by hand before a cycle.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Place {
    /// Which board is in the fixture.
    pub board: usize,
    /// Which temperature it has.
    pub temperature: usize,
    /// Which load is behind its switch.
    pub load: usize,
}

impl Order {
    /// What must be in place for it.
    pub fn place(&self) -> Place {
        Place { board: self.board, temperature: self.temperature, load: self.load }
    }
}

impl Plan {
    /// All cycles in the order in which they are measured. Boards change least often, then temperatures, then loads, so
    /// that there is little to do by hand; the rates take turns, so that a drift does not look like a delay.
    pub fn orders(&self) -> impl Iterator<Item = Order> + '_ {
        self.places().flat_map(move |Place { board, temperature, load }| {
            (0..self.cycles).flat_map(move |cycle| {
                (0..self.rates.len()).map(move |rate| Order { board, temperature, load, cycle, rate })
            })
        })
    }

    /// Every arrangement by hand, in the order in which they come.
    pub fn places(&self) -> impl Iterator<Item = Place> + '_ {
        (0..self.boards.len()).flat_map(move |board| {
            (0..self.temperatures.len()).flat_map(move |temperature| {
                (0..self.loads.len()).map(move |load| Place { board, temperature, load })
            })
        })
    }

    /// Number of cycles in all.
    pub fn total(&self) -> usize {
        self.places().count() * self.rates.len() * self.cycles as usize
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn boards_change_least_often_and_rates_take_turns() {
        let plan = Plan {
            boards: vec!["a".to_owned(), "b".to_owned()],
            temperatures: vec![Some(Celsius(-20.0)), Some(Celsius(60.0))],
            loads: vec![Ohms(55.0)],
            rates: vec![Some(0.05), Some(0.5)],
            cycles: 2,
        };
        let orders: Vec<_> = plan.orders().map(|o| (o.board, o.temperature, o.cycle, o.rate)).collect();
        assert_eq!(orders[..5], [(0, 0, 0, 0), (0, 0, 0, 1), (0, 0, 1, 0), (0, 0, 1, 1), (0, 1, 0, 0)]);
        assert_eq!((orders.len(), plan.total()), (16, 16));
        let changes = orders.windows(2).filter(|pair| (pair[0].0, pair[0].1) != (pair[1].0, pair[1].1));
        assert_eq!(changes.count(), 3, "four places, three changes by hand");
    }
}
