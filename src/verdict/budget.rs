//! The uncertainty budget of a quantity in the layout of EA-4/02 and JCGM 100:2008, H.1.6: a line an influence.

use crate::analysis::{Quantity, Shape};
use crate::units::Unit;
use serde::{Deserialize, Serialize};

/// One line of a budget, as it stands in the results of the commands.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct BudgetLine {
    /// The influence.
    pub source: String,
    /// Its best estimate, in `unit`; absent where there is none to speak of.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub estimate: Option<f64>,
    /// u(x): its standard uncertainty, in `unit`.
    pub standard_uncertainty: f64,
    /// Its SI unit; `1` for a ratio.
    pub unit: Unit,
    /// How its values are spread.
    pub distribution: Shape,
    /// Degrees of freedom; absent where the uncertainty is known exactly.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub degrees_of_freedom: Option<f64>,
    /// c: change of the quantity per change of the influence, signed.
    pub sensitivity: f64,
    /// |c| u(x), in the quantity's unit.
    pub contribution: f64,
    /// Share of the variance, as a fraction of one.
    pub share: f64,
}

/// The budget of `quantity`, in the order in which it was put together.
pub fn budget(quantity: &Quantity) -> Vec<BudgetLine> {
    let lines = quantity.contributions.iter().map(|line| BudgetLine {
        source: line.source.clone(),
        estimate: line.input.and_then(|input| input.estimate),
        standard_uncertainty: line.input_uncertainty(),
        unit: line.input.map_or(quantity.unit(), |input| input.unit),
        distribution: line.shape,
        degrees_of_freedom: line.degrees_of_freedom,
        sensitivity: line.sensitivity(),
        contribution: line.standard_uncertainty,
        share: quantity.share(line),
    });
    lines.collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::Contribution;
    use crate::profile::QuantityName;

    #[test]
    fn a_line_says_what_an_engineer_looks_for_and_the_shares_add_up() {
        let lines = vec![
            Contribution::rectangular("gain", 0.001).through(6.0, Unit::Percent).estimated(0.0),
            Contribution::scatter("scatter", 0.002, 4.0),
        ];
        let quantity = Quantity::new(QuantityName::Trip, 6.0, lines);
        let budget = budget(&quantity);
        let text = serde_json::to_value(&budget).expect("plain data");
        assert_eq!(text[0]["unit"], "1");
        assert_eq!(text[0]["distribution"], "rectangular");
        assert_eq!(text[1]["unit"], "V");
        assert_eq!(text[1]["degrees_of_freedom"], 4.0);
        assert!(text[1].get("estimate").is_none());
        assert!((budget[0].contribution - 0.006 / 3.0_f64.sqrt()).abs() < 1e-12);
        assert!((budget.iter().map(|line| line.share).sum::<f64>() - 1.0).abs() < 1e-12);
        assert_eq!(serde_json::from_value::<Vec<BudgetLine>>(text).expect("its own text"), budget);
    }
}
