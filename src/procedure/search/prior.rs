//! What is known of a threshold before a board is tested: the window of its limits, and what earlier boards showed.

use super::grid::Grid;
use crate::units::Volts;

/// What earlier boards of the same kind showed, at their terminals.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Prior {
    /// Their trips.
    pub trip: Option<Spread>,
    /// Their re-enable voltages.
    pub re_enable: Option<Spread>,
}

/// Mean and spread of one threshold over some boards.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Spread {
    /// Mean of the boards.
    pub mean: Volts,
    /// Standard deviation to expect of the next board from the mean of these; above zero.
    pub deviation: Volts,
}

/// Fewer boards than this say little of the next one.
const FEWEST_BOARDS: usize = 5;

impl Spread {
    /// The spread of `values`; `None` from fewer than five, or from values that are no numbers.
    ///
    /// The next of n + 1 normal values lies about the mean of the first n with a variance of s^2 (1 + 1/n).
    pub fn of(values: &[Volts]) -> Option<Self> {
        let count = values.len() as f64;
        if values.len() < FEWEST_BOARDS {
            return None;
        }
        let mean = values.iter().map(|value| value.0).sum::<f64>() / count;
        let squares: f64 = values.iter().map(|value| (value.0 - mean).powi(2)).sum();
        let deviation = (squares / (count - 1.0) * (1.0 + 1.0 / count)).sqrt();
        (mean.is_finite() && deviation.is_finite())
            .then_some(Self { mean: Volts(mean), deviation: Volts(deviation) })
    }
}

/// Share of boards that may lie anywhere in the range, whatever limits and earlier boards say.
const ANYWHERE: f64 = 0.02;
/// Share of boards that may lie anywhere in the window, whatever earlier boards showed.
const UNLIKE_EARLIER: f64 = 0.1;

/// What is believed of one threshold, at the terminals.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(in crate::procedure) struct Belief {
    /// Lowest and highest that the limits allow; `None` where they say nothing.
    pub(in crate::procedure) window: Option<(Volts, Volts)>,
    /// What earlier boards showed.
    pub(in crate::procedure) earlier: Option<Spread>,
}

/// How set-points and terminals go together in one state.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(in crate::procedure) struct Reference {
    /// Volts at the terminals per volt of the set-point.
    pub(in crate::procedure) ratio: f64,
    /// The set-point at which that was seen; `None` where it never was.
    pub(in crate::procedure) seen_at: Option<Volts>,
    /// How far terminals and set-point may differ where it was not seen, drop in the leads aside.
    pub(in crate::procedure) tolerance: Volts,
}

impl Reference {
    fn set_point(&self, terminals: Volts) -> Volts {
        terminals / self.ratio
    }

    /// What the offset of the supply may make at `set`: nothing where the ratio was seen.
    fn uncertain(&self, set: Volts) -> Volts {
        self.seen_at.map_or(self.tolerance, |seen| self.tolerance * (set / seen - 1.0).abs())
    }
}

impl Belief {
    /// The weight of each cell: flat over the window, with a little everywhere, so that a board outside costs probes
    /// and is found all the same; drawn together where earlier boards lay.
    pub(super) fn weights(&self, grid: &Grid, reference: &Reference) -> Vec<f64> {
        let cells = grid.cells();
        let inside: Vec<f64> = match self.window {
            Some((low, high)) => {
                let ends = [low, high].map(|end| reference.set_point(end));
                let (low, high) =
                    (ends[0] - reference.uncertain(ends[0]), ends[1] + reference.uncertain(ends[1]));
                (0..cells).map(|cell| f64::from(u8::from(grid.overlaps(cell, low, high)))).collect()
            }
            None => vec![1.0; cells],
        };
        let flat = mixed(&vec![1.0; cells], &inside, ANYWHERE);
        let Some(earlier) = self.earlier else { return flat };
        let mean = reference.set_point(earlier.mean);
        let deviation = earlier.deviation.max(grid.cell()) + reference.uncertain(mean);
        let normal: Vec<f64> =
            (0..cells).map(|cell| (-((grid.middle(cell) - mean) / deviation).powi(2) / 2.0).exp()).collect();
        mixed(&flat, &normal, UNLIKE_EARLIER)
    }
}

