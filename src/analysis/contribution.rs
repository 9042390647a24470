//! One line of an uncertainty budget: an influence, how well it is known, and what that does to the result.
//!
//! The layout is that of JCGM 100:2008, H.1.6 and EA-4/02: estimate, standard uncertainty u(x) in the influence's own unit,
//! distribution, degrees of freedom, sensitivity coefficient c, and the contribution |c| u(x) to the result.

use super::cause::Cause;
use crate::statistics::influence::Influence;
pub use crate::statistics::influence::Shape;
use crate::units::Unit;
use serde::{Deserialize, Serialize};

/// One line of an uncertainty budget.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Contribution {
    /// Where it comes from, in plain words.
    pub source: String,
    /// Its standard uncertainty in the unit of the quantity, sensitivity included: |c| u(x), never negative.
    pub standard_uncertainty: f64,
    /// How its values are spread.
    #[serde(default)]
    pub shape: Shape,
    /// Degrees of freedom of its standard uncertainty; `None` where it is known exactly (JCGM 100:2008, G.4.3).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub degrees_of_freedom: Option<f64>,
    /// The influence itself; `None` where it is the quantity's own and counts in full.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub input: Option<Input>,
    /// What it shares with other quantities; `None` where it is independent of all else.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub cause: Option<Cause>,
    /// How it enters the quantity.
    #[serde(default, skip_serializing_if = "Role::is_addend")]
    pub role: Role,
}

/// How an influence enters a quantity.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Role {
    /// In proportion, whatever its size.
    #[default]
    Addend,
    /// Through what the quantity is divided by: in proportion only where it is small.
    Divisor,
    /// What the divisors add by not being in proportion (JCGM 100:2008, 5.1.2, note): part of the standard uncertainty, but
    /// no influence of its own.
    Curvature,
}

impl Role {
    fn is_addend(&self) -> bool {
        *self == Self::Addend
    }
}

/// An influence in its own unit.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Input {
    /// Best estimate; zero for an error nobody corrected, absent where there is none.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub estimate: Option<f64>,
    /// u(x), in `unit`.
    pub standard_uncertainty: f64,
    /// Its SI unit.
    pub unit: Unit,
    /// c: change of the quantity per change of the influence, signed.
    pub sensitivity: f64,
}

impl Contribution {
    /// A bell-shaped influence of known standard uncertainty.
    pub fn normal(source: &str, standard_uncertainty: f64) -> Self {
        Self {
            source: source.to_owned(),
            standard_uncertainty,
            shape: Shape::Normal,
            degrees_of_freedom: None,
            input: None,
            cause: None,
            role: Role::Addend,
        }
    }

    /// An influence anywhere within `half_width` of its estimate (JCGM 100:2008, 4.3.7).
    pub fn rectangular(source: &str, half_width: f64) -> Self {
        let standard_uncertainty = half_width.abs() / 3.0_f64.sqrt();
        Self { shape: Shape::Rectangular, ..Self::normal(source, standard_uncertainty) }
    }

    /// A standard uncertainty worked out from readings that scatter (type A, JCGM 100:2008, 4.2).
    pub fn scatter(source: &str, standard_uncertainty: f64, degrees_of_freedom: f64) -> Self {
        Self { degrees_of_freedom: Some(degrees_of_freedom), ..Self::normal(source, standard_uncertainty) }
    }

    /// Takes the standard uncertainty given so far as that of an influence in `unit`, of which the quantity changes by
    /// `sensitivity` per unit.
    #[must_use]
    pub fn through(self, sensitivity: f64, unit: Unit) -> Self {
        let standard_uncertainty = self.standard_uncertainty;
        Self {
            standard_uncertainty: (sensitivity * standard_uncertainty).abs(),
            input: Some(Input { estimate: None, standard_uncertainty, unit, sensitivity }),
            ..self
        }
    }

    /// States the influence's best estimate, in the unit given to [`Contribution::through`].
    #[must_use]
    pub fn estimated(self, estimate: f64) -> Self {
        Self { input: self.input.map(|input| Input { estimate: Some(estimate), ..input }), ..self }
    }

    /// Names what it shares with other quantities.
    #[must_use]
    pub fn due_to(self, cause: Cause) -> Self {
        Self { cause: Some(cause), ..self }
    }

    /// The same influence, entering the quantity as `role`.
    #[must_use]
    pub fn entering(self, role: Role) -> Self {
        Self { role, ..self }
    }

    /// c: signed; one where the influence is the quantity's own.
    pub fn sensitivity(&self) -> f64 {
        self.input.map_or(1.0, |input| input.sensitivity)
    }

    /// u(x), in the influence's own unit.
    pub fn input_uncertainty(&self) -> f64 {
        self.input.map_or(self.standard_uncertainty, |input| input.standard_uncertainty)
    }

    /// The contribution with the sign of its sensitivity: by how much the quantity moves when the influence moves by one
    /// standard uncertainty.
    pub fn signed(&self) -> f64 {
        self.standard_uncertainty.copysign(self.sensitivity())
    }

    /// What it is to the distribution of the result.
    pub fn influence(&self) -> Influence {
        Influence {
            standard_uncertainty: self.standard_uncertainty,
            shape: self.shape,
            degrees_of_freedom: self.degrees_of_freedom,
        }
    }

    /// The same influence in a quantity that is `factor` times this one; `unit` is that of this one.
    pub(super) fn times(&self, factor: f64, unit: Unit) -> Self {
        let own =
            Input { estimate: None, standard_uncertainty: self.standard_uncertainty, unit, sensitivity: 1.0 };
        let input = self.input.unwrap_or(own);
        Self {
            standard_uncertainty: (factor * self.standard_uncertainty).abs(),
            input: Some(Input { sensitivity: factor * input.sensitivity, ..input }),
            ..self.clone()
        }
    }

    /// Takes in a line of the same cause: both move together, so their signed contributions add.
    pub(super) fn absorb(&mut self, other: &Self) {
        let together = self.signed() + other.signed();
        let spread = self.input_uncertainty();
        self.standard_uncertainty = together.abs();
        if let Some(input) = &mut self.input {
            input.sensitivity =
                if spread > 0.0 { together / spread } else { input.sensitivity + other.sensitivity() };
        }
    }
}
