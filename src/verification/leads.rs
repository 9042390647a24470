//! What lies between supply and board, from set-point less voltmeter against a current that is known to flow.

use super::steps::Step;
use crate::statistics::line::{Line, Point};
use crate::trace::{Accuracy, Claims};
use crate::units::Ohms;
use serde::{Deserialize, Serialize};

/// A resistor in the place of the board.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct KnownLoad {
    /// Its resistance.
    pub resistance: Ohms,
    /// Its tolerance, as a fraction of one.
    pub tolerance: f64,
}

/// The resistance between supply and terminals.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Leads {
    /// Leads, contacts and ammeter together.
    pub series_ohm: f64,
    /// What the ammeter's definition states for its range.
    pub burden_ohm: f64,
    /// The rest: leads and contacts.
    pub leads_ohm: f64,
    /// Standard uncertainty of both.
    pub standard_uncertainty_ohm: f64,
}

/// The known load as the bench sees it.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct LoadFound {
    /// What it is said to be.
    pub stated_ohm: f64,
    /// Voltmeter over ammeter at the highest step.
    pub found_ohm: f64,
    /// How far the two may lie apart: its tolerance and the claims of both meters.
    pub allowed_ohm: f64,
}

/// Leads and contacts of more than this are worn: a set of leads and clips has some 0.1 ohm, a worn probe 0.2 ohm
/// (common practice).
const WORN: f64 = 0.5;

/// The leads and the load from steps with the load in place, the ammeter on a range of `burden`; and what is wrong.
pub fn leads(
    steps: &[Step],
    claims: &Claims,
    load: KnownLoad,
    burden: Ohms,
) -> (Option<Leads>, Option<LoadFound>, Vec<String>) {
    let mut problems = Vec::new();
    let found = load_found(steps, claims, load);
    if let Some(found) = found.as_ref().filter(|found| !found.agrees()) {
        problems.push(format!(
            "the load is {} by the meters and {} as stated, allowed are {} between them; look whether it is the load \
             named, then at the ammeter's fuse and the contacts",
            Ohms(found.found_ohm),
            Ohms(found.stated_ohm),
            Ohms(found.allowed_ohm)
        ));
        // What flows is not what was thought: a drop says nothing about the leads.
        return (None, Some(found.clone()), problems);
    }
    let leads = fitted(steps, claims, load, burden);
    if let Some(leads) = &leads
        && leads.leads_ohm - 2.0 * leads.standard_uncertainty_ohm > WORN
    {
        problems.push(format!(
            "the leads have {}; wanted at most {}: clean the contacts, look for worn probes and loose terminals",
            Ohms(leads.leads_ohm),
            Ohms(WORN)
        ));
    }
    (leads, found, problems)
}

impl LoadFound {
    fn agrees(&self) -> bool {
        (self.found_ohm - self.stated_ohm).abs() <= self.allowed_ohm
    }
}

fn load_found(steps: &[Step], claims: &Claims, load: KnownLoad) -> Option<LoadFound> {
    let top = steps.last()?;
    let found_ohm = top.sense_v / top.current_a;
    let range = claims.current.iter().find(|range| range.full_scale.0 >= top.current_a);
    let share = |claim: Option<Accuracy>, value: f64| {
        claim.map_or(0.0, |claim| (claim.limit(value) + claim.resolution) / value.abs())
    };
    let claimed = share(claims.sense, top.sense_v) + share(range.map(|range| range.accuracy), top.current_a);
    Some(LoadFound {
        stated_ohm: load.resistance.0,
        found_ohm,
        allowed_ohm: load.resistance.0 * (load.tolerance + claimed),
    })
}

/// The slope of set less sense against current.
///
/// A gain error of the supply or the voltmeter grows with the current just as a drop does, by its share of the load's
/// resistance: that is the larger part of the uncertainty, as a rectangle each (JCGM 100:2008, 4.3.7). The rest is the
/// scatter about the line, at least that of the set-point's own steps (F.2.2.1).
fn fitted(steps: &[Step], claims: &Claims, load: KnownLoad, burden: Ohms) -> Option<Leads> {
    if steps.len() < 3 {
        return None;
    }
    let points = steps.iter().map(|step| Point::plain(step.current_a, step.set_v - step.sense_v));
    let line = Line::fit(points)?;
    let set = claims.set?;
    let sigma = line.scatter.unwrap_or(0.0).max(set.resolution / 12.0_f64.sqrt());
    let gain = |claim: Option<Accuracy>| {
        claim.map_or(0.0, |claim| claim.relative * load.resistance.0 / 3.0_f64.sqrt())
    };
    let uncertainty = line.slope_uncertainty(sigma).hypot(gain(claims.set)).hypot(gain(claims.sense));
    Some(Leads {
        series_ohm: line.slope,
        burden_ohm: burden.0,
        leads_ohm: line.slope - burden.0,
        standard_uncertainty_ohm: uncertainty,
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::trace::RangeAccuracy;
    use crate::units::Amps;

    const LOAD: KnownLoad = KnownLoad { resistance: Ohms(55.0), tolerance: 0.01 };

    fn claims() -> Claims {
        Claims {
            set: Some(Accuracy { relative: 5e-4, absolute: 5e-3, resolution: 1e-3 }),
            sense: Some(Accuracy { relative: 3.5e-5, absolute: 50e-6, resolution: 1e-5 }),
            current: vec![RangeAccuracy {
                full_scale: Amps(1.0),
                accuracy: Accuracy { relative: 1e-3, absolute: 1e-4, resolution: 1e-6 },
            }],
            ..Claims::default()
        }
    }

    /// Steps through `load` behind `series` ohm, with a supply that is 3 mV high throughout.
    fn steps(load: f64, series: f64) -> Vec<Step> {
        [2.0, 4.0, 6.0, 8.0]
            .map(|sense_v: f64| {
                let current_a = sense_v / load;
                Step {
                    set_v: sense_v + current_a * series - 3e-3,
                    sense_v,
                    sense_noise_v: 0.0,
                    current_a,
                    allowed_v: 6e-3,
                }
            })
            .to_vec()
    }

    /// By hand: currents 36.4 to 145.5 mA, sum of squares about their mean 6.612e-3 A squared; set-point steps of 1 mV give
    /// 0.2887 mV / 81.31 mA = 3.550 mohm; gains 0.05 % and 35 ppm of 55 ohm / sqrt(3) = 15.877 and 1.111 mohm; in all
    /// 16.307 mohm.
    #[test]
    fn the_leads_are_the_slope_less_the_burden_whatever_the_offset() {
        let (leads, load, problems) = leads(&steps(55.0, 0.18), &claims(), LOAD, Ohms(0.1));
        let leads = leads.expect("four steps");
        assert_eq!(problems, Vec::<String>::new());
        assert!((leads.series_ohm - 0.18).abs() < 1e-9 && (leads.leads_ohm - 0.08).abs() < 1e-9, "{leads:?}");
        assert!((leads.standard_uncertainty_ohm - 16.307e-3).abs() < 2e-6, "{leads:?}");
        assert!((load.expect("a load").found_ohm - 55.0).abs() < 1e-9);
    }

    #[test]
    fn worn_contacts_and_another_load_are_told() {
        let worn = leads(&steps(55.0, 0.9), &claims(), LOAD, Ohms(0.1)).2;
        assert!(worn[0].contains("clean the contacts"), "{worn:?}");
        let (leads, load, problems) = leads(&steps(47.0, 0.18), &claims(), LOAD, Ohms(0.1));
        assert!(leads.is_none() && load.is_some() && problems[0].contains("47.00 Ω"), "{problems:?}");
    }
}
