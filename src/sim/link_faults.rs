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
    /// The message with this number, the first being 1, among those that contain this text, in any case.
    Nth(u64, String),
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
    /// The same fault for a bench whose time runs `speed` times faster than that of the program, which waits on the
    /// wall clock for a reply.
    #[must_use]
    pub fn at_speed(mut self, speed: f64) -> Self {
        match &mut self.effect {
            Effect::LateReply(by) | Effect::CutReply(by) | Effect::Restart(by) => *by = by.mul_f64(speed),
            _ => {}
        }
        self
    }
}

impl Effect {
    /// What a bench makes of it that carries actions out without text; `None` where only the text shows it.
    pub fn mishap(&self) -> Option<Mishap> {
        match self {
            Self::NoReply | Self::LateReply(_) => Some(Mishap::ReplyLost(FaultKind::NoReply)),
            Self::CutReply(_) | Self::Garbage(_) => Some(Mishap::ReplyLost(FaultKind::BadReply)),
            Self::Swallow => Some(Mishap::CommandLost(FaultKind::NoReply)),
            Self::Refuse(_) => Some(Mishap::CommandLost(FaultKind::InstrumentError)),
            Self::Restart(_) => Some(Mishap::CommandLost(FaultKind::Restarted)),
            Self::HangUp => Some(Mishap::CommandLost(FaultKind::LinkLost)),
            Self::Echo | Self::Identity(_) => None,
        }
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
        let index = self.0.iter_mut().position(|fault| {
            fault.instrument == instrument && fault.when.is_now(fault.lasting, number, text, at)
        })?;
        match self.0[index].lasting {
            Lasting::Once => Some(self.0.remove(index).effect),
            Lasting::Always => Some(self.0[index].effect.clone()),
        }
    }
}

impl When {
    fn is_now(&mut self, lasting: Lasting, number: u64, text: &str, at: Duration) -> bool {
        match self {
            Self::Message(wanted) => match lasting {
                Lasting::Once => number == *wanted,
                Lasting::Always => number >= *wanted,
            },
            Self::Containing(part) => contains(text, part),
            Self::Nth(left, part) => {
                *left = left.saturating_sub(u64::from(contains(text, part)));
                *left == 0
            }
            Self::After(time) => at >= *time,
        }
    }
}

fn contains(text: &str, part: &str) -> bool {
    text.to_ascii_uppercase().contains(&part.to_ascii_uppercase())
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
    fn a_fault_may_wait_for_one_of_many_messages_of_a_kind() {
        let when = When::Nth(2, "volt ".to_owned());
        let mut faults = LinkFaults::new(vec![fault(when, Lasting::Once, Effect::NoReply)]);
        let befallen = ["VOLT 5", "VOLT?", "VOLT 4", "VOLT 3"].map(|text| next(&mut faults, 1, text, 0));
        assert_eq!(befallen, [None, None, Some(Effect::NoReply), None]);
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
