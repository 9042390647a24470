//! One instrument answering its port: waits the time it takes, lets faults happen, carries messages out, replies.

use super::lines::Line;
use crate::sim::device::{Device, Kind, ScpiError};
use crate::sim::link_faults::{Effect, LinkFaults};
use crate::sim::{SharedWorld, lock};
use std::collections::VecDeque;
use std::io::{self, ErrorKind, Write};
use std::sync::atomic::{AtomicBool, Ordering};
use std::sync::{Arc, Mutex};
use std::time::Duration;

/// Exchanges kept; older ones are forgotten.
const EXCHANGES: usize = 100_000;

/// Longest wait, in simulated time, between two looks at whether to stop.
const LOOK: Duration = Duration::from_millis(100);

/// How fast an instrument and its line are.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Pace {
    /// Simulated time from the last byte of a message to it being carried out.
    pub response: Duration,
    /// Symbols a second of the serial line, ten to a character; `None` for a line that takes no time.
    pub baud: Option<u32>,
}

impl Pace {
    fn wire_time(&self, characters: usize) -> Duration {
        let symbols = u32::try_from(characters).unwrap_or(u32::MAX).saturating_mul(10);
        self.baud.map_or(Duration::ZERO, |baud| Duration::from_secs(1) * symbols / baud.max(1))
    }
}

/// One message and what came of it, in simulated time.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Exchange {
    /// When the message had arrived at the pseudo-terminal.
    pub from: Duration,
    /// When the instrument was done: just before its reply, if any, became readable.
    pub until: Duration,
    /// Whether there was a reply.
    pub replied: bool,
}

/// What an instrument and those who watch it share.
pub(super) struct Shared {
    pub(super) device: Mutex<Device>,
    pub(super) faults: Arc<Mutex<LinkFaults>>,
    pub(super) exchanges: Mutex<VecDeque<Exchange>>,
    pub(super) stop: AtomicBool,
}

/// Whether the port lives on after a message.
#[derive(Debug, PartialEq)]
pub(super) enum Then {
    /// As before.
    GoOn,
    /// What was received meanwhile is lost.
    ForgetInput,
    /// The port is gone.
    HangUp,
}

/// An instrument at its end of the line.
pub(super) struct Conversation {
    pub(super) kind: Kind,
    pub(super) world: SharedWorld,
    pub(super) pace: Pace,
    pub(super) shared: Arc<Shared>,
    pub(super) received: u64,
}

impl Conversation {
    /// Deals with one received line; `line_out` leads back to whoever sent it.
    pub(super) fn answer(&mut self, line: &Line, line_out: &mut impl Write) -> io::Result<Then> {
        let Line::Message(message) = line else {
            lock(&self.shared.device).report(ScpiError::INPUT_OVERRUN);
            return Ok(Then::GoOn);
        };
        let from = self.world.now();
        self.received += 1;
        let effect = lock(&self.shared.faults).next(self.kind, self.received, message, from);
        self.pause(self.pace.wire_time(message.len() + 1) + self.pace.response);
        let reply = match &effect {
            Some(Effect::HangUp) => return Ok(Then::HangUp),
            Some(Effect::Swallow) => {
                self.note(from, false);
                return Ok(Then::GoOn);
            }
            Some(Effect::Restart(deaf)) => {
                lock(&self.shared.device).restart(&self.world);
                self.pause(*deaf);
                self.note(from, false);
                return Ok(Then::ForgetInput);
            }
            Some(Effect::Refuse(error)) => {
                lock(&self.shared.device).report(*error);
                None
            }
            Some(Effect::Identity(identity)) => {
                lock(&self.shared.device).set_identity(identity.clone());
                self.execute(message)
            }
            _ => self.execute(message),
        };
        if effect == Some(Effect::Echo) {
            self.send(format!("{message}\r\n").as_bytes(), line_out)?;
        }
        if let Some(reply) = &reply {
            self.pause(self.pace.wire_time(reply.len() + 1));
        }
        self.note(from, reply.is_some());
        if let Some(reply) = reply {
            self.deliver(&(reply + "\n").into_bytes(), effect, line_out)?;
        }
        Ok(Then::GoOn)
    }

    fn execute(&self, message: &str) -> Option<String> {
        lock(&self.shared.device).execute(message, &self.world)
    }

    fn deliver(&self, reply: &[u8], effect: Option<Effect>, line_out: &mut impl Write) -> io::Result<()> {
        match effect {
            Some(Effect::NoReply) => Ok(()),
            Some(Effect::Garbage(bytes)) => self.send(&bytes, line_out),
            Some(Effect::LateReply(late)) => {
                self.pause(late);
                self.send(reply, line_out)
            }
            Some(Effect::CutReply(gap)) => {
                let (head, tail) = reply.split_at(reply.len() / 2);
                self.send(head, line_out)?;
                self.pause(gap);
                self.send(tail, line_out)
            }
            _ => self.send(reply, line_out),
        }
    }

    /// Sends bytes, unless nobody takes them: then both sides would wait for each other (IEEE 488.2, 6.3.1.7).
    fn send(&self, bytes: &[u8], line_out: &mut impl Write) -> io::Result<()> {
        match line_out.write_all(bytes) {
            Err(error) if error.kind() == ErrorKind::WouldBlock => {
                lock(&self.shared.device).report(ScpiError::DEADLOCKED);
                Ok(())
            }
            result => result,
        }
    }

    /// Lets simulated time pass, but not past a request to stop.
    fn pause(&self, time: Duration) {
        let until = self.world.now() + time;
        while !self.shared.stop.load(Ordering::Acquire) {
            let left = until.saturating_sub(self.world.now());
            if left == Duration::ZERO {
                return;
            }
            self.world.pass(left.min(LOOK));
        }
    }

    fn note(&self, from: Duration, replied: bool) {
        let mut exchanges = lock(&self.shared.exchanges);
        if exchanges.len() == EXCHANGES {
            exchanges.pop_front();
        }
        exchanges.push_back(Exchange { from, until: self.world.now(), replied });
    }
}
