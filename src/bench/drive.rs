//! The one loop between a procedure and a bench. Real and simulated benches share it.

use super::Bench;
use crate::procedure::{Action, Event, Procedure, Progress};
use crate::trace::{Claims, Setting, Trace};
use std::pin::pin;
use std::time::Duration;

/// Sees every action and what came of it, as it happens: for progress and for the wire log.
pub trait Watch {
    /// Called after each action.
    fn saw(&mut self, at: Duration, progress: Progress, action: &Action, event: &Event);
}

/// Nobody watches.
impl Watch for () {
    fn saw(&mut self, _: Duration, _: Progress, _: &Action, _: &Event) {}
}

/// Drives `bench` through `procedure` to its end and returns what was measured.
///
/// When `abort` becomes ready, the action under way is given up and the procedure hears [`Event::Abort`]; from then
/// on it switches off undisturbed.
pub async fn drive<B: Bench>(
    mut procedure: Procedure,
    bench: &mut B,
    mut claims: Claims,
    watch: &mut impl Watch,
    abort: impl Future<Output = ()>,
) -> Trace {
    let mut abort = pin!(abort);
    let mut aborted = false;
    let mut samples = Vec::new();
    let mut settings = Vec::new();
    let mut event = Event::Start;
    loop {
        let action = procedure.handle(bench.now(), event);
        if let Action::Finish(ending) = action {
            return Trace { samples, settings, claims, ending };
        }
        if let Some(what) = described(&action) {
            settings.push(Setting { at: bench.now(), what });
        }
        event = if aborted {
            bench.perform(&action).await
        } else {
            tokio::select! {
                biased;
                () = &mut abort => { aborted = true; Event::Abort }
                event = bench.perform(&action) => event,
            }
        };
        if let Event::Reading(sample) = &event {
            samples.push(*sample);
        }
        if let Event::Burst(burst) = &event {
            // What is rare shows in one of many.
            claims.burst =
                claims.burst.filter(|kept| kept.peak_to_peak >= burst.peak_to_peak).or(Some(*burst));
        }
        watch.saw(bench.now(), procedure.progress(), &action, &event);
    }
}

/// A setting in plain words for the record; `None` for actions that set nothing.
fn described(action: &Action) -> Option<String> {
    match action {
        Action::Protect { over_voltage, current_limit } => {
            Some(format!("over-voltage protection {over_voltage}, current limit {current_limit}"))
        }
        Action::LimitCurrent(current) => Some(format!("current limit {current}")),
        Action::SetVolts(volts) => Some(format!("voltage {volts}")),
        Action::OutputOn => Some("output on".to_owned()),
        Action::OutputOff => Some("output off".to_owned()),
        Action::Range(range) => Some(format!("ammeter range for {range}")),
        Action::Read | Action::Burst | Action::WaitUntil(_) | Action::Finish(_) => None,
    }
}
