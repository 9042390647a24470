//! New limits in a hand-written profile. Everything else stays as it was written, comments and columns included.

use super::{Profile, QuantityName};
use crate::document::Problems;
use crate::units::{Quantity, Unit, Volts};
use toml_edit::{DocumentMut, InlineTable, Item, TableLike, Value, value};

/// New limits of one quantity.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct NewLimit {
    /// Which.
    pub name: QuantityName,
    /// Lower limit.
    pub min: Volts,
    /// Upper limit.
    pub max: Volts,
}

/// Why a profile was not rewritten.
#[derive(Debug, thiserror::Error)]
pub enum RewriteError {
    /// The text is not TOML.
    #[error("{name} is not TOML: {source}")]
    NotToml {
        /// The file.
        name: String,
        /// What is wrong.
        source: toml_edit::TomlError,
    },
    /// There is no table to write into.
    #[error("{name} has no table [limits] to write into")]
    NoLimits {
        /// The file.
        name: String,
    },
    /// The profile would contradict itself.
    #[error("the new limits do not fit the rest of {name}; nothing was written. It would be:\n{problems}")]
    Contradiction {
        /// The file.
        name: String,
        /// What would be wrong, with lines of the text as it would be.
        problems: Problems,
    },
}

/// The `text` of the profile called `name` with `limits` in place of those it has, checked as any profile is.
///
/// # Errors
/// See [`RewriteError`].
pub fn with_limits(name: &str, text: &str, limits: &[NewLimit]) -> Result<String, RewriteError> {
    let file = || name.to_owned();
    let mut document: DocumentMut =
        text.parse().map_err(|source| RewriteError::NotToml { name: file(), source })?;
    let table = document.get_mut("limits").and_then(Item::as_table_like_mut);
    let table = table.ok_or_else(|| RewriteError::NoLimits { name: file() })?;
    for limit in limits {
        set(table, limit);
    }
    // toml_edit writes bare line feeds whatever it read.
    let line_end = if text.contains("\r\n") { "\r\n" } else { "\n" };
    let text = document.to_string().replace('\n', line_end);
    match Profile::read(name, &text) {
        Ok(_) => Ok(text),
        Err(problems) => Err(RewriteError::Contradiction { name: file(), problems }),
    }
}

fn set(table: &mut dyn TableLike, limit: &NewLimit) {
    let key = limit.name.key();
    if table.get(key).and_then(Item::as_table_like).is_none() {
        table.insert(key, value(InlineTable::new()));
    }
    if let Some(ends) = table.get_mut(key).and_then(Item::as_table_like_mut) {
        put(ends, "min", limit.min);
        put(ends, "max", limit.max);
    }
}

/// Puts a value where one stands, with the spaces and comments around it, or at the end.
fn put(table: &mut dyn TableLike, key: &str, volts: Volts) {
    let new = Value::from(written(volts));
    match table.get_mut(key).and_then(Item::as_value_mut) {
        Some(old) => {
            let around = old.decor().clone();
            *old = new;
            *old.decor_mut() = around;
        }
        None => {
            table.insert(key, Item::Value(new));
        }
    }
}

/// `5.880 V`, `303 mV`: as people write limits.
fn written(volts: Volts) -> String {
    let millivolts = volts.si() * 1e3;
    // Limits are whole millivolts or tenths; what binary fractions add is no digit.
    let tenths = (millivolts * 10.0).round();
    let decimals = usize::from(tenths % 10.0 != 0.0);
    if volts.si().abs() < 1.0 {
        format!("{millivolts:.decimals$} m{}", Unit::Volt.symbol())
    } else {
        format!("{:.*} {}", 3 + decimals, volts.si(), Unit::Volt.symbol())
    }
}

#[cfg(test)]
mod tests {
    use super::super::sample::RIVER_NODE;
    use super::*;
    use insta::assert_snapshot as says;

    fn limit(name: QuantityName, min: f64, max: f64) -> NewLimit {
        NewLimit { name, min: Volts(min), max: Volts(max) }
    }