/// `share` of the one and the rest of the other, both normed; all of the one where the other is nowhere.
fn mixed(one: &[f64], other: &[f64], share: f64) -> Vec<f64> {
    let (all_one, all_other) = (one.iter().sum::<f64>(), other.iter().sum::<f64>());
    let share = if all_other > 0.0 { share } else { 1.0 };
    let norm = |value: f64, all: f64| if all > 0.0 { value / all } else { 0.0 };
    one.iter()
        .zip(other)
        .map(|(a, b)| share * norm(*a, all_one) + (1.0 - share) * norm(*b, all_other))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn grid() -> Grid {
        Grid::new(Volts(5.0), Volts(6.0), Volts(0.01), Volts(0.001))
    }

    const EXACT: Reference = Reference { ratio: 1.0, seen_at: Some(Volts(5.5)), tolerance: Volts(0.0) };

    #[test]
    fn nearly_all_weight_is_in_the_window_and_none_is_zero() {
        let belief = Belief { window: Some((Volts(5.4), Volts(5.6))), earlier: None };
        let weights = belief.weights(&grid(), &EXACT);
        assert!((weights.iter().sum::<f64>() - 1.0).abs() < 1e-12);
        assert!(weights.iter().all(|weight| *weight > 0.0));
        let inside: f64 = (0..weights.len())
            .filter(|cell| grid().overlaps(*cell, Volts(5.4), Volts(5.6)))
            .map(|cell| weights[cell])
            .sum();
        assert!((0.98..0.99).contains(&inside), "{inside}");
    }

    #[test]
    fn the_window_moves_with_the_drop_on_the_way_to_the_board() {
        let belief = Belief { window: Some((Volts(5.4), Volts(5.6))), earlier: None };
        let weights = belief.weights(&grid(), &Reference { ratio: 0.98, ..EXACT });
        let likely: Vec<usize> = (0..weights.len()).filter(|cell| weights[*cell] > 0.01).collect();
        // 5.4 V / 0.98 = 5.510 V, 5.6 V / 0.98 = 5.714 V.
        assert_eq!((likely.first(), likely.last()), (Some(&52), Some(&72)));
    }

    #[test]
    fn earlier_boards_draw_the_weight_together_but_not_all_of_it() {
        let earlier = Spread { mean: Volts(5.5), deviation: Volts(0.02) };
        let belief = Belief { window: Some((Volts(5.2), Volts(5.8))), earlier: Some(earlier) };
        let weights = belief.weights(&grid(), &EXACT);
        let near: f64 = (46..=55).map(|cell| weights[cell]).sum();
        assert!(
            near > 0.85 && weights[25] > 1e-3 && weights[5] > 1e-6,
            "{near} {} {}",
            weights[25],
            weights[5]
        );
    }

    /// Five values with mean 3 and s^2 = 2.5: the next lies about 3 with a variance of 2.5 (1 + 1/5) = 3.
    #[test]
    fn the_spread_of_the_next_board_is_wider_than_that_of_the_earlier_ones() {
        let values: Vec<Volts> = [1.0, 2.0, 3.0, 4.0, 5.0].map(Volts).to_vec();
        let spread = Spread::of(&values).expect("five");
        assert!((spread.mean - Volts(3.0)).abs() < Volts(1e-12));
        assert!((spread.deviation.0 - 3.0_f64.sqrt()).abs() < 1e-12);
        assert_eq!(Spread::of(&values[..4]), None);
        assert_eq!(Spread::of(&[Volts(f64::NAN); 6]), None);
    }
}
