//! A reference board: one whose values are known, measured to show that the bench still finds them.
//!
//! ```toml
//! schema = 1                          # version of this format
//! serial_number = "RN900001"
//! title = "Reference board 1, good"   # for people
//! must = "pass"                       # or "fail": a board known to be bad, which the bench must find so
//! fails = ["off_current"]             # of a bad board, what must fail; may be left out
//! allowed_drift = "30 %"              # of half the width of a limit; may be left out
//!
//! [values]                            # with the expanded uncertainty, k = 2, from the board's own calibration
//! trip = { value = "6.0031 V", expanded_uncertainty = "2 mV" }
//! ```

use crate::document::{Document, Problems, Table};
use crate::profile::QuantityName;
use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;

/// A board whose values are known.
#[derive(Clone, Debug, PartialEq)]
pub struct Reference {
    /// Its serial number.
    pub serial_number: String,
    /// What it is, for people.
    pub title: String,
    /// What a bench in order makes of it.
    pub must: Must,
    /// What must fail on a board that must fail.
    pub fails: Vec<QuantityName>,
    /// Drift allowed, as a share of half the width of the limits.
    pub allowed_drift: f64,
    /// Its values in SI units.
    pub values: BTreeMap<QuantityName, KnownValue>,
}

/// What a bench in order makes of a reference board.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Must {
    /// It passes.
    Pass,
    /// It fails. A bench that passes it lets bad boards through.
    Fail,
}

/// A value with its expanded uncertainty, k = 2, in SI units.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct KnownValue {
    /// The value.
    pub value: f64,
    /// Its expanded uncertainty.
    pub expanded_uncertainty: f64,
}

/// Drift that is commonly allowed before a bench is locked.
const ALLOWED_DRIFT: f64 = 0.3;

impl Reference {
    /// Reads and checks the file called `name`.
    ///
    /// # Errors
    /// Every problem of the file.
    pub fn read(name: &str, text: &str) -> Result<Self, Problems> {
        Document::new(name, text).read(read)
    }
}

fn read(root: &mut Table<'_, '_>) -> Option<Reference> {
    root.integer_choice("schema", &[(1, ())]);
    let serial_number = root.text("serial_number");
    let title = root.text("title");
    let must = root.choice("must", &[("pass", Must::Pass), ("fail", Must::Fail)]);
    let fails = read_fails(root, must.as_ref().map(|must| must.value));
    let allowed_drift = root.optional_fraction("allowed_drift");
    let values = root.table("values").map(read_values);
    if let Some(drift) = &allowed_drift
        && drift.value <= 0.0
    {
        root.problem(drift, "not above zero");
    }
    Some(Reference {
        serial_number: serial_number?.value,
        title: title?.value,
        must: must?.value,
        fails,
        allowed_drift: allowed_drift.map_or(ALLOWED_DRIFT, |drift| drift.value),
        values: values?,
    })
}

fn read_fails(root: &mut Table<'_, '_>, must: Option<Must>) -> Vec<QuantityName> {
    let Some(list) = root.optional_texts("fails") else { return Vec::new() };
    if must == Some(Must::Pass) {
        root.problem(&list, "nothing may fail on a board that must pass");
    }
    let mut names = Vec::new();
    for word in &list.value {
        match QuantityName::ALL.into_iter().find(|name| name.key() == word.value) {
            Some(name) => names.push(name),
            None => root.problem(word, "no such quantity; wanted one such as \"trip\" or \"off_current\""),
        }
    }
    names
}

fn read_values(mut table: Table<'_, '_>) -> BTreeMap<QuantityName, KnownValue> {
    let mut values = BTreeMap::new();
    for name in QuantityName::ALL {
        let Some(mut entry) = table.optional_table(name.key()) else { continue };
        let value = entry.optional_value("value", name.unit());
        let expanded = entry.optional_value("expanded_uncertainty", name.unit());
        match (&value, &expanded) {
            (Some(_), Some(expanded)) if expanded.value > 0.0 => {}
            (Some(_), Some(expanded)) => entry.problem(expanded, "not above zero"),
            _ => entry
                .problem_here(format!("values.{} needs \"value\" and \"expanded_uncertainty\"", name.key())),
        }
        if let (Some(value), Some(expanded)) = (value, expanded) {
            values.insert(name, KnownValue { value: value.value, expanded_uncertainty: expanded.value });
        }
    }
    if values.is_empty() {
        table.problem_here(
            "no value is known; wanted one such as trip = { value = ..., expanded_uncertainty = ... }"
                .to_owned(),
        );
    }
    values
}

#[cfg(test)]
pub(super) mod tests {
    use super::*;

    const FILE: &str = "schema = 1\nserial_number = \"RN900001\"\ntitle = \"good\"\nmust = \"pass\"\n[values]\n\
                        trip = { value = \"6.000 V\", expanded_uncertainty = \"2 mV\" }\n";

    pub(in crate::verification) fn reference(changes: &[(&str, &str)]) -> Result<Reference, String> {
        let text = changes.iter().fold(FILE.to_owned(), |text, (from, to)| {
            assert!(text.contains(from), "no {from}");
            text.replacen(from, to, 1)
        });
        Reference::read("r.toml", &text).map_err(|problems| problems.lines().collect::<Vec<_>>().join("\n"))
    }

    #[test]
    fn the_shipped_example_is_read_as_written() {
        let text = include_str!("../../instruments/references/river-node-good.toml");
        let example = Reference::read("example", text).unwrap_or_else(|problems| panic!("{problems}"));
        assert_eq!((example.must, example.values.len()), (Must::Pass, 4));
        assert!((example.allowed_drift - 0.3).abs() < 1e-12);
        let off_current = example.values[&QuantityName::OffCurrent];
        assert_eq!(off_current, KnownValue { value: 2.48e-6, expanded_uncertainty: 40e-9 });
    }

    #[test]
    fn what_cannot_be_is_refused_at_its_place() {
        for (from, to, phrase) in [
            ("\"pass\"", "\"pass\"\nfails = [\"trip\"]", "nothing may fail on a board that must pass"),
            ("\"pass\"", "\"fail\"\nfails = [\"tripp\"]", "no such quantity"),
            ("\"2 mV\"", "\"0 mV\"", "not above zero"),
            (", expanded_uncertainty = \"2 mV\"", "", "needs \"value\" and \"expanded_uncertainty\""),
            ("\"2 mV\"", "\"2 mA\"", "which is a current, wanted a voltage"),
            ("trip = ", "trips = ", "unknown key \"trips\""),
        ] {
            let told = reference(&[(from, to)]).expect_err(phrase);
            assert!(told.contains(phrase), "no {phrase:?} in {told}");
        }
    }
}