    fn rewritten(text: &str, limits: &[NewLimit]) -> String {
        with_limits("p.toml", text, limits).unwrap_or_else(|error| panic!("{error}"))
    }

    #[test]
    fn only_the_values_change() {
        let new = [limit(QuantityName::Trip, 5.89, 6.1105), limit(QuantityName::Hysteresis, 0.31, 0.4805)];
        let text = rewritten(RIVER_NODE, &new);
        let expected = RIVER_NODE
            .replace("min = \"5.88 V\", max = \"6.12 V\"", "min = \"5.890 V\", max = \"6.1105 V\"")
            .replace("min = \"300 mV\", max = \"500 mV\"", "min = \"310 mV\", max = \"480.5 mV\"");
        assert_eq!(text, expected);
    }

    #[test]
    fn a_limit_that_is_not_there_yet_is_added() {
        let without =
            RIVER_NODE.replace("hysteresis  = { min = \"300 mV\", max = \"500 mV\" }        #", "#");
        let one_sided = without.replace("{ min = \"6.24 V\", max", "{ max");
        // A search needs both ends of the window; a staircase does not.
        let staircase = one_sided.replace("mode = \"search\"", "mode = \"staircase\"");
        let new = [limit(QuantityName::ReEnable, 6.25, 6.5), limit(QuantityName::Hysteresis, 0.31, 0.48)];
        let text = rewritten(&staircase, &new);
        let profile = Profile::read("p.toml", &text).expect("checked already");
        assert_eq!(profile.limits[&QuantityName::ReEnable].min, Some(6.25));
        assert_eq!(profile.limits[&QuantityName::Hysteresis].max, Some(0.48));
        assert!(text.contains("hysteresis = { min = \"310 mV\", max = \"480 mV\" }"), "{text}");
        assert_eq!(
            text.matches('#').count(),
            RIVER_NODE.matches('#').count(),
            "every comment is still there"
        );
    }

    #[test]
    fn limits_in_tables_of_their_own_are_found() {
        let text = RIVER_NODE
            .replace("trip        = { min = \"5.88 V\", max = \"6.12 V\" }        # falling", "# falling")
            .replace(
                "\n# What the two",
                "\n[limits.trip]  # here\nmin = \"5.88 V\" # low\nmax = \"6.12 V\"\n\n# What the two",
            );
        let text = rewritten(&text, &[limit(QuantityName::Trip, 5.9, 6.1)]);
        assert!(
            text.contains("[limits.trip]  # here\nmin = \"5.900 V\" # low\nmax = \"6.100 V\"\n"),
            "{text}"
        );
    }

    #[test]
    fn line_ends_of_another_system_stay() {
        let dos = RIVER_NODE.replace('\n', "\r\n");
        let text = rewritten(&dos, &[limit(QuantityName::Trip, 5.89, 6.11)]);
        assert_eq!(text.matches("\r\n").count(), dos.matches("\r\n").count());
        assert_eq!(text.matches('\n').count(), dos.matches('\n').count());
    }

    #[test]
    fn limits_that_contradict_the_supply_are_refused_with_their_place() {
        let error =
            with_limits("p.toml", RIVER_NODE, &[limit(QuantityName::ReEnable, 6.2, 7.7)]).expect_err("above");
        let RewriteError::Contradiction { problems, .. } = &error else { panic!("{error}") };
        says!(problems.lines().collect::<Vec<_>>().join("\n"), @r#"p.toml:40:40: limits.re_enable.max = "7.700 V": not below supply.start = "7.60 V"; the ramp must pass the whole re-enable window"#);
        assert!(error.to_string().contains("nothing was written"), "{error}");
    }

    #[test]
    fn a_file_that_is_no_toml_is_named() {
        let error = with_limits("p.toml", "[limits", &[]).expect_err("broken");
        assert!(error.to_string().starts_with("p.toml is not TOML"), "{error}");
        let error = with_limits("p.toml", "a = 1\n", &[]).expect_err("no limits");
        assert_eq!(error.to_string(), "p.toml has no table [limits] to write into");
    }
}
