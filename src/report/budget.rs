//! The uncertainty budget of every quantity as a table, in the layout of EA-4/02 and JCGM 100:2008, H.1.6.

use super::columns::aligned;
use super::words;
use crate::units::{Unit, prefixed, with_decimals_of};
use crate::verdict::{BudgetLine, Judged, budget};

/// A heading and a table for each quantity, ending with a newline; empty where there is none.
pub fn budgets(quantities: &[Judged]) -> String {
    let tables: Vec<String> = quantities.iter().map(table).collect();
    tables.join("\n")
}

fn table(judged: &Judged) -> String {
    let heading = ["influence", "estimate", "u(x)", "distribution", "nu", "c", "|c| u(x)", "share"];
    let mut rows = vec![heading.map(str::to_owned).to_vec()];
    let unit = judged.quantity.unit();
    // What cancels or does not act contributes exactly nothing and is no news; the record and the JSON keep it.
    let lines = budget(&judged.quantity);
    rows.extend(lines.iter().filter(|line| line.contribution != 0.0).map(|line| row(line, unit)));
    rows.push(total(judged));
    format!("{}\n{}\n{}\n", title(judged), aligned(&rows).join("\n"), conclusion(judged))
}

/// `Budget of the trip voltage, 6.00042 V`
fn title(judged: &Judged) -> String {
    let quantity = &judged.quantity;
    let (value, _, unit) = with_decimals_of(quantity.value, quantity.standard_uncertainty, quantity.unit());
    format!("Budget of the {}, {value} {unit}", quantity.name.title())
}

fn row(line: &BudgetLine, unit: Unit) -> Vec<String> {
    vec![
        line.source.clone(),
        line.estimate.map_or_else(|| "-".to_owned(), |estimate| estimated(estimate, line.unit)),
        spread(line.standard_uncertainty, line.unit),
        words::shape(line.distribution),
        degrees(line.degrees_of_freedom),
        sensitivity(line, unit),
        spread(line.contribution, unit),
        format!("{:.1} %", 100.0 * line.share),
    ]
}

fn total(judged: &Judged) -> Vec<String> {
    let quantity = &judged.quantity;
    let empty = String::new;
    let combined = spread(quantity.standard_uncertainty, quantity.unit());
    let degrees = degrees(quantity.effective_degrees_of_freedom());
    vec!["together".to_owned(), empty(), empty(), empty(), degrees, empty(), combined, "100.0 %".to_owned()]
}

/// `U = 0.00099 V with k = 1.68, which covers the true value with 95 %.`
fn conclusion(judged: &Judged) -> String {
    let expanded = spread(judged.expanded_uncertainty(), judged.quantity.unit());
    let covers = judged.coverage_probability.map_or_else(String::new, |probability| {
        format!(", which covers the true value with {}", words::percent(probability))
    });
    format!("U = {expanded} with k = {}{covers}.", words::factor(judged.coverage_factor))
}

/// An estimate; an error nobody corrected is just zero.
fn estimated(estimate: f64, unit: Unit) -> String {
    if estimate == 0.0 { "0".to_owned() } else { prefixed(estimate, unit) }
}

/// An uncertainty with two significant digits (JCGM 100:2008, 7.2.6).
fn spread(uncertainty: f64, unit: Unit) -> String {
    if uncertainty == 0.0 {
        return "0".to_owned();
    }
    let (number, _, unit) = with_decimals_of(uncertainty, uncertainty, unit);
    format!("{number} {unit}")
}

/// Degrees of freedom, cut down to whole ones (JCGM 100:2008, G.4.1); what is known exactly has no end of them.
fn degrees(degrees: Option<f64>) -> String {
    let few = degrees.filter(|degrees| *degrees < AS_GOOD_AS_EXACT);
    few.map_or_else(|| "inf".to_owned(), |degrees| format!("{:.0}", degrees.floor()))
}

/// More degrees of freedom than this are told from infinite ones by no coverage factor's second decimal.
const AS_GOOD_AS_EXACT: f64 = 10_000.0;

/// `6.000 V` for a share, `1` for what counts in full, `-0.1091 V/Ω` for the rest.
fn sensitivity(line: &BudgetLine, unit: Unit) -> String {
    if line.unit == Unit::Percent {
        return prefixed(line.sensitivity, unit);
    }
    if line.unit == unit {
        return format!("{:.4}", line.sensitivity).trim_end_matches('0').trim_end_matches('.').to_owned();
    }
    format!("{}/{}", prefixed(line.sensitivity, unit), line.unit.symbol())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::{Contribution, Quantity};
    use crate::profile::QuantityName;

    #[test]
    fn what_contributes_nothing_has_no_row() {
        let lines = vec![
            Contribution::rectangular("bracket", 1e-3),
            Contribution::normal("noise at the detector", 0.0),
            Contribution::rectangular("voltmeter offset", 5e-5).through(0.0, Unit::Volt),
        ];
        let quantity = Quantity::new(QuantityName::Hysteresis, 0.4, lines);
        assert_eq!(budget(&quantity).len(), 3, "all are kept");
        let text = table(&Judged::new(quantity, None));
        assert!(text.contains("bracket") && text.contains("together"), "{text}");
        assert!(!text.contains("noise") && !text.contains("offset"), "{text}");
    }
}
