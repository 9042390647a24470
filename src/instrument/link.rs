//! Lines to and from one instrument, each reply with one deadline.
//!
//! The link knows when it may be out of step: after a reply that did not come, or not whole, the next line to come may
//! be the answer to an old question. It then refuses nothing by itself; the session brings it in step again first.

use super::definition::SerialSettings;
use super::error::{InstrumentError, Place};
use super::scpi::{Framer, LineTooLong};
use super::stream::ByteStream;
use crate::clock::Clock;
use std::collections::VecDeque;
use std::io;
use std::sync::Arc;
use std::time::Duration;

/// Times the quiet span after which a line that never falls silent is given up.
const LONGEST_DRAIN: u32 = 5;

/// Lines over a stream of bytes.
pub(super) struct Link {
    stream: Box<dyn ByteStream>,
    place: Arc<Place>,
    settings: SerialSettings,
    /// Runs with the wall whatever the bench does: deadlines guard against instruments that never answer.
    wall: Clock,
    /// The bench's clock, by which pauses are counted.
    clock: Clock,
    framer: Framer,
    lines: VecDeque<Result<String, LineTooLong>>,
    echoes: bool,
    in_step: bool,
}

impl Link {
    pub(super) fn new(
        stream: Box<dyn ByteStream>,
        place: Arc<Place>,
        settings: SerialSettings,
        clock: Clock,
    ) -> Self {
        Self {
            stream,
            place,
            settings,
            wall: Clock::real(),
            clock,
            framer: Framer::default(),
            lines: VecDeque::new(),
            echoes: false,
            in_step: true,
        }
    }

    pub(super) fn place(&self) -> &Arc<Place> {
        &self.place
    }

    /// The transport's settings as it reports them itself.
    pub(super) fn settings(&self) -> Option<String> {
        self.stream.settings()
    }

    /// Whether the next line to come is certainly the answer to the next question.
    pub(super) fn in_step(&self) -> bool {
        self.in_step
    }

    pub(super) fn set_in_step(&mut self, in_step: bool) {
        self.in_step = in_step;
    }

    /// Whether the instrument sends each command back before it answers.
    pub(super) fn echoes(&self) -> bool {
        self.echoes
    }

    pub(super) fn set_echoes(&mut self, echoes: bool) {
        self.echoes = echoes;
    }

    /// Waits on the bench's clock: after opening, and between commands of an instrument without handshake.
    pub(super) fn pause(&self, span: Duration) {
        let span = self.clock.wall(span);
        if !span.is_zero() {
            std::thread::sleep(span);
        }
    }

    /// Sends one line; on an instrument that echoes, takes the echo.
    pub(super) fn send(&mut self, line: &str, wait: Duration) -> Result<(), InstrumentError> {
        self.write(line, wait)?;
        if self.echoes && !line.is_empty() {
            let echo = self.receive(line, wait)?;
            if echo.trim() != line {
                return Err(self.bad_reply(line, echo, "the same text as echo"));
            }
        }
        Ok(())
    }

    /// Sends one line and leaves its echo, if any, among the lines to come. An empty line is a bare terminator.
    pub(super) fn write(&mut self, line: &str, wait: Duration) -> Result<(), InstrumentError> {
        let text = format!("{line}{}", self.settings.terminator.text());
        tracing::trace!(port = %self.place.port, sent = ?text);
        let deadline = self.wall.now() + wait + self.wire_time(&text);
        let mut rest = text.as_bytes();
        while !rest.is_empty() {
            let left = deadline.saturating_sub(self.wall.now());
            match self.stream.write(rest, left) {
                Ok(0) => return Err(self.lost("the port takes no more bytes")),
                Ok(written) => rest = rest.get(written..).unwrap_or_default(),
                Err(error) if error.kind() == io::ErrorKind::Interrupted && !left.is_zero() => {}
                Err(error) if is_timeout(&error) => {
                    self.in_step = false;
                    return Err(self.lost("the port took no bytes in time; is the handshake right?"));
                }
                Err(error) => return Err(self.lost(&error.to_string())),
            }
        }
        Ok(())
    }

