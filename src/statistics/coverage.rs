//! How far a result may be from the truth with a stated probability, from how each influence on it is spread.
//!
//! A factor of 2 holds where many influences of like size add up (JCGM 100:2008, G.6.6). One wide rectangle, such as
//! a bracket wider than the meter's error, reaches no further than its ends: there 2 overstates. So the distribution
//! of the sum itself is worked out: rectangles are convolved with one another and with one bell, which stands for
//! every bell-shaped influence. With finite degrees of freedom the bell is Student's t with the effective number of
//! Welch and Satterthwaite (JCGM 100:2008, G.4.2), scaled by the combined uncertainty of its parts (JCGM 101:2008,
//! 6.4.9).
//!
//! The bells together are what a confidence interval of the GUM rests on: with Welch and Satterthwaite's number it
//! covers the truth as often as stated. The sum of t distributions of JCGM 101 is wider where scatter of few readings
//! meets other bells, by 3 % for five degrees of freedom beside a normal half as large and a rectangle.
//!
//! A rectangle whose width itself is in doubt (finite degrees of freedom) has no sharp ends and counts as a bell.

mod bell;
mod blur;
mod rectangles;

use super::influence::{Influence, Shape, combined, welch_satterthwaite};
use super::root::root;
use bell::Bell;
use blur::Blur;
use rectangles::Rectangles;

/// A rectangle below this part of the combined uncertainty is as good as a bell: it moves the factor by less than 1e-4.
const NEGLIGIBLE: f64 = 0.003;

/// A bell below this part of the combined uncertainty leaves the ends of the rectangles as sharp as they are.
const VANISHING: f64 = 1e-8;

/// The factor is found to this, relative to itself.
const TOLERANCE: f64 = 1e-8;

/// Coverage factor: half the width of the symmetric interval that holds the truth with `probability`, over the
/// combined standard uncertainty. Good to 1e-4, relative to itself where few degrees of freedom make it large; checked
/// from half a degree on.
///
/// `None` where `probability` is not between 0 and 1, where [`combined`] is `None`, or where no number is large enough
/// (a fraction of a degree of freedom and a probability next to 1).
pub fn coverage_factor(probability: f64, influences: &[Influence]) -> Option<f64> {
    let spread = Spread::new(influences)?;
    Some(spread.half_width(probability)? / spread.standard_uncertainty)
}

/// The distribution of a sum of independent influences about its estimate; symmetric.
#[derive(Clone, Debug)]
pub struct Spread {
    standard_uncertainty: f64,
    parts: Parts,
}

/// What the sum is made of, in units of its standard uncertainty.
#[derive(Clone, Debug)]
enum Parts {
    Bell(Bell),
    Rectangles(Rectangles),
    /// Rectangles much narrower than the bell.
    Blurred(Bell, Blur),
    Both(Bell, Rectangles),
}

impl Spread {
    /// The sum of `influences`; `None` where [`combined`] is.
    pub fn new(influences: &[Influence]) -> Option<Self> {
        let standard_uncertainty = combined(influences)?;
        let (mut half_widths, mut bells) = (Vec::new(), Vec::new());
        for influence in influences {
            let relative = influence.standard_uncertainty / standard_uncertainty;
            let sharp = influence.shape == Shape::Rectangular
                && influence.degrees_of_freedom.is_none_or(f64::is_infinite);
            if sharp && relative > NEGLIGIBLE {
                half_widths.push(3.0_f64.sqrt() * relative);
            } else {
                bells.push(Influence { standard_uncertainty: relative, ..*influence });
            }
        }
        half_widths.sort_by(|a, b| b.total_cmp(a));
        let bell = match combined(&bells).filter(|scale| *scale > VANISHING) {
            Some(scale) => Some(Bell::new(scale, welch_satterthwaite(&bells)?)?),
            None => None,
        };
        let parts = match bell {
            Some(bell) if half_widths.is_empty() => Parts::Bell(bell),
            Some(bell) => match Blur::new(&half_widths, &bell) {
                Some(blur) => Parts::Blurred(bell, blur),
                None => Parts::Both(bell, Rectangles::new(&half_widths)?),
            },
            None => Parts::Rectangles(Rectangles::new(&half_widths)?),
        };
        Some(Self { standard_uncertainty, parts })
    }

    /// Combined standard uncertainty, in the unit of the influences.
    pub fn standard_uncertainty(&self) -> f64 {
        self.standard_uncertainty
    }

    /// Half the width of the symmetric interval that holds the sum with `probability`; `None` unless that is between
    /// 0 and 1, or where no number is large enough.
    pub fn half_width(&self, probability: f64) -> Option<f64> {
        if !(probability > 0.0 && probability < 1.0) {
            return None;
        }
        // Whoever adds the reach of the rectangles to what holds the bell is sure to hold the sum.
        let relative = match &self.parts {
            Parts::Bell(bell) => bell.half_width(probability)?,
            Parts::Rectangles(rectangles) => {
                root(|c| rectangles.within(c) - probability, 0.0, rectangles.reach(), TOLERANCE)?
            }
            Parts::Blurred(bell, blur) => {
                let most = blur.reach + bell.half_width(probability)?;
                root(|c| blur.within(bell, c) - probability, 0.0, most, TOLERANCE)?
            }
            Parts::Both(bell, rectangles) => {
                let most = rectangles.reach() + bell.half_width(probability)?;
                let pile = bell.pile(rectangles.reach(), most)?;
                root(|c| pile.within(rectangles, c) - probability, 0.0, most, TOLERANCE)?
            }
        };
        Some(relative * self.standard_uncertainty)
    }

    /// Probability that the sum is within `half_width` of its estimate; to 2e-5.
    pub fn within(&self, half_width: f64) -> f64 {
        let c = half_width / self.standard_uncertainty;
        if c <= 0.0 {
            return 0.0;
        }
        if c.is_infinite() {
            return 1.0;
        }
        let within = match &self.parts {
            Parts::Bell(bell) => bell.within(c),
            Parts::Rectangles(rectangles) => rectangles.within(c),
            Parts::Blurred(bell, blur) => blur.within(bell, c),
            Parts::Both(bell, rectangles) => {
                bell.pile(rectangles.reach(), c).map_or(f64::NAN, |pile| pile.within(rectangles, c))
            }
        };
        // Sums of many terms may end a little beyond one; a clamp leaves NaN what it is.
        within.clamp(0.0, 1.0)
    }

    /// Probability that the sum lies more than `deviation` above its estimate; to 2e-5, and to rounding where there are
    /// no rectangles. By symmetry also that it lies more than `deviation` below.
    pub fn beyond(&self, deviation: f64) -> f64 {
        let outside = match &self.parts {
            Parts::Bell(bell) => bell.outside(deviation.abs() / self.standard_uncertainty),
            _ => 1.0 - self.within(deviation.abs()),
        };
        let one_side = 0.5 * outside;
        if deviation < 0.0 { 1.0 - one_side } else { one_side }
    }
}

#[cfg(test)]
mod tests;
