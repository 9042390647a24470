//! The simulated instruments claim what the shipped definitions of such instruments claim.

use super::river_node;
use ebbmark::instrument::library::find;
use ebbmark::sim::{Condition, Setup};
use ebbmark::trace::{Accuracy, RangeAccuracy};
use std::path::Path;

/// Rounding of decimal fractions apart.
fn same(a: f64, b: f64) -> bool {
    (a - b).abs() <= 1e-9 * a.abs()
}

fn same_claim(a: &Accuracy, b: &Accuracy) -> bool {
    same(a.relative, b.relative) && same(a.absolute, b.absolute) && same(a.resolution, b.resolution)
}

#[test]
fn meters_have_the_ranges_claims_and_resistances_of_their_definitions() {
    let setup = Setup::new(&river_node(), Condition::Good, 1);
    let definition = find("bench-meter-current", Path::new("/nowhere")).expect("it comes with the program");
    let meter = definition.ammeter.expect("an ammeter");
    assert_eq!(setup.ammeter.integration, meter.integration);
    let claims = setup.claims().current;
    assert_eq!(claims.len(), meter.ranges.len());
    for (index, RangeAccuracy { full_scale, accuracy }) in claims.iter().enumerate() {
        let (defined, simulated) = (&meter.ranges[index], &setup.ammeter.ranges[index]);
        assert!(same(full_scale.0, defined.full_scale.0), "{full_scale}");
        assert!(same(simulated.burden.0, defined.resistance.0), "{full_scale}");
        assert!(
            same_claim(accuracy, &defined.accuracy),
            "{full_scale}: {accuracy:?}, {:?}",
            defined.accuracy
        );
    }
    let definition = find("bench-meter-voltage", Path::new("/nowhere")).expect("it comes with the program");
    let meter = definition.voltmeter.expect("a voltmeter");
    for (defined, simulated) in meter.ranges.iter().zip(&setup.voltmeter.ranges) {
        assert!(same_claim(&simulated.claim, &defined.accuracy), "{defined:?}");
    }
}

#[test]
fn the_supply_has_the_spans_and_the_claim_of_its_definition() {
    let setup = Setup::new(&river_node(), Condition::Good, 1);
    let definition = find("programmable-supply", Path::new("/nowhere")).expect("it comes with the program");
    let source = definition.source.expect("a source");
    assert!(same_claim(&setup.supply.claim, &source.programming), "{:?}", source.programming);
    assert_eq!(setup.supply.max_voltage, source.voltage.max);
    assert_eq!(setup.supply.max_over_voltage, source.over_voltage.max);
    assert_eq!(setup.supply.max_current, source.current.max);
    assert_eq!(setup.supply.min_current, source.current.min);
    assert_eq!(setup.ability().settle, source.settle);
}