    /// The next line, which answers `command`. What has come of a line that does not end in time is no reply.
    pub(super) fn receive(&mut self, command: &str, wait: Duration) -> Result<String, InstrumentError> {
        let deadline = self.wall.now() + wait + self.wire_time(command);
        loop {
            if let Some(line) = self.lines.pop_front() {
                return line.map_err(|LineTooLong| {
                    self.bad_reply(command, "an endless line".to_owned(), "one line")
                });
            }
            let left = deadline.saturating_sub(self.wall.now());
            if self.fill(left)? == Heard::Nothing && left.is_zero() {
                self.in_step = false;
                let (place, command, read) = (self.place(), command.to_owned(), self.framer.partial());
                let place = Arc::clone(place);
                return Err(if self.framer.is_empty() {
                    InstrumentError::NoReply { place, command, wait }
                } else {
                    InstrumentError::CutReply { place, command, read, wait }
                });
            }
        }
    }

    /// Whether something is here that nobody asked for.
    pub(super) fn has_stray_bytes(&mut self) -> Result<bool, InstrumentError> {
        if self.lines.is_empty() && self.framer.is_empty() {
            self.fill(Duration::ZERO)?;
        }
        Ok(!self.lines.is_empty() || !self.framer.is_empty())
    }

    /// Reads and drops until nothing came for `quiet`.
    pub(super) fn drain(&mut self, quiet: Duration) -> Result<(), InstrumentError> {
        let give_up = self.wall.now() + quiet * LONGEST_DRAIN;
        let mut silent_since = self.wall.now();
        loop {
            let silence = self.wall.now().saturating_sub(silent_since);
            if silence >= quiet {
                break;
            }
            if self.fill(quiet - silence)? == Heard::Something {
                silent_since = self.wall.now();
                if silent_since > give_up {
                    return Err(self.lost("the instrument does not stop sending"));
                }
            }
        }
        self.forget();
        Ok(())
    }

    /// Drops all that has come so far.
    pub(super) fn clear(&mut self) -> Result<(), InstrumentError> {
        self.stream.clear_input().map_err(|error| self.lost(&error.to_string()))?;
        self.forget();
        Ok(())
    }

    /// A line that does not fit its question may be the answer to an older one: the link is out of step.
    pub(super) fn bad_reply(&mut self, command: &str, read: String, wanted: &'static str) -> InstrumentError {
        self.in_step = false;
        InstrumentError::BadReply {
            place: Arc::clone(&self.place),
            command: command.to_owned(),
            read,
            wanted,
        }
    }

    pub(super) fn lost(&self, cause: &str) -> InstrumentError {
        InstrumentError::LinkLost { place: Arc::clone(&self.place), cause: cause.to_owned() }
    }

    fn forget(&mut self) {
        self.framer.clear();
        self.lines.clear();
    }

    /// Waits at most `wait` for bytes and frames them.
    fn fill(&mut self, wait: Duration) -> Result<Heard, InstrumentError> {
        let mut buffer = [0; 512];
        match self.stream.read(&mut buffer, wait) {
            Ok(0) => Err(self.gone("the port returns no bytes")),
            Ok(count) => {
                let bytes = buffer.get(..count).unwrap_or_default();
                tracing::trace!(port = %self.place.port, read = %bytes.escape_ascii());
                self.lines.extend(self.framer.push(bytes));
                Ok(Heard::Something)
            }
            Err(error) if is_timeout(&error) || error.kind() == io::ErrorKind::Interrupted => {
                Ok(Heard::Nothing)
            }
            Err(error) => Err(self.gone(&error.to_string())),
        }
    }

    fn gone(&mut self, cause: &str) -> InstrumentError {
        self.in_step = false;
        self.lost(cause)
    }

    fn wire_time(&self, text: &str) -> Duration {
        self.settings.wire_time(u32::try_from(text.len()).unwrap_or(u32::MAX))
    }
}

#[derive(Clone, Copy, PartialEq, Eq)]
enum Heard {
    Something,
    Nothing,
}

