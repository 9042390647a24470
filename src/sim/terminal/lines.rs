//! Cuts received bytes into program messages. CR, LF and both together end one; an empty one is dropped.

/// Input buffer of an instrument, bytes; a longer message is an overrun.
const CAPACITY: usize = 256;

/// Bytes of the message being received.
#[derive(Debug, Default)]
pub(super) struct Lines {
    partial: Vec<u8>,
    overrun: bool,
}

/// What a terminator completed.
#[derive(Debug, PartialEq)]
pub(super) enum Line {
    /// A message; bytes outside of UTF-8 are replaced, which no grammar accepts.
    Message(String),
    /// The message was longer than the input buffer and is lost.
    Overrun,
}

impl Lines {
    pub(super) fn push(&mut self, byte: u8) -> Option<Line> {
        if !matches!(byte, b'\r' | b'\n') {
            if self.partial.len() < CAPACITY {
                self.partial.push(byte);
            } else {
                self.overrun = true;
            }
            return None;
        }
        let bytes = std::mem::take(&mut self.partial);
        if std::mem::take(&mut self.overrun) {
            Some(Line::Overrun)
        } else if bytes.is_empty() {
            None
        } else {
            Some(Line::Message(String::from_utf8_lossy(&bytes).into_owned()))
        }
    }

    /// Forgets what was received of an unfinished message.
    pub(super) fn clear(&mut self) {
        self.partial.clear();
        self.overrun = false;
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn lines(bytes: &[u8]) -> Vec<Line> {
        let mut lines = Lines::default();
        bytes.iter().filter_map(|byte| lines.push(*byte)).collect()
    }

    #[test]
    fn any_terminator_ends_a_message_and_none_is_empty() {
        let messages: Vec<Line> = ["A", "B", "C"].map(|text| Line::Message(text.to_owned())).into();
        assert_eq!(lines(b"A\nB\rC\r\n\n\r\nrest"), messages);
    }

    #[test]
    fn a_message_longer_than_the_buffer_is_lost_as_a_whole() {
        let mut bytes = vec![b'A'; CAPACITY + 1];
        bytes.extend(b"\nB\n");
        assert_eq!(lines(&bytes), [Line::Overrun, Line::Message("B".to_owned())]);
    }
}
