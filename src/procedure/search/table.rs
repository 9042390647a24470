//! What it still costs to narrow two windows together, as far as nothing but their sizes is known.
//!
//! `on(f, r)`: the board is on, its trip lies in one of `f` cells, its re-enable voltage in one of `r`, all alike likely.
//! A probe `k` cells above the bottom of the trip's window leaves the board on (the trip lies in the `k` cells below) or
//! trips it (in the rest), or the probe goes straight through below the window. `off(f, r)` is the mirror image:
//!
//! ```text
//! on(f, r)  = min over 0 < k < f of  down + k/f on(k, r) + (1 - k/f) off(f - k, r),  or  down + off(f, r)
//! off(f, r) = min over 0 < k < r of  up + k/r on(f, k) + (1 - k/r) off(f, r - k),    or  up + on(f, r)
//! on(1, 1) = off(1, 1) = 0
//! ```
//!
//! The best `k` hardly moves when its window grows by a cell, so only its neighbours are tried: that costs less than a
//! thousandth, and the table is ready a hundred times sooner. Beyond the table a window costs the same for each
//! doubling, as the last doubling inside it did.

/// What one probe costs in each direction, in seconds or in any other unit.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(in crate::procedure) struct Costs {
    /// One set-point on the way down.
    pub(in crate::procedure) down: f64,
    /// One set-point on the way up.
    pub(in crate::procedure) up: f64,
}

/// Expected costs by window sizes.
#[derive(Clone, Debug, PartialEq)]
pub(in crate::procedure) struct Table {
    pub(super) costs: Costs,
    largest: usize,
    /// Row of the trip's size, column of the re-enable's.
    on: Vec<f64>,
    off: Vec<f64>,
}

/// Size of the tables that runs use: ready in a fraction of a millisecond, and windows of 500 cells cost a thousandth
/// more than with a table of 500 cells.
pub(super) const LARGEST: usize = 64;

/// How far the best place of a probe may move back and on when its window grows by a cell.
const MOVES: (usize, usize) = (2, 4);

impl Table {
    /// The table for windows of up to `largest` cells, at least 2.
    pub(super) fn new(costs: Costs, largest: usize) -> Self {
        let largest = largest.max(2);
        let width = largest + 1;
        let mut table = Self { costs, largest, on: vec![0.0; width * width], off: vec![0.0; width * width] };
        // Best places in the windows one cell smaller.
        let mut best_down = vec![1; largest];
        for f in 1..=largest {
            let mut best_up = 1;
            for (r, best_down) in (1..=largest).zip(&mut best_down) {
                if (f, r) == (1, 1) {
                    continue;
                }
                let (place, split_down) = cheapest(*best_down, f, |k| table.on_after(k, f, r));
                *best_down = place;
                let (place, split_up) = cheapest(best_up, r, |k| table.off_after(k, f, r));
                best_up = place;
                table.on[f * width + r] = split_down.min(costs.down + split_up);
                table.off[f * width + r] = split_up.min(costs.up + split_down);
            }
        }
        table
    }

    fn on_after(&self, k: usize, f: usize, r: usize) -> f64 {
        let (below, width) = (k as f64 / f as f64, self.largest + 1);
        self.costs.down + below * self.on[k * width + r] + (1.0 - below) * self.off[(f - k) * width + r]
    }

    fn off_after(&self, k: usize, f: usize, r: usize) -> f64 {
        let (below, width) = (k as f64 / r as f64, self.largest + 1);
        self.costs.up + below * self.on[f * width + k] + (1.0 - below) * self.off[f * width + r - k]
    }

    /// Expected cost from here with the board on. Sizes need not be whole: a window whose cells are not alike counts
    /// as one of fewer cells that are.
    pub(super) fn on(&self, f: f64, r: f64) -> f64 {
        self.at(&self.on, f, r)
    }

    /// Expected cost from here with the board off.
    pub(super) fn off(&self, f: f64, r: f64) -> f64 {
        self.at(&self.off, f, r)
    }

