//! How often U covers the truth, and by how much a quantity is off on average, over many good boards in virtual time.

use crate::river;
use crate::virtual_run::{MEASURED, Measured, run};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::Condition;

/// Boards looked at: what is found of a probability of 95 % scatters by 0.9 % then.
const BOARDS: u64 = 600;

/// Hits and deviations of one quantity.
#[derive(Debug)]
struct Tally {
    name: QuantityName,
    boards: f64,
    covered: f64,
    deviations: f64,
    expanded: f64,
}

impl Tally {
    fn of(name: QuantityName, all: &[Measured]) -> Self {
        let own = || all.iter().filter(|measured| measured.name == name);
        let count =
            |wanted: &dyn Fn(&Measured) -> bool| own().filter(|measured| wanted(measured)).count() as f64;
        let sum = |of: &dyn Fn(&Measured) -> f64| own().map(of).sum::<f64>();
        Self {
            name,
            boards: count(&|_| true),
            covered: count(&Measured::is_covered),
            deviations: sum(&|measured| measured.value - measured.truth),
            expanded: sum(&|measured| measured.expanded_uncertainty),
        }
    }

    /// Share of boards whose true value lies within U.
    fn share(&self) -> f64 {
        self.covered / self.boards
    }

    /// Mean deviation over mean U.
    fn bias(&self) -> f64 {
        self.deviations / self.expanded
    }
}

fn tallies(profile: &Profile, condition: Condition, seeds: std::ops::Range<u64>) -> [Tally; 5] {
    let all: Vec<Measured> =
        seeds.flat_map(|seed| run(profile, condition, seed).all_measured(profile)).collect();
    MEASURED.map(|name| Tally::of(name, &all))
}

/// U at 95 % covers 95 %: no less, and no more either, within three standard deviations of the count and what a quiet
/// detector has to spare. What is left of the bias of a threshold after the allowance for noise is below a tenth of U.
#[test]
fn u_covers_as_often_as_it_says() {
    let profile = river::profile();
    for tally in tallies(&profile, Condition::Good, 0..BOARDS) {
        let scatter = 3.0 * (0.95 * 0.05 / tally.boards).sqrt();
        let name = tally.name.key();
        assert!(tally.boards >= BOARDS as f64, "{name}: {} boards", tally.boards);
        assert!((tally.share() - 0.95).abs() <= scatter + SPARE, "{name}: {} covered", tally.share());
        assert!(tally.bias().abs() < LARGEST_BIAS, "{name}: bias of {} U", tally.bias());
    }
}

/// What the allowance for noise adds to the coverage of a detector that has little.
const SPARE: f64 = 0.01;
/// Mean deviation over mean U.
const LARGEST_BIAS: f64 = 0.1;
