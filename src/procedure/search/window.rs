//! Where one threshold may lie: cells side by side, how likely each is, and how many alike they are worth.

/// Cells by index, the lowest voltage first, of which those from `low` up to and without `high` are still possible.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Window {
    weights: Vec<f64>,
    /// Sum of the weights of all cells before.
    mass: Vec<f64>,
    /// Sum of w log2 w of all cells before.
    information: Vec<f64>,
    low: usize,
    high: usize,
}

/// A probe that is as good as sure to say the same is not worth its time.
const NEARLY_NOTHING: f64 = 0.01;

impl Window {
    /// All cells possible. Weights are above zero.
    pub(super) fn new(weights: Vec<f64>) -> Self {
        let (mut mass, mut information) = (vec![0.0], vec![0.0]);
        let (mut all, mut inner) = (0.0, 0.0);
        for weight in &weights {
            all += weight;
            inner += weight * weight.log2();
            mass.push(all);
            information.push(inner);
        }
        let high = weights.len();
        Self { weights, mass, information, low: 0, high }
    }

    pub(super) fn low(&self) -> usize {
        self.low
    }

    pub(super) fn high(&self) -> usize {
        self.high
    }

    pub(super) fn is_single(&self) -> bool {
        self.high - self.low == 1
    }

    /// Leaves the cells from `low` up to and without `high`; at least one cell.
    pub(super) fn narrow(&mut self, low: usize, high: usize) {
        self.high = high.clamp(1, self.weights.len());
        self.low = low.min(self.high - 1);
    }

    /// How likely the threshold lies in the cells before `split`.
    pub(super) fn share_below(&self, split: usize) -> f64 {
        let all = self.mass[self.high] - self.mass[self.low];
        if all > 0.0 { (self.mass[split] - self.mass[self.low]) / all } else { 0.5 }
    }

    /// The splits worth a look, the first and the one after the last: all but those that leave nearly nothing on one side,
    /// and the next beyond, so that a window of one likely cell has its borders.
    pub(super) fn splits(&self) -> (usize, usize) {
        let share = |part: f64| self.mass[self.low] + part * (self.mass[self.high] - self.mass[self.low]);
        let place = |part: f64| self.mass.partition_point(|mass| *mass < share(part));
        let first = place(NEARLY_NOTHING).saturating_sub(1).clamp(self.low + 1, self.high);
        let end = (place(1.0 - NEARLY_NOTHING) + 1).clamp(first, self.high);
        (first, end)
    }

    /// How many cells alike the possible ones are worth.
    pub(super) fn size(&self) -> f64 {
        self.size_of(self.low, self.high)
    }

    /// The same of the cells before `split`.
    pub(super) fn size_below(&self, split: usize) -> f64 {
        self.size_of(self.low, split)
    }

    /// The same of the cells from `split` on.
    pub(super) fn size_above(&self, split: usize) -> f64 {
        self.size_of(split, self.high)
    }

    /// Two to the power of the bits: the entropy of the cells, but at least the probes that show the cell's borders, two
    /// or at the window's ends one. Cells that are all alike are worth their number.
    fn size_of(&self, low: usize, high: usize) -> f64 {
        let cells = high - low;
        let all = self.mass[high] - self.mass[low];
        if cells <= 1 || all <= 0.0 {
            return cells.max(1) as f64;
        }
        let entropy = all.log2() - (self.information[high] - self.information[low]) / all;
        let borders = 2.0 - (self.weights[low] + self.weights[high - 1]) / all;
        entropy.max(borders).exp2()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn cells_alike_are_worth_their_number() {
        for cells in 1..200 {
            let window = Window::new(vec![0.3; cells]);
            assert!((window.size() - cells as f64).abs() < 1e-6, "{cells}: {}", window.size());
        }
    }

    /// Half of it in one cell and a quarter in each of two others: 1.5 bits, the textbook case; but two borders.
    #[test]
    fn unlike_cells_are_worth_their_entropy_and_at_least_their_borders() {
        let window = Window::new(vec![0.25, 0.5, 0.25]);
        assert!((window.size() - 1.5_f64.exp2()).abs() < 1e-12, "{}", window.size());
        let sure = Window::new(vec![1e-6, 1.0, 1e-6]);
        assert!((sure.size() - 4.0).abs() < 1e-4, "both borders of the likely cell: {}", sure.size());
    }

    #[test]
    fn a_likely_cell_has_both_its_borders_among_the_splits() {
        assert_eq!(Window::new(vec![1e-6, 1e-6, 1.0, 1e-6, 1e-6]).splits(), (2, 4));
        assert_eq!(Window::new(vec![1.0; 4]).splits(), (1, 4));
        let (first, end) = Window::new(vec![1.0; 1000]).splits();
        assert!((9..=10).contains(&first) && (990..=992).contains(&end), "{first} {end}");
    }

    #[test]
    fn a_window_keeps_at_least_one_cell() {
        let mut window = Window::new(vec![1.0; 4]);
        window.narrow(3, 1);
        assert_eq!((window.low(), window.high(), window.is_single()), (0, 1, true));
        window.narrow(9, 9);
        assert_eq!((window.low(), window.high()), (3, 4));
    }
}