    fn at(&self, values: &[f64], f: f64, r: f64) -> f64 {
        let (largest, width) = (self.largest, self.largest + 1);
        let corner = largest * width + largest;
        let half = largest / 2;
        let doublings = |size: f64| (size / largest as f64).log2().max(0.0);
        let beyond = doublings(f) * (values[corner] - values[half * width + largest])
            + doublings(r) * (values[corner] - values[largest * width + half]);
        let cell = |size: f64| {
            let size = size.clamp(1.0, largest as f64);
            let whole = (size as usize).min(largest - 1);
            (whole, size - whole as f64)
        };
        let ((i, x), (j, y)) = (cell(f), cell(r));
        let row = |i: usize| values[i * width + j] * (1.0 - y) + values[i * width + j + 1] * y;
        beyond + row(i) * (1.0 - x) + row(i + 1) * x
    }
}

/// The cheapest place of a probe in a window of `size` cells, looked for from the best place in a window one smaller.
fn cheapest(from: usize, size: usize, cost: impl Fn(usize) -> f64) -> (usize, f64) {
    let mut best = (from, f64::INFINITY);
    let nearest = from.saturating_sub(MOVES.0).max(1);
    for k in nearest..=(from + MOVES.1).min(size.saturating_sub(1)) {
        let cost = cost(k);
        if cost < best.1 {
            best = (k, cost);
        }
    }
    best
}

#[cfg(test)]
mod tests {
    use super::*;

    const UNIT: Costs = Costs { down: 1.0, up: 1.0 };

    /// All places tried, none left out.
    fn exhaustive(costs: Costs, largest: usize) -> Table {
        let mut table = Table::new(costs, 2);
        let width = largest + 1;
        table.largest = largest;
        (table.on, table.off) = (vec![0.0; width * width], vec![0.0; width * width]);
        for f in 1..=largest {
            for r in 1..=largest {
                if (f, r) != (1, 1) {
                    let down = (1..f).map(|k| table.on_after(k, f, r)).fold(f64::INFINITY, f64::min);
                    let up = (1..r).map(|k| table.off_after(k, f, r)).fold(f64::INFINITY, f64::min);
                    table.on[f * width + r] = down.min(costs.down + up);
                    table.off[f * width + r] = up.min(costs.up + down);
                }
            }
        }
        table
    }

    /// By hand. Two cells and one: a probe between the two decides. Two and two: the probe between the trip's cells
    /// decides the trip; off, the next decides the re-enable; on, the board must first be brought off: 1 + (1 + 2) / 2.
    #[test]
    fn small_windows_cost_what_a_pencil_says() {
        let table = Table::new(UNIT, 4);
        let near = |found: f64, wanted: f64| assert!((found - wanted).abs() < 1e-12, "{found}, not {wanted}");
        near(table.on(1.0, 1.0), 0.0);
        near(table.on(2.0, 1.0), 1.0);
        near(table.on(1.0, 2.0), 2.0);
        near(table.on(2.0, 2.0), 2.5);
        // Three trip cells, re-enable known, on: a probe on the first cell's border leaves two cells and the board on
        // with two in three: 1 + 2/3 on(2, 1) + 1/3 off(1, 1).
        near(table.on(3.0, 1.0), 1.0 + 2.0 / 3.0);
    }

    #[test]
    fn the_best_place_moves_little_enough_that_its_neighbours_suffice() {
        for costs in [UNIT, Costs { down: 0.045, up: 0.16 }, Costs { down: 1.0, up: 0.2 }] {
            let (quick, slow) = (Table::new(costs, 60), exhaustive(costs, 60));
            let worst = quick.on.iter().zip(&slow.on).chain(quick.off.iter().zip(&slow.off));
            let worst = worst.map(|(quick, slow)| (quick - slow).abs() / slow.max(1e-9)).fold(0.0, f64::max);
            assert!(worst < 1e-3, "{costs:?}: {worst}");
        }
    }

    /// Against the bound of information theory: a probe with two outcomes gives at most one bit (C. E. Shannon, A
    /// mathematical theory of communication, 1948, section 6), and two windows of n cells hold 2 log2 n.
    #[test]
    fn no_window_is_narrowed_with_less_than_a_bit_a_probe() {
        let table = Table::new(UNIT, 100);
        for cells in [2.0, 5.0, 10.0, 31.0, 64.0, 100.0_f64] {
            let (cost, bits) = (table.on(cells, cells), 2.0 * cells.log2());
            assert!(cost >= bits && cost < bits + 1.2, "{cells}: {cost} probes for {bits} bits");
        }
    }
}
