//! The bell-shaped part of a sum: normal, or Student's t.
//!
//! Every bell is a pile of rectangles about its middle, the wide ones rare (Khinchine). A rectangle added to a sum of
//! rectangles is a difference of two integrals, so the pile adds up to one short sum for each probability.

use super::rectangles::Rectangles;
use crate::statistics::distribution::{Distribution, Normal, StudentT};

/// Spacing of the rectangles of a pile, relative to the bell's scale, and to their own half width where that is more.
const SPACING: f64 = 0.0125;

/// How much further than it is asked for a pile goes. What is wider still is flat there and needs no layers; the rule
/// that cuts between them errs by what is left of the bell.
const MARGIN: f64 = 8.0;

/// What lies beyond this probability, no pile needs to hold.
const NEGLIGIBLE: f64 = 1e-12;

/// More degrees of freedom than this change no factor by 1e-5: it is off by (k cubed + k) / 4 over them
/// (Abramowitz and Stegun, 26.7.5).
const AS_GOOD_AS_NORMAL: f64 = 1e6;

/// A bell of a given scale.
#[derive(Clone, Copy, Debug)]
pub(super) struct Bell {
    scale: f64,
    law: Law,
}

#[derive(Clone, Copy, Debug)]
enum Law {
    Normal,
    Student { law: StudentT, degrees: f64 },
}

impl Bell {
    /// With these degrees of freedom, which may be infinite.
    pub(super) fn new(scale: f64, degrees: f64) -> Option<Self> {
        let law = if degrees > AS_GOOD_AS_NORMAL {
            Law::Normal
        } else {
            Law::Student { law: StudentT::new(degrees)?, degrees }
        };
        Some(Self { scale, law })
    }

    fn law(&self) -> &dyn Distribution {
        match &self.law {
            Law::Normal => &Normal,
            Law::Student { law, .. } => law,
        }
    }

    /// Over what distance it changes: its scale; below one degree of freedom its top is narrower.
    pub(super) fn width(&self) -> f64 {
        match self.law {
            Law::Student { degrees, .. } if degrees < 1.0 => self.scale * degrees.sqrt(),
            _ => self.scale,
        }
    }

    /// Half the width that holds `probability`.
    pub(super) fn half_width(&self, probability: f64) -> Option<f64> {
        Some(self.scale * self.law().upper_quantile(0.5 * (1.0 - probability))?)
    }

    /// Probability of lying within `c`.
    pub(super) fn within(&self, c: f64) -> f64 {
        1.0 - self.outside(c)
    }

    /// Probability of lying outside of `c`.
    pub(super) fn outside(&self, c: f64) -> f64 {
        2.0 * self.law().upper(c / self.scale)
    }

    /// The rectangles it is made of, so many that it can be asked for distances up to `most` of a sum with rectangles
    /// that reach to `reach`.
    pub(super) fn pile(&self, reach: f64, most: f64) -> Option<Pile> {
        let needed = MARGIN * (most + reach) / self.scale;
        let end = needed.min(self.law().upper_quantile(NEGLIGIBLE)?);
        let top = self.width() / self.scale;
        let count = ((end / top).asinh() / SPACING).ceil() as usize;
        let spacing = (end / top).asinh() / count as f64;
        let layers = (1..=count).map(|index| {
            let s = index as f64 * spacing;
            let z = top * s.sinh();
            // Trapezoidal rule in s; the last layer has one neighbour only.
            let width = top * s.cosh() * spacing * if index == count { 0.5 } else { 1.0 };
            Layer { half_width: self.scale * z, density: 2.0 * self.fall(z) * width / self.scale }
        });
        Some(Pile { layers: layers.collect(), rest: 2.0 * self.density(end) / self.scale })
    }

    /// Density at `z` scales from the middle, for a scale of one.
    fn density(&self, z: f64) -> f64 {
        match self.law {
            Law::Normal => Normal::density(z),
            Law::Student { law, .. } => law.density(z),
        }
    }

    /// How steeply that density falls.
    fn fall(&self, z: f64) -> f64 {
        self.density(z)
            * match self.law {
                Law::Normal => z,
                Law::Student { degrees, .. } => (degrees + 1.0) * z / (degrees + z * z),
            }
    }
}

/// A bell as a pile of rectangles.
pub(super) struct Pile {
    layers: Vec<Layer>,
    /// Density of all that is wider than the last layer.
    rest: f64,
}

struct Layer {
    half_width: f64,
    /// Probability of this layer over its half width.
    density: f64,
}

impl Pile {
    /// Probability that this bell and `rectangles` together lie within `c` of zero.
    pub(super) fn within(&self, rectangles: &Rectangles, c: f64) -> f64 {
        let layers: f64 = self
            .layers
            .iter()
            .map(|Layer { half_width, density }| {
                density * (rectangles.integral(c + half_width) - rectangles.integral((c - half_width).abs()))
            })
            .sum();
        layers + self.rest * c
    }
}
