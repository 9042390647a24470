//! The logarithm of the likelihood of brackets, with its slopes and curvatures.

use super::Bracket;
use crate::statistics::distribution::{Distribution, Normal};
use std::f64::consts::TAU;

/// A bracket narrower than this many standard deviations is as good as a reading of its middle, to 1e-11; the
/// difference of the probabilities at its ends is good to that no longer.
const AS_GOOD_AS_READ: f64 = 1e-5;

/// Probabilities below this are about to run out of numbers.
const FAR: f64 = 1e-290;

/// A population, in the coordinates in which the likelihood has one hill.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Place {
    /// One over the standard deviation.
    pub(super) over: f64,
    /// Mean over the standard deviation.
    pub(super) mean: f64,
}

/// Value and derivatives at one place; `o` stands for `over`, `m` for `mean`.
#[derive(Clone, Copy, Debug, Default)]
pub(super) struct Likelihood {
    pub(super) log: f64,
    slope_o: f64,
    pub(super) slope_m: f64,
    pub(super) curve_oo: f64,
    pub(super) curve_om: f64,
    pub(super) curve_mm: f64,
}

impl Likelihood {
    /// From here to the top, if the hill were a parabola; `None` where it is flat.
    pub(super) fn step_up(&self) -> Option<Step> {
        let determinant = self.curve_oo * self.curve_mm - self.curve_om * self.curve_om;
        let over = (self.curve_om * self.slope_m - self.curve_mm * self.slope_o) / determinant;
        let mean = (self.curve_om * self.slope_o - self.curve_oo * self.slope_m) / determinant;
        let gain = 0.5 * (over * self.slope_o + mean * self.slope_m);
        gain.is_finite().then_some(Step { over, mean, gain })
    }
}

/// A step of Newton's method.
#[derive(Clone, Copy, Debug)]
pub(super) struct Step {
    over: f64,
    mean: f64,
    /// How much higher the top is, if the hill were a parabola.
    pub(super) gain: f64,
}

impl Step {
    /// Where a part of it leads.
    pub(super) fn from(&self, place: Place, part: f64) -> Place {
        Place { over: place.over + part * self.over, mean: place.mean + part * self.mean }
    }
}

/// Sums up over all brackets.
pub(super) fn likelihood(brackets: &[Bracket], place: Place) -> Likelihood {
    let mut sum = Likelihood::default();
    for bracket in brackets {
        let one = of_one(bracket, place);
        sum.log += one.log;
        sum.slope_o += one.slope_o;
        sum.slope_m += one.slope_m;
        sum.curve_oo += one.curve_oo;
        sum.curve_om += one.curve_om;
        sum.curve_mm += one.curve_mm;
    }
    sum
}

fn of_one(bracket: &Bracket, place: Place) -> Likelihood {
    let width = bracket.high - bracket.low;
    if width * place.over < AS_GOOD_AS_READ {
        return of_reading(0.5 * (bracket.low + bracket.high), width, place);
    }
    let (low, high) = (End::at(bracket.low, place), End::at(bracket.high, place));
    // Of the two tails the one that is smaller, for its digits.
    let probability = if low.z + high.z > 0.0 {
        Normal.upper(low.z) - Normal.upper(high.z)
    } else {
        Normal.lower(high.z) - Normal.lower(low.z)
    };
    if probability < FAR {
        return of_far_bracket(if low.z > 0.0 { &low } else { &high });
    }
    let difference = |of: fn(&End) -> f64| (of(&high) - of(&low)) / probability;
    let slope_o = difference(|end| end.x * end.density);
    let slope_m = -difference(|end| end.density);
    Likelihood {
        log: probability.ln(),
        slope_o,
        slope_m,
        curve_oo: -difference(|end| end.x * end.x * end.fall) - slope_o * slope_o,
        curve_om: difference(|end| end.x * end.fall) - slope_o * slope_m,
        curve_mm: -difference(|end| end.fall) - slope_m * slope_m,
    }
}

/// A bracket as the density at its middle times its width; without the width where it has none.
fn of_reading(x: f64, width: f64, place: Place) -> Likelihood {
    let z = place.over * x - place.mean;
    let log_width = if width > 0.0 { width.ln() } else { 0.0 };
    Likelihood {
        log: place.over.ln() - 0.5 * z * z - 0.5 * TAU.ln() + log_width,
        slope_o: 1.0 / place.over - z * x,
        slope_m: z,
        curve_oo: -1.0 / (place.over * place.over) - x * x,
        curve_om: x,
        curve_mm: -1.0,
    }
}

/// A bracket too far out to have a probability: all of it is next to its nearer end.
fn of_far_bracket(End { x, z, .. }: &End) -> Likelihood {
    Likelihood {
        log: -0.5 * z * z - (z.abs() * TAU.sqrt()).ln(),
        slope_o: -z * x,
        slope_m: *z,
        curve_oo: -x * x,
        curve_om: *x,
        curve_mm: -1.0,
    }
}

/// One end of a bracket, in standard deviations from the mean.
struct End {
    x: f64,
    z: f64,
    density: f64,
    /// How steeply the density falls.
    fall: f64,
}

impl End {
    fn at(x: f64, place: Place) -> Self {
        if x.is_finite() {
            let z = place.over * x - place.mean;
            let density = Normal::density(z);
            Self { x, z, density, fall: z * density }
        } else {
            // Nothing happens out there; zeros keep infinity out of the products.
            Self { x: 0.0, z: x, density: 0.0, fall: 0.0 }
        }
    }
}
