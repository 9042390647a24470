//! A board that switches by itself: for good, or in several goes at one change.

use super::diagnosis::board;
use super::edges::{Bounce, Direction, Edges};
use super::finding::{Finding, FindingCode};
use super::plateau::Course;
use super::terminals;
use crate::profile::QuantityName;
use crate::units::Volts;

/// It never rested.
pub(super) fn chatter(course: &Course<'_>, found: &Edges) -> Finding {
    let sets = || found.reversals.iter().map(|plateau| course.plateaus[*plateau].set);
    let lowest = sets().fold(Volts(f64::INFINITY), Volts::min);
    let highest = sets().fold(Volts(f64::NEG_INFINITY), Volts::max);
    board(
        FindingCode::Chatter,
        format!(
            "the board switched by itself {} times, at set-points from {lowest} to {highest}, so no threshold \
             is stated. {}",
            found.reversals.len(),
            restless(course, highest)
        ),
    )
}

/// What a board that switches by itself near `set` fits, on this bench.
fn restless(course: &Course<'_>, set: Volts) -> String {
    let least = course.profile.limits.get(&QuantityName::Hysteresis).and_then(|limit| limit.min).map(Volts);
    let swing =
        terminals::source_resistance(course).map(|source| set / course.profile.load.resistance * source);
    match least.zip(swing) {
        Some((least, swing)) if swing < least => format!(
            "Source and leads move the terminals by {swing} when the load switches, less than the least \
             hysteresis allowed, {least}: a good board rests here, and the hysteresis of this one is about \
             that swing or less. Look first at the detector's hysteresis option and the parts that set it, \
             then at its delay capacitor."
        ),
        _ => {
            "Look first at the resistance of source and leads against the hysteresis, then at the detector's \
              hysteresis and delay parts."
                .to_owned()
        }
    }
}

/// A change of state took several goes and then held: one finding for each threshold.
pub(super) fn bounces(course: &Course<'_>, found: &Edges) -> Vec<Finding> {
    [(Direction::Down, "trip"), (Direction::Up, "re-enable")]
        .into_iter()
        .filter_map(|(direction, edge)| {
            let of = || found.bounces.iter().filter(move |bounce| bounce.direction == direction);
            let worst: &Bounce = of().max_by_key(|bounce| bounce.changes)?;
            let passes = found.edges.iter().filter(|seen| seen.direction == direction).count();
            let set = course.plateaus[worst.plateau].set;
            Some(board(
                FindingCode::Chatter,
                format!(
                    "at the {edge} the switch did not change once: up to {} changes of state were seen before \
                     it rested, at a set-point of {set}, and more than one in {} of {passes} passes. Look \
                     first at the delay capacitor, then at current limit against the capacitors behind the \
                     switch.",
                    worst.changes,
                    of().count()
                ),
            ))
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::super::analyse;
    use super::super::fixture::{off, on, profile, staircase};
    use super::*;

    /// Leads of 1 ohm and a load of 55 ohm move 6 V by 109 mV, less than the 300 mV allowed.
    #[test]
    fn a_bench_on_which_a_good_board_would_rest_is_said_to_be_one() {
        let mut trace = staircase(&[on(7.6), on(6.2), off(6.0), on(6.0), off(6.0), on(6.0), off(5.2)]);
        for sample in &mut trace.samples {
            let drop = sample.current.amps().map_or(0.0, |amps| amps.0);
            sample.sense = Some(Volts(sample.set.0 - drop));
        }
        let finding = analyse(&trace, &profile()).findings.into_iter().next().expect("a finding");
        assert_eq!(finding.code, FindingCode::Chatter);
        assert!(
            finding.text.contains("by 109.1 mV") && finding.text.contains("300.0 mV"),
            "{}",
            finding.text
        );
    }

    #[test]
    fn half_way_and_back_to_the_state_before_is_switching_too() {
        let readings = [on(7.6), off(5.9), off(6.3), (6.39, 0.03), off(6.39), on(6.41), on(7.6)];
        let codes = |readings: &[(f64, f64)]| -> Vec<FindingCode> {
            analyse(&staircase(readings), &profile()).findings.iter().map(|finding| finding.code).collect()
        };
        assert!(codes(&readings).contains(&FindingCode::Chatter));
        let through = [on(7.6), off(5.9), off(6.3), (6.39, 0.03), on(6.39), on(6.41), on(7.6)];
        assert!(!codes(&through).contains(&FindingCode::Chatter));
    }

    #[test]
    fn a_change_in_several_goes_is_named_with_count_and_place_and_its_threshold_still_stated() {
        let ramp = [on(7.6), on(6.01), off(5.99), off(5.2), off(6.39)];
        let bouncing = [on(6.41), off(6.41), on(6.41), off(6.41), on(6.41), on(6.41), on(6.41), on(6.41)];
        let analysis = analyse(&staircase(&[&ramp[..], &bouncing].concat()), &profile());
        let re_enable = analysis.quantities.iter().find(|quantity| quantity.name == QuantityName::ReEnable);
        assert!((re_enable.expect("stated").value - 6.40).abs() < 1e-3);
        let finding = analysis.findings.iter().find(|finding| finding.code == FindingCode::Chatter);
        let text = &finding.expect("named").text;
        assert!(
            text.contains("re-enable") && text.contains("up to 5 changes") && text.contains("6.410 V"),
            "{text}"
        );
    }
}
