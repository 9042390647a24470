//! What a result is uncertain by: one influence, how far it spreads, how, and how well that is known.

use serde::{Deserialize, Serialize};

/// How the values of an influence are spread about its estimate.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Shape {
    /// Bell-shaped: scatter of readings, or many small influences together.
    #[default]
    Normal,
    /// Anywhere between two limits, and nothing else known (JCGM 100:2008, 4.3.7).
    Rectangular,
}

/// One influence on a result, in the unit of the result.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Influence {
    /// Its standard uncertainty, sensitivity included.
    pub standard_uncertainty: f64,
    /// How its values are spread.
    pub shape: Shape,
    /// Degrees of freedom of its standard uncertainty; `None` where it is known exactly (JCGM 100:2008, G.4.3).
    pub degrees_of_freedom: Option<f64>,
}

impl Influence {
    /// A bell-shaped influence of known standard uncertainty.
    pub fn normal(standard_uncertainty: f64) -> Self {
        Self { standard_uncertainty, shape: Shape::Normal, degrees_of_freedom: None }
    }

    /// An influence anywhere within limits, given by its standard uncertainty: half the width over the root of three.
    pub fn rectangular(standard_uncertainty: f64) -> Self {
        Self { shape: Shape::Rectangular, ..Self::normal(standard_uncertainty) }
    }

    /// A standard uncertainty worked out from readings that scatter (type A, JCGM 100:2008, 4.2).
    pub fn scatter(standard_uncertainty: f64, degrees_of_freedom: f64) -> Self {
        Self { degrees_of_freedom: Some(degrees_of_freedom), ..Self::normal(standard_uncertainty) }
    }

    /// True for a number that can be an uncertainty, with degrees of freedom that can be counted.
    fn is_sound(&self) -> bool {
        self.standard_uncertainty.is_finite()
            && self.standard_uncertainty >= 0.0
            && self.degrees_of_freedom.is_none_or(|degrees| degrees > 0.0)
    }
}

/// Combined standard uncertainty of independent influences: the root of the sum of squares (JCGM 100:2008, 5.1.2).
/// `None` where an influence is negative, not finite, or has no degrees of freedom, and where nothing is uncertain.
pub fn combined(influences: &[Influence]) -> Option<f64> {
    let largest = influences.iter().map(|influence| influence.standard_uncertainty).fold(0.0, f64::max);
    if largest == 0.0 || !influences.iter().all(Influence::is_sound) {
        return None;
    }
    // Scaled, so that neither femtoamps nor gigaohms leave the range of the squares.
    let squares: f64 = influences.iter().map(|part| (part.standard_uncertainty / largest).powi(2)).sum();
    Some(largest * squares.sqrt())
}

/// Effective degrees of freedom of a combined standard uncertainty (JCGM 100:2008, G.2b); infinite where every
/// influence is known exactly. `None` as for [`combined`].
pub fn welch_satterthwaite(influences: &[Influence]) -> Option<f64> {
    let combined = combined(influences)?;
    let sum: f64 = influences
        .iter()
        .filter_map(|part| Some((part.standard_uncertainty / combined).powi(4) / part.degrees_of_freedom?))
        .sum();
    Some(if sum > 0.0 { 1.0 / sum } else { f64::INFINITY })
}

#[cfg(test)]
mod tests {
    use super::*;

    /// GUM (JCGM 100:2008) H.1, end-gauge calibration: contributions of 25 nm (18 degrees of freedom), 9.7 nm (25.6),
    /// 2.9 nm (50) and 16.6 nm (2), all others without effect; the result is 32 nm with 16.7 degrees of freedom.
    /// Table G.2 prints 2.92 for 99 % and the 16 that are left after truncation.
    #[test]
    fn the_end_gauge_of_the_gum_has_sixteen_degrees_of_freedom() {
        let budget = [
            Influence::scatter(25.0, 18.0),
            Influence::scatter(9.7, 25.6),
            Influence::scatter(2.9, 50.0),
            Influence::scatter(16.7, 2.0),
        ];
        let u = combined(&budget).expect("an uncertainty");
        assert!((u - 31.7).abs() < 0.05, "{u}");
        let degrees = welch_satterthwaite(&budget).expect("degrees of freedom");
        assert!((degrees - 16.6).abs() < 0.1, "{degrees}");
        // H.1.6 itself pools three parts of the comparator to 25.6.
        let comparator =
            [Influence::scatter(5.8, 24.0), Influence::scatter(3.9, 5.0), Influence::scatter(6.7, 8.0)];
        assert!((combined(&comparator).expect("u") - 9.7).abs() < 0.05);
        // With the rounded 9.7 nm the GUM prints 25.6; unrounded it is 25.4.
        assert!((welch_satterthwaite(&comparator).expect("degrees") - 25.447).abs() < 0.001);
    }

    #[test]
    fn what_is_known_exactly_has_no_end_of_degrees() {
        assert_eq!(welch_satterthwaite(&[Influence::normal(1.0)]), Some(f64::INFINITY));
        assert_eq!(welch_satterthwaite(&[Influence::scatter(1e-200, 5.0)]), Some(5.0));
    }

    #[test]
    fn nonsense_is_no_uncertainty() {
        let one = Influence::normal(1.0);
        for wrong in [
            Influence::normal(f64::NAN),
            Influence::normal(f64::INFINITY),
            Influence::normal(-1.0),
            Influence::scatter(1.0, 0.0),
            Influence::scatter(1.0, f64::NAN),
        ] {
            assert_eq!(combined(&[one, wrong]), None, "{wrong:?}");
            assert_eq!(welch_satterthwaite(&[wrong, one]), None, "{wrong:?}");
        }
        assert_eq!(combined(&[]), None);
        assert_eq!(combined(&[Influence::normal(0.0)]), None);
    }
}
