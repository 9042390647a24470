//! A judged quantity as one flat line, as it stands in the results of the commands.

use super::budget::{BudgetLine, budget};
use super::{Decision, Judged};
use crate::profile::QuantityName;
use crate::units::Volts;
use serde::{Deserialize, Serialize};

/// One quantity of a run with its limits and decision; numbers in the unit named.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct QuantityLine {
    /// Which quantity.
    pub name: QuantityName,
    /// Best estimate.
    pub value: f64,
    /// Symbol of the SI unit, in ASCII.
    pub unit: String,
    /// Combined standard uncertainty.
    pub standard_uncertainty: f64,
    /// Coverage factor k.
    pub coverage_factor: f64,
    /// k times the standard uncertainty.
    pub expanded_uncertainty: f64,
    /// Voltage at which the limit wants it measured.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub at: Option<Volts>,
    /// Lowest value allowed.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub min: Option<f64>,
    /// Highest value allowed.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub max: Option<f64>,
    /// The decision; absent where no limit is set.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub decision: Option<Decision>,
    /// Probability with which the expanded uncertainty covers the true value; absent in old records.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub coverage_probability: Option<f64>,
    /// Effective degrees of freedom; absent where they are infinite.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub effective_degrees_of_freedom: Option<f64>,
    /// Width of the guard band on either side of a limit that the decision was made with.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub guard_band: Option<f64>,
    /// Probability that the decision is wrong: that a value found inside its limits lies outside, or the other way round.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub risk: Option<f64>,
    /// What the uncertainty is made of.
    #[serde(default)]
    pub budget: Vec<BudgetLine>,
}

impl From<&Judged> for QuantityLine {
    fn from(judged: &Judged) -> Self {
        let limit = judged.limit.unwrap_or_default();
        Self {
            name: judged.quantity.name,
            value: judged.quantity.value,
            unit: judged.quantity.name.unit().ascii().to_owned(),
            standard_uncertainty: judged.quantity.standard_uncertainty,
            coverage_factor: judged.coverage_factor,
            expanded_uncertainty: judged.expanded_uncertainty(),
            at: limit.at,
            min: limit.min,
            max: limit.max,
            decision: judged.decision,
            coverage_probability: judged.coverage_probability,
            effective_degrees_of_freedom: judged.quantity.effective_degrees_of_freedom(),
            guard_band: judged.guard_band,
            risk: judged.risk,
            budget: budget(&judged.quantity),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::{Contribution, Quantity};
    use crate::profile::Limit;

    #[test]
    fn a_judged_quantity_is_written_flat_and_read_back() {
        let part = Contribution::normal("last digit", 0.0008);
        let quantity = Quantity::new(QuantityName::Trip, 6.0004, vec![part]);
        let limit = Limit { at: None, min: Some(5.88), max: Some(6.12) };
        let judged = Judged { coverage_factor: 2.0, ..Judged::new(quantity, Some(limit)) };
        let line = QuantityLine { guard_band: None, risk: Some(0.0), ..QuantityLine::from(&judged) };
        let text = serde_json::to_string(&line).expect("plain data");
        assert_eq!(
            text,
            r#"{"name":"trip","value":6.0004,"unit":"V","standard_uncertainty":0.0008,"coverage_factor":2.0,"expanded_uncertainty":0.0016,"min":5.88,"max":6.12,"decision":"pass","coverage_probability":0.95,"risk":0.0,"budget":[{"source":"last digit","standard_uncertainty":0.0008,"unit":"V","distribution":"normal","sensitivity":1.0,"contribution":0.0008,"share":1.0}]}"#
        );
        assert_eq!(serde_json::from_str::<QuantityLine>(&text).expect("its own text"), line);
    }

    #[test]
    fn a_line_of_an_old_record_is_still_read() {
        let text = r#"{"name":"trip","value":6.0,"unit":"V","standard_uncertainty":0.0008,"coverage_factor":2.0,"expanded_uncertainty":0.0016}"#;
        let line: QuantityLine = serde_json::from_str(text).expect("an old line");
        assert_eq!((line.coverage_probability, line.risk, line.budget.len()), (None, None, 0));
    }
}
