//! A judged quantity as one flat line, as it stands in the results of the commands.

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
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::Quantity;
    use crate::profile::Limit;

    #[test]
    fn a_judged_quantity_is_written_flat_and_read_back() {
        let quantity = Quantity {
            name: QuantityName::Trip,
            value: 6.0004,
            standard_uncertainty: 0.0008,
            contributions: Vec::new(),
        };
        let limit = Limit { at: None, min: Some(5.88), max: Some(6.12) };
        let line = QuantityLine::from(&Judged::new(quantity, Some(limit)));
        let text = serde_json::to_string(&line).expect("plain data");
        assert_eq!(
            text,
            r#"{"name":"trip","value":6.0004,"unit":"V","standard_uncertainty":0.0008,"coverage_factor":2.0,"expanded_uncertainty":0.0016,"min":5.88,"max":6.12,"decision":"pass"}"#
        );
        assert_eq!(serde_json::from_str::<QuantityLine>(&text).expect("its own text"), line);
    }
}
