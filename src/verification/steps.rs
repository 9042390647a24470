//! The supply's set-point against the voltmeter at the terminals.

use super::ending::cut_short;
use super::mean::Mean;
use crate::trace::{Sample, Trace};
use crate::units::{Amps, Volts};
use serde::{Deserialize, Serialize};

/// All meters at one set-point.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Step {
    /// The set-point, read back from the supply.
    pub set_v: f64,
    /// Mean of the voltmeter.
    pub sense_v: f64,
    /// Standard deviation of one reading of it.
    pub sense_noise_v: f64,
    /// Mean of the ammeter, less what the voltmeter draws.
    pub current_a: f64,
    /// How far set-point and voltmeter may lie apart by their claims, the drop in leads and ammeter aside.
    pub allowed_v: f64,
}

/// More than this between supply and board is no lead but a bad contact: worn probes have some 0.2 ohm each (common
/// practice), and a milliampere range of an ammeter some ohms more.
const MOST_SERIES: f64 = 12.0;

/// The steps of `trace`, each from its last `readings`, and what is wrong with them. A bench without a voltmeter has
/// none.
pub fn steps(trace: &Trace, readings: usize) -> (Vec<Step>, Vec<String>) {
    let mut problems: Vec<String> = cut_short(&trace.ending).into_iter().collect();
    let mut found = Vec::new();
    let live = |group: &&[Sample]| group[0].set > Volts::ZERO;
    for group in trace.samples.chunk_by(|a, b| (a.set - b.set).abs().0 < 1e-6).filter(live) {
        let taken = &group[group.len().saturating_sub(readings)..];
        let set = group[0].set;
        if taken.iter().any(|sample| sample.limited == Some(true)) {
            problems.push(format!(
                "the supply limits the current at {set}: the fixture or the load draws more than was expected; take out \
                 what is in the fixture, or name the load"
            ));
            continue;
        }
        if let Some(step) = step(trace, set, taken) {
            problems.extend(apart(&step));
            found.push(step);
        }
    }
    (found, problems)
}

fn step(trace: &Trace, set: Volts, taken: &[Sample]) -> Option<Step> {
    let claims = &trace.claims;
    let volts: Vec<f64> = taken.iter().filter_map(|sample| sample.sense).map(|volts| volts.0).collect();
    let sense = Mean::of(&volts)?;
    let passing = claims.sense_resistance.map_or(0.0, |input| (Volts(sense.value) / input).0);
    let amps: Vec<f64> = taken.iter().filter_map(|sample| sample.current.amps()).map(|amps| amps.0).collect();
    let limit = |claim: Option<crate::trace::Accuracy>, volts: f64| {
        claim.map_or(0.0, |claim| claim.limit(volts) + claim.resolution)
    };
    Some(Step {
        set_v: set.0,
        sense_v: sense.value,
        sense_noise_v: sense.deviation,
        current_a: Mean::of(&amps)?.value - passing,
        allowed_v: limit(claims.set, set.0) + limit(claims.sense, sense.value),
    })
}

/// Set-point and voltmeter further apart than claims and any lead can explain.
fn apart(step: &Step) -> Option<String> {
    let difference = step.set_v - step.sense_v;
    let drop = step.current_a.max(0.0) * MOST_SERIES;
    if difference <= step.allowed_v + drop && difference >= -step.allowed_v {
        return None;
    }
    Some(format!(
        "set to {}, the voltmeter reads {}, {} apart; their claims allow {}. With {} flowing that is no lead: look for an \
         open or loose sense lead, a voltmeter at the wrong place, or no path through the ammeter (its fuse)",
        Volts(step.set_v),
        Volts(step.sense_v),
        Volts(difference.abs()),
        Volts(step.allowed_v + drop),
        Amps(step.current_a),
    ))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::fixture::staircase;
    use crate::trace::Accuracy;

    /// Ten readings at 1 V and the discharge; the terminals stand at `sense`, and `amps` flow.
    fn trace(sense: f64, amps: f64) -> Trace {
        let mut trace = staircase(&[&[(1.0, amps); 10][..], &[(0.0, 0.0)]].concat());
        for sample in trace.samples.iter_mut().take(10) {
            sample.sense = Some(Volts(sense));
        }
        trace.claims.set = Some(Accuracy { relative: 5e-4, absolute: 5e-3, resolution: 1e-3 });
        trace.claims.sense = Some(Accuracy { relative: 3.5e-5, absolute: 50e-6, resolution: 1e-5 });
        trace
    }

    /// By hand: 0.5 mV + 5 mV + 1 mV and 35 µV + 50 µV + 10 µV.
    #[test]
    fn set_point_and_voltmeter_agree_within_their_claims() {
        let (steps, problems) = steps(&trace(1.004, 0.0), 8);
        assert_eq!(problems, Vec::<String>::new());
        assert!((steps[0].allowed_v - 6.595e-3).abs() < 1e-6, "{steps:?}");
        assert_eq!(steps.len(), 1, "the discharge is no step");
    }

    /// An open sense lead reads some 5 % high or low.
    #[test]
    fn an_open_sense_lead_is_told() {
        for sense in [1.05, 0.95] {
            let (_, problems) = steps(&trace(sense, 0.0), 8);
            assert!(problems.iter().any(|told| told.contains("sense lead")), "{problems:?}");
        }
        assert!(steps(&trace(0.98, 18e-3), 8).1.is_empty(), "a drop of 20 mV at 18 mA is a lead and a range");
    }

    #[test]
    fn a_supply_that_limits_gives_no_step() {
        let mut limited = trace(0.4, 1e-3);
        limited.samples[5].limited = Some(true);
        let (steps, problems) = steps(&limited, 8);
        assert!(steps.is_empty() && problems[0].contains("limits the current"), "{problems:?}");
    }
}
