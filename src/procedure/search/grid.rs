//! The set-points of a search, and the cells between them.
//!
//! Set-points run from the floor to the start, a cell apart. Cell 0 is everything below the floor, cell `i` what lies
//! between the set-points `i - 1` and `i`, the last cell everything above the start.

use crate::units::Volts;

/// Set-points a cell apart.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(in crate::procedure) struct Grid {
    floor: Volts,
    start: Volts,
    cell: Volts,
    /// Index of the start.
    last: usize,
}

/// Shares of a step that are rounding, not voltage.
const ROUNDING: f64 = 1e-6;

impl Grid {
    /// Cells of at most `resolution`, a whole number of the supply's steps.
    pub(in crate::procedure) fn new(floor: Volts, start: Volts, resolution: Volts, set_step: Volts) -> Self {
        let steps = (resolution / set_step + ROUNDING).floor().max(1.0);
        let cell = if steps.is_finite() { set_step * steps } else { resolution };
        let last = ((start - floor) / cell - ROUNDING).ceil().max(1.0) as usize;
        Self { floor, start, cell, last }
    }

    /// Width of a cell.
    pub(in crate::procedure) fn cell(&self) -> Volts {
        self.cell
    }

    /// How many cells there are, with those below the floor and above the start.
    pub(super) fn cells(&self) -> usize {
        self.last + 2
    }

    /// Index of the start.
    pub(super) fn last(&self) -> usize {
        self.last
    }

    /// The voltage of a set-point.
    pub(in crate::procedure) fn volts(&self, set_point: usize) -> Volts {
        if set_point >= self.last { self.start } else { self.floor + self.cell * set_point as f64 }
    }

    /// The middle of a cell.
    pub(super) fn middle(&self, cell: usize) -> Volts {
        self.floor + self.cell * (cell as f64 - 0.5)
    }

    /// True when some of the cell lies between `low` and `high`.
    pub(super) fn overlaps(&self, cell: usize, low: Volts, high: Volts) -> bool {
        (self.middle(cell) - (low + high) / 2.0).abs() <= (high - low + self.cell) / 2.0
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn set_points_are_ones_the_supply_has_and_end_at_the_start() {
        let grid = Grid::new(Volts(5.2), Volts(5.21), Volts(0.0025), Volts(0.001));
        assert!((grid.cell() - Volts(0.002)).abs() < Volts(1e-12));
        assert_eq!((grid.last(), grid.cells()), (5, 7));
        assert!((grid.volts(1) - Volts(5.202)).abs() < Volts(1e-12));
        assert_eq!(grid.volts(5), Volts(5.21));
        let odd = Grid::new(Volts(5.2), Volts(5.205), Volts(0.002), Volts(0.001));
        assert_eq!((odd.last(), odd.volts(2), odd.volts(3)), (3, Volts(5.204), Volts(5.205)));
    }
}
