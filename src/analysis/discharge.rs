//! Whether the board was seen to discharge after the output went off.

use super::finding::{About, Finding, FindingCode};
use crate::trace::{Stop, Trace};
use crate::units::Volts;

/// Below this a board counts as discharged; a run waits for it.
const DEAD: Volts = Volts(0.1);

/// A board that was powered and whose terminals were last seen with a voltage on them. A trace from elsewhere, without
/// settings, says nothing of a discharge.
pub(super) fn still_charged(trace: &Trace) -> Option<Finding> {
    let last = trace.samples.last()?.sense.filter(|sense| sense.abs() >= DEAD)?;
    if trace.settings.is_empty() || matches!(trace.ending.stop, Stop::LiveBoard { .. }) {
        return None;
    }
    Some(Finding {
        code: FindingCode::StillCharged,
        about: About::Bench,
        text: format!(
            "{last} was the last voltage read at the board, and it was not seen to discharge. Do not touch it before you \
             have measured less than {DEAD}; a bleed resistor across the supply makes it fall faster."
        ),
    })
}

#[cfg(test)]
mod tests {
    use super::super::fixture::{off, on, staircase};
    use super::*;
    use crate::trace::Setting;
    use std::time::Duration;

    #[test]
    fn only_a_run_of_ours_that_ends_with_a_voltage_is_told() {
        let mut trace = staircase(&[on(7.6), off(5.2), (0.0, 0.0)]);
        assert_eq!(still_charged(&trace), None, "no settings");
        trace.settings.push(Setting { at: Duration::ZERO, what: "output off".to_owned() });
        if let Some(last) = trace.samples.last_mut() {
            last.sense = Some(Volts(0.05));
        }
        assert_eq!(still_charged(&trace), None, "discharged");
        if let Some(last) = trace.samples.last_mut() {
            last.sense = Some(Volts(6.3));
        }
        let finding = still_charged(&trace).expect("charged");
        assert!(finding.text.contains("6.300 V"), "{}", finding.text);
    }
}
