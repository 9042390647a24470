//! How long a small current is read: until it stands.

use super::Plan;
use super::desk::Desk;
use crate::trace::{Drift, Sample, Stop, WHOLE_LINE_PERIODS};
use crate::units::Amps;
use std::time::Duration;

/// Readings of a current that has not been shown to stand go on for so long; what is left of its drift is for the
/// analysis to judge.
const PATIENCE: Duration = Duration::from_secs(10);

/// Reads until current and voltage stand; false when the range overflows.
pub(super) async fn settle_on_range(desk: &Desk, plan: &Plan) -> Result<bool, Stop> {
    let mut settling = Settling::default();
    let end = desk.now() + PATIENCE;
    loop {
        let sample = desk.read().await?;
        let Some(amps) = sample.current.amps() else { return Ok(false) };
        settling.take(&sample, amps);
        if settling.stands(plan) || desk.now() >= end {
            return Ok(true);
        }
    }
}

#[derive(Default)]
struct Settling {
    currents: Vec<(Duration, f64)>,
    voltages: Vec<(Duration, f64)>,
}

impl Settling {
    fn take(&mut self, sample: &Sample, amps: Amps) {
        self.currents.push((sample.at, amps.0));
        self.voltages.push((sample.at, sample.terminals().0));
    }

    /// Looks at the newer half of the readings, so that a transient at the beginning is forgotten and noise averages out
    /// the longer it takes.
    fn stands(&self, plan: &Plan) -> bool {
        let (Some((first, _)), Some((last, _))) = (self.currents.first(), self.currents.last()) else {
            return false;
        };
        let span = ((*last - *first) / 2).max(WHOLE_LINE_PERIODS);
        let Some(from) = last.checked_sub(span).filter(|from| from >= first) else { return false };
        let within = |readings: &[(Duration, f64)], budget: f64| {
            let newer = readings.iter().copied().filter(|(at, _)| *at >= from);
            Drift::of(newer).is_some_and(|drift| drift.is_within(budget))
        };
        within(&self.currents, plan.off_drift.0)
            && (!plan.voltmeter || within(&self.voltages, plan.arrival_tolerance.0))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::procedure::tests::plan;
    use crate::profile::Ramp;
    use crate::trace::Current;
    use crate::units::Volts;

    /// Time until a current of this course counts as standing, with a reading every 22 ms.
    fn time_to_stand(current: impl Fn(f64) -> f64, volts: impl Fn(f64) -> f64) -> Option<f64> {
        let plan = plan(Ramp::Search { resolution: Volts(2e-3) });
        let mut settling = Settling::default();
        for index in 0..450 {
            let at = Duration::from_millis(22 * index);
            let t = at.as_secs_f64();
            let sample = Sample {
                at,
                set: Volts(5.8),
                sense: Some(Volts(volts(t))),
                current: Current::Value(Amps(current(t))),
                load: None,
                range: None,
                limited: None,
                was_limited: None,
            };
            settling.take(&sample, Amps(current(t)));
            if settling.stands(&plan) {
                return Some(t);
            }
        }
        None
    }

    #[test]
    fn a_current_at_rest_is_read_for_whole_line_periods() {
        let time = time_to_stand(|_| 2.5e-6, |_| 5.8).expect("at rest");
        assert!((0.2..0.25).contains(&time), "{time}");
    }

    /// A capacitor that takes 1 uA more, falling with a time constant of half a second: at 40 nA in five seconds, 8 nA/s,
    /// the slope of 2 uA/s is down to a 250th after 2.8 s, and the window lies a little before its end.
    #[test]
    fn a_capacitor_that_still_charges_is_waited_for() {
        let time = time_to_stand(|t| 2.5e-6 + 1e-6 * (-t / 0.5).exp(), |_| 5.8).expect("in the end");
        assert!((2.8..6.0).contains(&time), "{time}");
    }

    #[test]
    fn a_voltage_that_still_falls_makes_a_constant_current_in_a_capacitor() {
        assert_eq!(time_to_stand(|_| 2.5e-6, |t| 5.81 - 5e-3 * t), None);
    }

    #[test]
    fn noise_of_the_meter_only_takes_longer() {
        let noisy = |t: f64| 2.5e-6 + 5e-9 * (t * 1e4).sin();
        let time = time_to_stand(noisy, |_| 5.8).expect("it averages out");
        assert!(time < 3.0, "{time}");
    }
}
