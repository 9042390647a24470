//! Temperatures and loads of a study: as ordered, and as measured where a file says so.

use super::{TEMPERATURES, distinct};
use crate::cli::Failure;
use crate::document::{Document, Problems, Table};
use crate::profile::Profile;
use crate::units::{Celsius, Ohms, Quantity};

/// What was ordered, and what was measured of it.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Conditions {
    temperatures: Vec<Condition<Celsius>>,
    loads: Vec<Condition<Ohms>>,
}

/// One temperature or load.
#[derive(Clone, Copy, Debug, PartialEq)]
struct Condition<Q> {
    nominal: Q,
    measured: Option<Q>,
}

impl Conditions {
    /// As the command line says; whoever stands at the bench will be asked what was measured.
    pub(super) fn as_ordered(temperatures: &[Celsius], loads: &[Ohms], profile: &Profile) -> Self {
        fn ordered<Q: Copy + PartialEq>(values: &[Q]) -> Vec<Condition<Q>> {
            distinct(values).into_iter().map(|nominal| Condition { nominal, measured: None }).collect()
        }
        Self { temperatures: ordered(temperatures), loads: ordered(loads) }.with_load_of(profile)
    }

    /// As a file says. What it gives no measured value for is as ordered.
    pub(super) fn read(name: &str, text: &str, profile: &Profile) -> Result<Self, Problems> {
        let conditions = Document::new(name, text).read(|root| {
            root.integer_choice("schema", &[(1, ())])?;
            let temperatures = list(root, "temperature", |table: &Table<'_, '_>, at| {
                if !(TEMPERATURES.0..=TEMPERATURES.1).contains(&at.value) {
                    table.problem(at, "wanted the temperature of a board");
                }
            });
            let loads = list(root, "load", |table: &Table<'_, '_>, at: &crate::document::At<Ohms>| {
                if at.value <= Ohms::ZERO {
                    table.problem(at, "wanted more than nothing");
                }
            });
            Some(Self { temperatures, loads })
        })?;
        Ok(conditions.with_load_of(profile))
    }

    fn with_load_of(mut self, profile: &Profile) -> Self {
        if self.loads.is_empty() {
            let nominal = profile.load.resistance;
            self.loads.push(Condition { nominal, measured: Some(nominal) });
        }
        self
    }

    /// For the plan; `None` for the room as it is.
    pub(super) fn temperatures(&self) -> Vec<Option<Celsius>> {
        if self.temperatures.is_empty() {
            return vec![None];
        }
        self.temperatures.iter().map(|condition| Some(condition.nominal)).collect()
    }

    /// For the plan.
    pub(super) fn loads(&self) -> Vec<Ohms> {
        self.loads.iter().map(|condition| condition.nominal).collect()
    }

    /// What a file says was measured of a temperature of the plan.
    pub(super) fn measured_temperature(&self, index: usize) -> Option<Celsius> {
        self.temperatures.get(index)?.measured
    }

    /// The same of a load.
    pub(super) fn measured_load(&self, index: usize) -> Option<Ohms> {
        self.loads.get(index)?.measured
    }

    /// A load must stay within the current limit and the power that the profile's load may take.
    pub(super) fn refuse_unfit_loads(&self, profile: &Profile) -> Result<(), Failure> {
        let supply = &profile.supply;
        for load in self.loads() {
            let current = supply.maximum / (load * (1.0 - profile.load.tolerance));
            let power = supply.maximum * (supply.maximum / load);
            if current >= supply.current_limit {
                return Err(anyhow::anyhow!(
                    "a load of {load} draws up to {current} at the profile's maximum, {}, and the current limit is {}; \
                     take a larger resistance or raise supply.current_limit",
                    supply.maximum,
                    supply.current_limit
                )
                .into());
            }
            if power > profile.load.rating {
                return Err(anyhow::anyhow!(
                    "a load of {load} takes {power} at the profile's maximum, {}, and its rating is {}; take a larger \
                     resistance, or one of more power and raise load.rating",
                    supply.maximum,
                    profile.load.rating
                )
                .into());
            }
        }
        Ok(())
    }
}

/// The tables `[[key]]`, each with a nominal value and perhaps a measured one.
fn list<Q: Quantity>(
    root: &mut Table<'_, '_>,
    key: &str,
    check: impl Fn(&Table<'_, '_>, &crate::document::At<Q>),
) -> Vec<Condition<Q>> {
    let mut conditions = Vec::new();
    for mut table in root.optional_tables(key) {
        let nominal = table.quantity::<Q>("nominal");
        let measured = table.optional_quantity::<Q>("measured");
        nominal.iter().chain(&measured).for_each(|at| check(&table, at));
        if let Some(nominal) = nominal {
            let measured = measured.map_or(nominal.value, |at| at.value);
            conditions.push(Condition { nominal: nominal.value, measured: Some(measured) });
        }
    }
    conditions
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::cli::files::river_node;

    fn profile() -> Profile {
        river_node().unwrap_or_else(|failure| panic!("{}", failure.error))
    }

    #[test]
    fn a_file_says_what_was_measured() {
        let text = "schema = 1\n[[temperature]]\nnominal = \"-20 degC\"\nmeasured = \"-19.7 degC\"\n\
                    [[temperature]]\nnominal = \"60 degC\"\n";
        let read = Conditions::read("c.toml", text, &profile()).expect("a good file");
        assert_eq!(read.temperatures(), [Some(Celsius(-20.0)), Some(Celsius(60.0))]);
        assert_eq!(read.measured_temperature(0), Some(Celsius(-19.7)));
        assert_eq!(read.measured_temperature(1), Some(Celsius(60.0)));
        assert_eq!((read.loads(), read.measured_load(0)), (vec![Ohms(55.0)], Some(Ohms(55.0))));
    }

    #[test]
    fn mistakes_are_shown_at_their_place() {
        let text = "schema = 1\n[[temperature]]\nnominal = \"900 degC\"\n[[load]]\nmeasured = \"5 V\"\n";
        let problems = Conditions::read("c.toml", text, &profile()).expect_err("mistakes").to_string();
        for phrase in ["wanted the temperature of a board", "has no key \"nominal\"", "which is a voltage"] {
            assert!(problems.contains(phrase), "no {phrase:?} in {problems}");
        }
    }

    /// 8.4 V in 20 ohm are 420 mA; in 30 ohm 280 mA, but 2.35 W are within 3 W.
    #[test]
    fn loads_beyond_current_limit_or_rating_are_refused() {
        let fit =
            |ohms| Conditions::as_ordered(&[], &[Ohms(ohms)], &profile()).refuse_unfit_loads(&profile());
        assert!(fit(30.0).is_ok());
        let failure = fit(20.0).expect_err("too much current");
        assert!(failure.error.to_string().contains("draws up to 424.2 mA"), "{}", failure.error);
        let mut small = profile();
        small.load.rating = crate::units::Watts(2.0);
        let failure = Conditions::as_ordered(&[], &[Ohms(30.0)], &small).refuse_unfit_loads(&small);
        assert!(failure.is_err_and(|failure| failure.error.to_string().contains("its rating is 2.000 W")));
    }
}
