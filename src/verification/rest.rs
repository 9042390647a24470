//! The meters at rest, with the output off.

use super::ending::cut_short;
use super::fuse;
use super::mean::Mean;
use crate::trace::{Accuracy, Sample, Trace};
use crate::units::{Amps, Quantity, Volts, prefixed};
use serde::{Deserialize, Serialize};

/// Readings of one meter with nothing to read.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct AtRest {
    /// The role: `ammeter`, `voltmeter` or `load_voltmeter`.
    pub role: String,
    /// Full scale of the ammeter's range, A.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub range_a: Option<f64>,
    /// How many readings.
    pub readings: usize,
    /// `A` or `V`.
    pub unit: String,
    /// Their mean.
    pub mean: f64,
    /// Standard deviation of one reading: the noise.
    pub noise: f64,
}

/// A mean beyond this multiple of the claimed error limit is absurd: the claim is not of this instrument, or something
/// flows.
const ABSURD: f64 = 5.0;

/// What the meters read at rest in the last `readings` of each range, and what is wrong with it.
pub fn rest(trace: &Trace, readings: usize) -> (Vec<AtRest>, Vec<String>) {
    let mut found = Vec::new();
    let mut problems: Vec<String> = cut_short(&trace.ending).into_iter().collect();
    // What was read after the last change of range belongs to the discharge at the end.
    let groups: Vec<&[Sample]> = trace.samples.chunk_by(|a, b| a.range == b.range).collect();
    for (index, group) in groups.iter().enumerate() {
        if groups[..index].iter().any(|earlier| earlier[0].range == group[0].range) {
            continue;
        }
        let taken = &group[group.len().saturating_sub(readings)..];
        let Some(range) = group[0].range else { continue };
        let amps: Vec<f64> =
            taken.iter().filter_map(|sample| sample.current.amps()).map(|amps| amps.0).collect();
        if amps.len() < taken.len() {
            problems.push(format!("the ammeter overloads on its {range} range with the output off"));
        }
        let claim = trace.claims.current_accuracy(Some(range), Amps::ZERO);
        if let Some(mean) = Mean::of(&amps) {
            let what = format!("ammeter at rest on its {range} range");
            problems.extend(fuse::suspicion(&mean, claim, range.0).map(|told| format!("{what}: {told}")));
            problems.extend(absurd::<Amps>(&what, &mean, claim));
            found.push(at_rest::<Amps>("ammeter", Some(range.0), &mean));
        }
    }
    let Some(first) = groups.first() else { return (found, problems) };
    let sense: Vec<Volts> = first.iter().filter_map(|sample| sample.sense).collect();
    let load: Vec<Volts> = first.iter().filter_map(|sample| sample.load).collect();
    for (role, volts) in [("voltmeter", sense), ("load_voltmeter", load)] {
        let volts: Vec<f64> = volts.iter().map(|volts| volts.0).collect();
        found.extend(Mean::of(&volts).map(|mean| at_rest::<Volts>(role, None, &mean)));
    }
    (found, problems)
}

fn at_rest<Q: Quantity>(role: &str, range_a: Option<f64>, mean: &Mean) -> AtRest {
    AtRest {
        role: role.to_owned(),
        range_a,
        readings: mean.count,
        unit: Q::UNIT.ascii().to_owned(),
        mean: mean.value,
        noise: mean.deviation,
    }
}

/// A mean or a noise that no instrument inside its claim has.
fn absurd<Q: Quantity>(what: &str, mean: &Mean, claim: Option<Accuracy>) -> Option<String> {
    let limit = claim?.limit(mean.value) + claim?.resolution;
    let text = |value: f64| prefixed(value, Q::UNIT);
    let (credible, quiet) = (mean.value.abs() <= ABSURD * limit, mean.deviation <= limit);
    if !credible {
        return Some(format!(
            "{what}: {}, claimed to be within {}; look for current in the fixture, then have the meter calibrated",
            text(mean.value),
            text(limit)
        ));
    }
    (!quiet).then(|| {
        format!(
            "{what}: noise of {} in one reading, as much as its whole claim of {}; look for mains hum, moving cables and \
             loose contacts",
            text(mean.deviation),
            text(limit)
        )
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::fixture::staircase;
    use crate::trace::RangeAccuracy;

    const CLAIM: Accuracy = Accuracy { relative: 5e-4, absolute: 25e-9, resolution: 1e-10 };

    /// Two readings on 1 A, twenty on 100 µA about `offset` with `noise`, and one on 1 A at the end.
    fn trace(offset: f64, noise: f64) -> Trace {
        let wobble = |index: usize| if index.is_multiple_of(2) { noise } else { -noise };
        let small: Vec<(f64, f64)> = (0..20).map(|index| (0.0, offset + wobble(index))).collect();
        let mut trace = staircase(&[&[(0.0, 0.0); 2][..], &small, &[(0.0, 0.0)]].concat());
        for (index, sample) in trace.samples.iter_mut().enumerate() {
            sample.range = Some(Amps(if (2..22).contains(&index) { 1e-4 } else { 1.0 }));
        }
        trace.claims.current = vec![
            RangeAccuracy { full_scale: Amps(1e-4), accuracy: CLAIM },
            RangeAccuracy {
                full_scale: Amps(1.0),
                accuracy: Accuracy { absolute: 1e-4, resolution: 1e-4, ..CLAIM },
            },
        ];
        trace
    }

    #[test]
    fn a_quiet_bench_gives_noise_and_no_problem() {
        let (found, problems) = rest(&trace(3e-9, 0.5e-9), 20);
        assert_eq!(problems, Vec::<String>::new());
        assert_eq!(
            found.iter().map(|rest| rest.role.as_str()).collect::<Vec<_>>(),
            ["ammeter", "ammeter", "voltmeter"]
        );
        let small = &found[1];
        assert_eq!((small.range_a, small.readings, small.unit.as_str()), (Some(1e-4), 20, "A"));
        // s of ten values of +a and ten of -a is a times the root of 20/19.
        assert!((small.noise - 0.5e-9 * (20.0_f64 / 19.0).sqrt()).abs() < 1e-15, "{small:?}");
    }

    #[test]
    fn noise_offset_and_a_dead_meter_are_problems() {
        for (offset, noise, phrase) in
            [(3e-9, 60e-9, "noise of"), (200e-9, 0.5e-9, "claimed to be within"), (0.0, 0.0, "fuse blown")]
        {
            let (_, problems) = rest(&trace(offset, noise), 20);
            assert!(problems.iter().any(|told| told.contains(phrase)), "no {phrase} in {problems:?}");
        }
    }
}
