//! A sum of rectangles: how probable it is to lie within some distance of its middle.
//!
//! Adding a rectangle to a sum replaces the cumulative distribution by its running mean over the rectangle's width. A
//! running mean is a difference of two values of the integral, and that integral is what is kept here, on a grid.

/// Cells of the grid, from the middle of the sum to its end.
const CELLS: usize = 256;

/// A sum of independent rectangles about zero.
#[derive(Clone, Debug)]
pub(super) struct Rectangles {
    reach: f64,
    step: f64,
    grid: Vec<Node>,
}

/// At one point of the grid: the probability of lying between zero and here, and the integral of that.
#[derive(Clone, Copy, Debug)]
struct Node {
    probability: f64,
    integral: f64,
}

impl Rectangles {
    /// The sum of rectangles of these half widths, the widest first; `None` without any.
    pub(super) fn new(half_widths: &[f64]) -> Option<Self> {
        let (widest, others) = half_widths.split_first()?;
        let reach: f64 = half_widths.iter().sum();
        let step = reach / CELLS as f64;
        let place = |index: usize| index as f64 * step;
        let one = |x: f64| One { half_width: *widest }.at(x);
        let mut sum = Self { reach, step, grid: (0..=CELLS).map(|index| one(place(index))).collect() };
        for (count, half_width) in others.iter().enumerate() {
            let mean = |x: f64, integral: &dyn Fn(f64) -> f64| {
                (integral(x + half_width) - integral((x - half_width).abs())) / (2.0 * half_width)
            };
            // The first one has corners, which the grid would round off.
            let exact = |x: f64| one(x).integral;
            let gridded = |x: f64| sum.integral(x);
            let integral: &dyn Fn(f64) -> f64 = if count == 0 { &exact } else { &gridded };
            let probabilities: Vec<f64> = (0..=CELLS).map(|index| mean(place(index), integral)).collect();
            sum.replace(&probabilities);
        }
        Some(sum)
    }

    /// Takes over new probabilities and integrates them, through a cubic over each cell and its two neighbours.
    fn replace(&mut self, probabilities: &[f64]) {
        let at = |index: usize| probabilities.get(index).copied().unwrap_or(0.5);
        let mut integral = 0.0;
        for (index, node) in self.grid.iter_mut().enumerate() {
            *node = Node { probability: at(index), integral };
            let before = if index == 0 { -at(1) } else { at(index - 1) };
            let inner = 13.0 * (at(index) + at(index + 1));
            integral += self.step * (inner - before - at(index + 2)) / 24.0;
        }
    }

    /// The largest value the sum can have.
    pub(super) fn reach(&self) -> f64 {
        self.reach
    }

    /// Integral of the probability of lying between zero and `y`, over `y` from zero to `x`, for `x >= 0`.
    pub(super) fn integral(&self, x: f64) -> f64 {
        match self.cell(x) {
            Ok((left, right, part)) => {
                let rest = 1.0 - part;
                let values = left.integral * rest * rest * (1.0 + 2.0 * part)
                    + right.integral * part * part * (1.0 + 2.0 * rest);
                let slopes = left.probability * rest - right.probability * part;
                values + self.step * part * rest * slopes
            }
            Err(end) => end.integral + end.probability * (x - self.reach),
        }
    }

    /// Probability of lying within `c` of zero.
    pub(super) fn within(&self, c: f64) -> f64 {
        2.0 * match self.cell(c) {
            Ok((left, right, part)) => {
                let rise = (right.integral - left.integral) / self.step;
                let rest = 1.0 - part;
                6.0 * part * rest * rise
                    + left.probability * rest * (1.0 - 3.0 * part)
                    + right.probability * part * (3.0 * part - 2.0)
            }
            Err(end) => end.probability,
        }
    }

    /// The nodes on both sides of `x` and how far it is from the left to the right one; the last node from there on.
    fn cell(&self, x: f64) -> Result<(Node, Node, f64), Node> {
        let place = x / self.step;
        let index = place as usize;
        match self.grid.get(index..index.saturating_add(2)) {
            Some(&[left, right]) => Ok((left, right, place - index as f64)),
            _ => Err(self.grid[CELLS]),
        }
    }
}

/// A single rectangle.
struct One {
    half_width: f64,
}

impl One {
    fn at(&self, x: f64) -> Node {
        if x < self.half_width {
            let probability = 0.5 * x / self.half_width;
            Node { probability, integral: 0.5 * probability * x }
        } else {
            Node { probability: 0.5, integral: 0.5 * x - 0.25 * self.half_width }
        }
    }
}