fn is_timeout(error: &io::Error) -> bool {
    matches!(error.kind(), io::ErrorKind::TimedOut | io::ErrorKind::WouldBlock)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::instrument::definition::{Definition, builtin};

    const WAIT: Duration = Duration::from_millis(20);

    /// A stream that gives what it was told to give, in order, and after that nothing.
    struct Told {
        reads: VecDeque<io::Result<&'static [u8]>>,
        written: Vec<u8>,
        interruptions: u32,
    }

    impl ByteStream for Told {
        fn read(&mut self, buffer: &mut [u8], wait: Duration) -> io::Result<usize> {
            let Some(next) = self.reads.pop_front() else {
                std::thread::sleep(wait);
                return Err(io::ErrorKind::TimedOut.into());
            };
            let bytes = next?;
            buffer[..bytes.len()].copy_from_slice(bytes);
            Ok(bytes.len())
        }

        fn write(&mut self, bytes: &[u8], _: Duration) -> io::Result<usize> {
            if self.interruptions > 0 {
                self.interruptions -= 1;
                return Err(io::ErrorKind::Interrupted.into());
            }
            self.written.extend_from_slice(&bytes[..bytes.len().min(3)]);
            Ok(bytes.len().min(3))
        }

        fn clear_input(&mut self) -> io::Result<()> {
            Ok(())
        }

        fn settings(&self) -> Option<String> {
            Some(String::from_utf8_lossy(&self.written).into_owned())
        }
    }

    fn link(reads: Vec<io::Result<&'static [u8]>>) -> Link {
        let text = builtin("programmable-supply").expect("built in");
        let definition = Definition::read("supply", text).unwrap_or_else(|problems| panic!("{problems}"));
        let place = Arc::new(Place { instrument: "supply".to_owned(), port: "told".to_owned() });
        let stream = Told { reads: reads.into(), written: Vec::new(), interruptions: 2 };
        Link::new(Box::new(stream), place, definition.serial, Clock::real())
    }

    fn interrupted() -> io::Result<&'static [u8]> {
        Err(io::ErrorKind::Interrupted.into())
    }

    #[test]
    fn a_signal_does_not_end_a_wait_and_pieces_make_one_line() {
        let mut link = link(vec![interrupted(), Ok(b"+1.2"), interrupted(), Ok(b"5\r"), Ok(b"\n")]);
        assert_eq!(link.receive("VOLT?", WAIT), Ok("+1.25".to_owned()));
        assert!(link.in_step());
    }

    #[test]
    fn a_command_is_written_whole_in_spite_of_signals_and_small_buffers() {
        let mut link = link(Vec::new());
        link.write("VOLT 5.97", WAIT).expect("it is written");
        assert_eq!(link.settings().as_deref(), Some("VOLT 5.97\n"));
    }

    #[test]
    fn signals_without_end_do_not_stretch_the_deadline() {
        let mut link = link((0..1000).map(|_| interrupted()).collect());
        let clock = Clock::real();
        assert!(matches!(link.receive("VOLT?", Duration::ZERO), Err(InstrumentError::NoReply { .. })));
        assert!(clock.now() < Duration::from_secs(1));
        assert!(!link.in_step());
    }

    #[test]
    fn a_stream_that_ends_is_a_lost_link() {
        for read in [Ok(&b""[..]), Err(io::ErrorKind::BrokenPipe.into()), Err(io::Error::other("I/O error"))]
        {
            let mut link = link(vec![Ok(b"+1.2"), read]);
            assert!(matches!(link.receive("VOLT?", WAIT), Err(InstrumentError::LinkLost { .. })));
            assert!(!link.in_step());
        }
    }

    #[test]
    fn a_line_without_end_is_given_up() {
        let mut link = link((0..20).map(|_| Ok(&[b'x'; 400][..])).collect());
        let error = link.receive("VOLT?", WAIT).expect_err("no line");
        assert!(
            error.to_string().contains("answered \"VOLT?\" with \"an endless line\", wanted one line"),
            "{error}"
        );
        assert!(!link.in_step());
    }

    #[test]
    fn an_instrument_that_never_falls_silent_is_given_up() {
        let mut link = link((0..100_000).map(|_| Ok(&b"9\n"[..])).collect());
        assert!(matches!(link.drain(Duration::from_micros(100)), Err(InstrumentError::LinkLost { .. })));
    }
}
