//! How well the bench will measure a threshold, before any board was measured.

use crate::cli::{Failure, files};
use crate::profile::{Parts, Profile, Ramp};
use crate::units::Volts;
use std::path::Path;

/// Expanded uncertainty (k = 2) of a threshold, and where it comes from in words: as given, or from the bracket that
/// the profile's ramp leaves and, with a bench file, what the maker claims of the instrument that tells the voltage.
pub(super) fn of_a_threshold(
    profile: &Profile,
    parts: &Parts,
    given: Option<Volts>,
    bench: Option<&Path>,
) -> Result<(Volts, String), Failure> {
    if let Some(given) = given {
        return Ok((given, "as given".to_owned()));
    }
    let (cell, what) = match profile.ramp {
        Ramp::Staircase { step } => (step, "step"),
        Ramp::Search { resolution } => (resolution, "resolution"),
    };
    // The threshold lies anywhere in the last cell (JCGM 100:2008, 4.3.7).
    let bracket = cell.0 / 12.0_f64.sqrt();
    let Some(path) = bench else {
        let from = format!(
            "from the {what} of the profile's ramp alone, {cell}: instrument accuracy not included, give --bench or \
             --uncertainty"
        );
        return Ok((Volts(2.0 * bracket), from));
    };
    let bench = files::bench(path)?;
    let claims = bench.claims(&profile.supply);
    let (accuracy, instrument) = match (claims.sense, claims.set) {
        (Some(sense), _) => (Some(sense), "the voltmeter's claim"),
        (None, set) => (set, "the supply's claim, leads not included"),
    };
    let meter = accuracy.map_or(0.0, |claim| claim.standard_uncertainty(parts.nominal_trip().0));
    let from =
        format!("from the {what} of the profile's ramp, {cell}, and {instrument} on bench {}", bench.name);
    Ok((Volts(2.0 * bracket.hypot(meter)), from))
}
