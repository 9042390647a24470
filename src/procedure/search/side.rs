//! One threshold in the course of a search: the window it lies in, and how sure its borders are.

use super::window::Window;

/// One threshold.
#[derive(Clone, Debug)]
pub(super) struct Side {
    pub(super) window: Window,
    /// First cell, and the one after the last, that the range leaves possible.
    pub(super) widest: (usize, usize),
    /// The border where the board did not change has been held.
    pub(super) held: bool,
    /// How often it has been seen to change at the other border, and how often it must.
    pub(super) passes: u32,
    needed: u32,
    /// How often the board changed while it was held.
    pub(super) moved: u32,
    /// How often it did what it had been seen not to do.
    pub(super) contradicted: u32,
}

/// What the board did at a border of a window.
#[derive(Clone, Copy, PartialEq, Eq)]
pub(super) enum Border {
    Changed,
    Unchanged,
}

impl Side {
    /// A threshold in one of the cells from `low` to `high`, believed when the board was seen to change `needed` times at
    /// the border where it does.
    pub(super) fn new(weights: Vec<f64>, low: usize, high: usize, needed: u32) -> Self {
        let mut window = Window::new(weights);
        window.narrow(low, high);
        Self { window, widest: (low, high), held: false, passes: 0, needed, moved: 0, contradicted: 0 }
    }

    pub(super) fn low(&self) -> usize {
        self.window.low()
    }

    pub(super) fn high(&self) -> usize {
        self.window.high()
    }

    /// Down to one cell, of which the border was held where the board did not change.
    pub(super) fn is_held(&self) -> bool {
        self.window.is_single() && self.held
    }

    /// There is nothing left to ask.
    pub(super) fn is_settled(&self) -> bool {
        self.is_held() && self.passes >= self.needed
    }

    /// The board need not be seen to change at that border again.
    pub(super) fn pass(&mut self) {
        self.passes = self.needed;
    }

    /// The threshold lies below `split`. True when that contradicts what was seen before.
    pub(super) fn below(&mut self, split: usize, border: Border) -> bool {
        if split <= self.low() {
            let cells = self.wider();
            self.widen(split.saturating_sub(cells), split);
            return true;
        }
        if split < self.high() {
            self.window.narrow(self.low(), split);
            self.forget(border);
        } else if split == self.high() && border == Border::Changed {
            self.passes += 1;
        }
        false
    }

    /// The threshold lies above `split`; the mirror image of [`below`](Self::below).
    pub(super) fn above(&mut self, split: usize, border: Border) -> bool {
        if split >= self.high() {
            let cells = self.wider();
            self.widen(split, split.saturating_add(cells));
            return true;
        }
        if split > self.low() {
            self.window.narrow(split, self.high());
            self.forget(border);
        } else if split == self.low() && border == Border::Changed {
            self.passes += 1;
        }
        false
    }

    /// How many cells to look at beyond a border that proved false: noise moves a threshold across a border but not
    /// across a cell, a reading that was wrong may be anywhere.
    fn wider(&mut self) -> usize {
        self.contradicted += 1;
        match self.contradicted {
            1 => 1,
            2 => 8,
            _ => usize::MAX / 2,
        }
    }

    /// A border has moved: what was seen at the old one says nothing of it.
    fn forget(&mut self, border: Border) {
        match border {
            Border::Changed => self.passes = 1,
            Border::Unchanged => self.held = false,
        }
    }

    /// Looks for the threshold between a border that proved false and as many cells farther along as
    /// [`wider`](Self::wider) says. The new border must be seen to change it. A hold that a trip stood still counts, for the
    /// board is not slow: what noise did once at a border it would do again to a board that waits there.
    fn widen(&mut self, low: usize, high: usize) {
        let held = self.is_held() && self.needed > 1;
        self.reopen(low, high);
        self.held = held && self.window.is_single();
        self.passes = self.needed - 1;
    }

    /// Looks at the cells from `low` to `high` afresh, or at all when there are none.
    pub(super) fn reopen(&mut self, low: usize, high: usize) {
        let (low, high) = (low.max(self.widest.0), high.min(self.widest.1));
        let (low, high) = if low < high { (low, high) } else { self.widest };
        self.window.narrow(low, high);
        (self.held, self.passes) = (false, 0);
    }
}
