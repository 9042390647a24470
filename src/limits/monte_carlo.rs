//! Many boards drawn at random from their parts (JCGM 101:2008).

use super::input::Input;
use super::window::Window;
use super::worst_case::nominals;
use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;

/// One quantity of all the boards that were drawn.
#[derive(Clone, Debug, PartialEq)]
pub struct Population {
    sorted: Vec<f64>,
    /// Mean.
    pub mean: f64,
    /// Standard deviation.
    pub standard_deviation: f64,
    /// Squared correlation of each input with the quantity: its share in the variance as far as the two follow a
    /// straight line. All together make 1 for a linear model of independent inputs, but for the chance of the draw.
    pub shares: Vec<f64>,
}

/// Draws `samples` boards and gives each of the `M` quantities of `model`. The same seed gives the same boards.
pub fn draw<const M: usize>(
    inputs: &[Input],
    model: impl Fn(&[f64]) -> [f64; M],
    samples: usize,
    seed: u64,
) -> [Population; M] {
    let mut generator = ChaCha8Rng::seed_from_u64(seed);
    let nominal = nominals(inputs);
    let centre = model(&nominal);
    let mut values = nominal.clone();
    let mut found = [(); M].map(|()| Vec::with_capacity(samples));
    let mut sums = [(); M].map(|()| Sums::new(inputs.len()));
    for _ in 0..samples {
        for (value, input) in values.iter_mut().zip(inputs) {
            if input.varies() {
                *value = input.quantile(generator.random::<f64>());
            }
        }
        let results = model(&values);
        for quantity in 0..M {
            found[quantity].push(results[quantity]);
            // About the nominal board, so that a small spread on a large value loses no digits.
            sums[quantity].add(&values, &nominal, results[quantity] - centre[quantity]);
        }
    }
    let mut finished = found.into_iter().zip(sums).zip(centre);
    std::array::from_fn(|_| match finished.next() {
        Some(((values, sums), centre)) => Population::new(values, &sums, centre),
        None => Population::new(Vec::new(), &Sums::new(0), f64::NAN),
    })
}

impl Population {
    fn new(mut values: Vec<f64>, sums: &Sums, centre: f64) -> Self {
        values.sort_by(f64::total_cmp);
        Self {
            sorted: values,
            mean: centre + sums.result / sums.count,
            standard_deviation: sums.variance().sqrt(),
            shares: sums.shares(),
        }
    }

    /// The probabilistically symmetric interval of this coverage (JCGM 101:2008, 7.7.2): as many boards below as above.
    /// `None` where there are too few boards for it.
    pub fn interval(&self, coverage: f64) -> Option<Window> {
        let count = self.sorted.len();
        let covered = (coverage * count as f64 + 0.5).floor() as usize;
        let below = count.checked_sub(covered)?.div_ceil(2).max(1);
        Some(Window { min: *self.sorted.get(below - 1)?, max: *self.sorted.get(below - 1 + covered)? })
    }

    /// Share of the boards outside `window`.
    pub fn share_outside(&self, window: Window) -> f64 {
        let below = self.sorted.partition_point(|value| *value < window.min);
        let within = self.sorted.partition_point(|value| *value <= window.max);
        (self.sorted.len() - within.saturating_sub(below)) as f64 / self.sorted.len() as f64
    }

    /// The boards' values, smallest first.
    pub fn sorted(&self) -> &[f64] {
        &self.sorted
    }
}

/// Running sums for the mean, the variance and the correlations.
struct Sums {
    count: f64,
    result: f64,
    result_squared: f64,
    input: Vec<f64>,
    input_squared: Vec<f64>,
    product: Vec<f64>,
}

impl Sums {
    fn new(inputs: usize) -> Self {
        let none = || vec![0.0; inputs];
        Self {
            count: 0.0,
            result: 0.0,
            result_squared: 0.0,
            input: none(),
            input_squared: none(),
            product: none(),
        }
    }

    fn add(&mut self, values: &[f64], nominal: &[f64], result: f64) {
        self.count += 1.0;
        self.result += result;
        self.result_squared += result * result;
        for (index, (value, nominal)) in values.iter().zip(nominal).enumerate() {
            let input = value - nominal;
            self.input[index] += input;
            self.input_squared[index] += input * input;
            self.product[index] += input * result;
        }
    }

    fn variance(&self) -> f64 {
        ((self.result_squared - self.result * self.result / self.count) / (self.count - 1.0)).max(0.0)
    }

    fn shares(&self) -> Vec<f64> {
        let of_result = self.result_squared - self.result * self.result / self.count;
        (0..self.input.len())
            .map(|index| {
                let of_input = self.input_squared[index] - self.input[index] * self.input[index] / self.count;
                let joint = self.product[index] - self.input[index] * self.result / self.count;
                if of_input > 0.0 && of_result > 0.0 { joint * joint / (of_input * of_result) } else { 0.0 }
            })
            .collect()
    }
}
