//! Work on a bench that ended before its time, in words.

use crate::trace::{Ending, OutputState, Stop};

/// Why the work did not come to its end; `None` when it did.
pub(super) fn cut_short(ending: &Ending) -> Option<String> {
    let why = match &ending.stop {
        Stop::Completed => None,
        Stop::Aborted => Some("stopped by the operator".to_owned()),
        Stop::Fault(fault) => Some(fault.text.clone()),
        Stop::LiveBoard { at } => Some(format!(
            "{at} stood at the terminals with the output off; take out what feeds the fixture, then start again"
        )),
        Stop::BackFeed { at, current } => Some(format!(
            "{current} flowed out of the fixture at {at}: something else feeds it, or the ammeter's leads are \
             swapped"
        )),
        other => Some(format!("ended early: {other:?}")),
    };
    match ending.output {
        OutputState::Off => why,
        OutputState::MayBeOn => Some(format!(
            "the output was not confirmed off; {}",
            why.as_deref().unwrap_or("nothing else went wrong")
        )),
    }
}
