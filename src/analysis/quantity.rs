//! One measured quantity: value, uncertainty, and the budget behind it.
//!
//! A budget is kept in lines that are independent of each other. What two quantities have in common is told by the cause of
//! a line, so a difference such as the hysteresis is worked out from its terms and their causes alone: an offset that both
//! share cancels, a gain counts for the difference only, and nothing has to be known of the terms.

pub(super) use super::contribution::Contribution;
use super::contribution::Role;
use super::spread::Spread;
use crate::profile::QuantityName;
use crate::statistics::influence::{Influence, welch_satterthwaite};
use crate::statistics::quotient::Quotient;
use crate::units::Unit;
use serde::{Deserialize, Serialize};

/// A quantity read from a trace, in the SI unit of its name.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Quantity {
    /// Which quantity.
    pub name: QuantityName,
    /// Best estimate.
    pub value: f64,
    /// Combined standard uncertainty (JCGM 100:2008, 5.1.2).
    pub standard_uncertainty: f64,
    /// What the uncertainty is made of: one line a cause, independent of each other.
    pub contributions: Vec<Contribution>,
}

/// One term of a quantity that is a sum of others.
#[derive(Clone, Copy, Debug)]
pub struct Term<'q> {
    /// How often it counts; negative where it is taken off.
    pub factor: f64,
    /// What it is called in the lines that are its own.
    pub title: &'q str,
    /// The quantity.
    pub quantity: &'q Quantity,
}

/// A line below this part of the rest moves the standard uncertainty by less than a thousandth.
const NEGLIGIBLE: f64 = 0.04;

impl Quantity {
    /// Combines contributions: those of one cause by their signed sum, independent ones by the root of the sum of
    /// squares (JCGM 100:2008, 5.2.2 and 5.1.2).
    pub fn new(name: QuantityName, value: f64, contributions: Vec<Contribution>) -> Self {
        let mut lines: Vec<Contribution> = Vec::with_capacity(contributions.len());
        for part in contributions {
            match lines.iter_mut().find(|line| line.cause.is_some() && line.cause == part.cause) {
                Some(line) => line.absorb(&part),
                None => lines.push(part),
            }
        }
        let variance: f64 = lines.iter().map(|line| line.standard_uncertainty.powi(2)).sum();
        Self { name, value, standard_uncertainty: variance.sqrt(), contributions: lines }
    }

    /// A quotient, whose lines say which of them are the divisor's. What those do beyond proportion is a line of its own.
    pub fn quotient(name: QuantityName, value: f64, contributions: Vec<Contribution>) -> Self {
        let mut quantity = Self::new(name, value, contributions);
        let whole =
            quantity.as_quotient().map_or(quantity.standard_uncertainty, |it| it.standard_uncertainty());
        let linear = quantity.standard_uncertainty;
        let curved = (whole.powi(2) - linear.powi(2)).max(0.0).sqrt();
        if curved > NEGLIGIBLE * linear {
            let line = Contribution::normal("what is not in proportion", curved);
            quantity.contributions.push(line.entering(Role::Curvature));
            quantity.standard_uncertainty = whole;
        }
        quantity
    }

    /// The sum of `terms`, correlation kept. Lines without a cause keep the title of their term.
    pub fn sum(name: QuantityName, terms: &[Term<'_>]) -> Self {
        let value = terms.iter().map(|term| term.factor * term.quantity.value).sum();
        let line = |term: &Term<'_>, part: &Contribution| {
            let mut line = part.times(term.factor, term.quantity.name.unit());
            if line.cause.is_none() {
                line.source = format!("{}: {}", term.title, line.source);
            }
            line
        };
        let lines = terms
            .iter()
            .flat_map(|term| term.quantity.contributions.iter().map(move |part| line(term, part)));
        Self::new(name, value, lines.collect())
    }

    /// Covariance with another quantity of the same run, in the product of their units (JCGM 100:2008, 5.2.2): what they
    /// owe to the same causes. With itself, the whole variance.
    pub fn covariance(&self, other: &Self) -> f64 {
        if self.name == other.name {
            return self.standard_uncertainty * other.standard_uncertainty;
        }
        let shared = |line: &Contribution| {
            let cause = line.cause?;
            let twin = other.contributions.iter().find(|other| other.cause == Some(cause))?;
            Some(line.signed() * twin.signed())
        };
        self.contributions.iter().filter_map(shared).sum()
    }

    /// Share of the variance that a line makes, as a fraction of one.
    pub fn share(&self, line: &Contribution) -> f64 {
        if self.standard_uncertainty > 0.0 {
            (line.standard_uncertainty / self.standard_uncertainty).powi(2)
        } else {
            0.0
        }
    }

    /// The line that makes most of the uncertainty.
    pub fn largest(&self) -> Option<&Contribution> {
        self.contributions.iter().max_by(|a, b| a.standard_uncertainty.total_cmp(&b.standard_uncertainty))
    }

    /// The influences, as the distribution of the error takes them; one bell where there is no budget.
    pub fn influences(&self) -> Vec<Influence> {
        if self.contributions.is_empty() && self.standard_uncertainty > 0.0 {
            return vec![Influence::normal(self.standard_uncertainty)];
        }
        self.contributions.iter().map(Contribution::influence).collect()
    }

    /// Half the width of the symmetric interval that holds the true value with `probability`, from how the error is
    /// spread (JCGM 100:2008, 6.2.1).
    pub fn expanded_uncertainty(&self, probability: f64) -> f64 {
        Spread::of(self).coverage_factor(probability) * self.standard_uncertainty
    }

    /// The quotient it is; `None` where nothing divides.
    pub(super) fn as_quotient(&self) -> Option<Quotient> {
        let of = |role: Role| -> Vec<Influence> {
            let lines = self.contributions.iter().filter(|line| line.role == role);
            lines.map(Contribution::influence).collect()
        };
        let divisor = of(Role::Divisor);
        (!divisor.is_empty()).then(|| Quotient::new(self.value, of(Role::Addend), divisor))
    }

    /// Effective degrees of freedom of the combined standard uncertainty (Welch-Satterthwaite, JCGM 100:2008, G.4.1);
    /// `None` where they are infinite.
    pub fn effective_degrees_of_freedom(&self) -> Option<f64> {
        welch_satterthwaite(&self.influences()).filter(|degrees| degrees.is_finite())
    }

    /// The unit of value and uncertainty.
    pub fn unit(&self) -> Unit {
        self.name.unit()
    }
}
