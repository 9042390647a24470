//! How often the test will be wrong, over a whole production (global risks, JCGM 106:2012, 9.5).

use super::sets::LimitSets;
use super::window::Window;
use crate::statistics::risk::{GlobalRisk, Interval, Process, global_risk};

/// Risks of a quantity's test limits; the production and the measuring error are taken as normal.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Risks {
    /// With the guard band.
    pub guarded: GlobalRisk,
    /// The same without one, for comparison.
    pub simple: GlobalRisk,
}

/// Risks of `production` against the limits `sets`, measured with `standard_uncertainty`. A board conforms when its
/// true value at the test leaves room for what happens to it afterwards; it is accepted inside the test limits.
pub(super) fn risks(sets: &LimitSets, production: Process, standard_uncertainty: f64) -> Option<Risks> {
    let tolerance = interval(sets.at_test?);
    let risk = |accepted| global_risk(production, standard_uncertainty, tolerance, accepted);
    Some(Risks { guarded: risk(interval(sets.test?))?, simple: risk(tolerance)? })
}

fn interval(window: Window) -> Interval {
    Interval { min: Some(window.min), max: Some(window.max) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::Value;

    /// JCGM 106:2012, 9.5.3: resistors of 1500 ohm, tolerance 0.2 ohm, guard band 0.02 ohm, spread 0.12 ohm, measured
    /// with 0.04 ohm. Printed (from memory) as 1 % and 7 %; more digits from scipy. Here the resistors stand for a
    /// threshold that moves by nothing after its test.
    #[test]
    fn the_risks_of_the_resistors_of_jcgm_106() {
        let text = include_str!("../../tests/data/statistics/jcgm106_global_resistor.json");
        let file: Value = serde_json::from_str(text).expect("JSON");
        let number = |path: &str| file.pointer(path).and_then(Value::as_f64).expect("a number");
        let data = |key: &str| number(&format!("/data/{key}"));
        let expected = |key: &str| number(&format!("/recomputed_only/{key}"));
        let design = Window { min: data("TL"), max: data("TU") };
        let guard_band = data("TU") - data("AU");
        let sets = LimitSets::new(design, design, Window { min: 0.0, max: 0.0 }, guard_band);
        let production = Process { mean: data("y0"), standard_deviation: data("u0") };
        let risks = risks(&sets, production, data("um")).expect("finite");
        for (found, key) in [
            (risks.guarded.consumer, "RC"),
            (risks.guarded.producer, "RP"),
            (risks.simple.consumer, "RC_simple_acceptance"),
            (risks.simple.producer, "RP_simple_acceptance"),
            (risks.guarded.nonconforming, "process_nonconforming"),
        ] {
            // The limits differ from the nominal in the fourth digit and carry 1500 ohm, so twelve digits are left.
            assert!((found - expected(key)).abs() < 1e-10, "{key}: {found}");
        }
    }
}
