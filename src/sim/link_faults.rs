//! A script of what goes wrong between the program and a simulated instrument: which message it befalls, and how.

use super::Mishap;
use super::device::{Kind, ScpiError};
use crate::trace::FaultKind;
use std::time::Duration;

/// One thing that goes wrong.
#[derive(Clone, Debug, PartialEq)]
pub struct LinkFault {
    /// The instrument it befalls.
    pub instrument: Kind,
    /// The message it begins with.
    pub when: When,
    /// Whether it ends there.
    pub lasting: Lasting,
    /// What happens.
    pub effect: Effect,
}

/// The message a fault begins with.
#[derive(Clone, Debug, PartialEq)]
pub enum When {
    /// The message with this number since the instrument was switched on; the first is 1.
    Message(u64),
    /// The first message that contains this text, in any case.
    Containing(String),
    /// The first message after this simulated time since the bench was switched on.
    After(Duration),
}

/// How long a fault lasts.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Lasting {
    /// One message.
    Once,
    /// Every message that answers to [`When`]; of a number, that one and all later ones.
    Always,
}

/// What goes wrong.
#[derive(Clone, Debug, PartialEq)]
pub enum Effect {
    /// The message is obeyed, but its reply is lost.
    NoReply,
    /// The reply comes this much later; messages wait meanwhile.
    LateReply(Duration),
    /// Half of the reply comes, and the rest this much later.
    CutReply(Duration),
    /// These bytes come in place of the reply.
    Garbage(Vec<u8>),
    /// The message comes back before its reply.
    Echo,
    /// The message is lost: neither obeyed nor answered.
    Swallow,
    /// The message is not obeyed, and this error is queued.
    Refuse(ScpiError),
    /// Power fails at this message, which is lost; the instrument is deaf for this long and then as just switched on.
    Restart(Duration),
    /// The port is gone, for good.
    HangUp,
    /// From this message on the instrument calls itself this.
    Identity(String),
}

impl LinkFault {
    /// What a bench makes of it that carries actions out without text, and from when on; `None` for faults that need the
    /// text.
    pub fn mishap(&self) -> Option<(Duration, Mishap)> {
        let When::After(at) = self.when else { return None };
        let mishap = match self.effect {
            Effect::NoReply | Effect::LateReply(_) => Mishap::ReplyLost(FaultKind::NoReply),
            Effect::CutReply(_) | Effect::Garbage(_) => Mishap::ReplyLost(FaultKind::BadReply),
            Effect::Restart(_) => Mishap::CommandLost(FaultKind::Restarted),
            _ => return None,
        };
        Some((at, mishap))
    }
}

/// The faults still to come.
#[derive(Clone, Debug, Default)]
pub struct LinkFaults(Vec<LinkFault>);

impl LinkFaults {
    /// Begins with these faults; where several fall on one message, the first in the list happens.
    pub fn new(script: Vec<LinkFault>) -> Self {
        Self(script)
    }

    /// Adds one behind the others.
    pub fn add(&mut self, fault: LinkFault) {
        self.0.push(fault);
    }

    /// What befalls the message with this number and text, received at this simulated time.
    pub fn next(&mut self, instrument: Kind, number: u64, text: &str, at: Duration) -> Option<Effect> {
        let index = self.0.iter().position(|fault| {
            fault.instrument == instrument && fault.when.is_now(fault.lasting, number, text, at)
        })?;
        match self.0[index].lasting {
            Lasting::Once => Some(self.0.remove(index).effect),
            Lasting::Always => Some(self.0[index].effect.clone()),
        }
    }
}

impl When {
    fn is_now(&self, lasting: Lasting, number: u64, text: &str, at: Duration) -> bool {
        match self {
            Self::Message(wanted) => match lasting {
                Lasting::Once => number == *wanted,
                Lasting::Always => number >= *wanted,
            },
            Self::Containing(part) => text.to_ascii_uppercase().contains(&part.to_ascii_uppercase()),
            Self::After(time) => at >= *time,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn next(faults: &mut LinkFaults, number: u64, text: &str, seconds: u64) -> Option<Effect> {
        faults.next(Kind::Supply, number, text, Duration::from_secs(seconds))
    }

    fn fault(when: When, lasting: Lasting, effect: Effect) -> LinkFault {
        LinkFault { instrument: Kind::Supply, when, lasting, effect }
    }

    #[test]
    fn a_fault_that_happens_once_befalls_one_message_of_one_instrument() {
        let mut faults = LinkFaults::new(vec![fault(
            When::Containing("volt?".to_owned()),
            Lasting::Once,
            Effect::NoReply,
        )]);
        assert_eq!(faults.next(Kind::Ammeter, 1, "VOLT?", Duration::ZERO), None);
        assert_eq!(next(&mut faults, 1, "VOLT 5", 0), None);
        assert_eq!(next(&mut faults, 2, "VOLT?", 0), Some(Effect::NoReply));
        assert_eq!(next(&mut faults, 3, "VOLT?", 0), None);
    }

    #[test]
    fn a_lasting_fault_begins_at_its_message_or_time_and_stays() {
        let mut faults = LinkFaults::new(vec![
            fault(When::Message(3), Lasting::Always, Effect::Echo),
            fault(When::After(Duration::from_secs(5)), Lasting::Once, Effect::Swallow),
        ]);
        assert_eq!(next(&mut faults, 2, "", 4), None);
        assert_eq!(next(&mut faults, 2, "", 6), Some(Effect::Swallow));
        assert_eq!(next(&mut faults, 3, "", 7), Some(Effect::Echo));
        assert_eq!(next(&mut faults, 4, "", 8), Some(Effect::Echo));
    }
}
