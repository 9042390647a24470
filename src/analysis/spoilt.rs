//! What on the bench spoilt the readings, and what else in the trace that explains.

use super::finding::{Finding, FindingCode};
use super::plateau::Course;
use super::{
    contact, hiccup, hum, meter_fuse, meter_range, meter_reversed, regulating_load, supply_agrees,
    temperature,
};

/// Faults of the bench that show in the readings, the most telling first.
pub(super) struct Spoilt {
    found: Vec<Finding>,
}

/// Looks for each of them. A board that is `restless` behind a high resistance switches again and again, and what that
/// does to supply and voltage has its cause in the resistance.
pub(super) fn spoilt(course: &Course<'_>, restless: bool) -> Spoilt {
    let fuse = meter_fuse::meter_fuse(course);
    // Behind an open fuse nothing agrees with the supply.
    let disagrees = if fuse.is_none() { supply_agrees::supply_disagrees(course) } else { None };
    let stuck = meter_range::stuck_range(course);
    let gives_way = if restless { None } else { hiccup::hiccup(course) };
    // A small range or a supply that gives way has the board switch again and again, and its terminals jump.
    let jumps = stuck.is_some() || gives_way.is_some();
    let contact = if jumps { None } else { contact::contact(course, restless) };
    let found = [
        fuse,
        meter_reversed::meter_reversed(course),
        stuck,
        disagrees,
        gives_way,
        contact,
        hum::ripple(course),
        temperature::temperature(course),
        regulating_load::may_have_stopped(course),
    ];
    Spoilt { found: found.into_iter().flatten().collect() }
}

impl Spoilt {
    /// True when no threshold of the board can be read from this trace.
    pub(super) fn thresholds(&self) -> bool {
        self.found.iter().any(|finding| {
            matches!(
                finding.code,
                FindingCode::Contact
                    | FindingCode::RangeNotAdequate
                    | FindingCode::CurrentLimit
                    | FindingCode::LoadStopped
            )
        })
    }

    /// True when no reading without the load's current shows that the switch was open.
    pub(super) fn switch(&self) -> bool {
        self.found.iter().any(|finding| finding.code == FindingCode::LoadStopped)
    }

    /// These findings first, then what else was found and is not explained by them.
    pub(super) fn explain(self, others: Vec<Finding>) -> Vec<Finding> {
        let explained = |other: &Finding| {
            self.found
                .iter()
                .any(|found| found.code == other.code || explains(found.code).contains(&other.code))
        };
        let rest: Vec<Finding> = others.into_iter().filter(|other| !explained(other)).collect();
        self.found.into_iter().chain(rest).collect()
    }
}

/// What looks like something else, and is no more than what the bench did.
fn explains(code: FindingCode) -> &'static [FindingCode] {
    use FindingCode::{
        BackFeed, Chatter, DetectorNoise, DwellShorterThanDelay, NeitherOnNorOff, NeverOn, NeverReEnables,
        NeverTrips, NoCurrent, NoLoad, SlowerThanDesign, SourceResistance, SupplyNotArrived,
    };
    match code {
        FindingCode::MeterFuse => &[SupplyNotArrived, NeverOn, NoLoad, NoCurrent],
        FindingCode::MeterReversed => &[BackFeed, NeitherOnNorOff],
        FindingCode::SupplyDisagrees => &[SupplyNotArrived, SourceResistance],
        FindingCode::CurrentLimit => &[NeverOn, Chatter, NeitherOnNorOff, NoCurrent, DetectorNoise],
        FindingCode::Contact => &[
            Chatter,
            NeitherOnNorOff,
            SlowerThanDesign,
            DwellShorterThanDelay,
            DetectorNoise,
            SourceResistance,
        ],
        FindingCode::RangeNotAdequate => &[
            Chatter,
            NeitherOnNorOff,
            NeverOn,
            NeverTrips,
            NeverReEnables,
            SlowerThanDesign,
            DwellShorterThanDelay,
            DetectorNoise,
        ],
        _ => &[],
    }
}

#[cfg(test)]
mod tests {
    use super::super::finding::About;
    use super::*;

    fn finding(code: FindingCode) -> Finding {
        Finding { code, about: About::Bench, text: "seen".to_owned() }
    }

    #[test]
    fn a_fault_of_the_bench_comes_first_and_takes_its_effects_with_it() {
        let spoilt = Spoilt { found: vec![finding(FindingCode::Contact)] };
        assert!(spoilt.thresholds());
        let others = [FindingCode::Chatter, FindingCode::OffCurrentHigh].map(finding).to_vec();
        let codes: Vec<FindingCode> = spoilt.explain(others).iter().map(|finding| finding.code).collect();
        assert_eq!(codes, [FindingCode::Contact, FindingCode::OffCurrentHigh]);
    }
}
