//! Cuts a stream of bytes into lines.
//!
//! Instruments end a reply with LF, CR LF or CR; all are accepted, and so an empty line is never a reply. Only what a
//! terminator has ended is a line: the bytes of a cut reply stay here and are never taken for one.

/// Longest line kept, in bytes. The longest reply in use here, an identity, has at most 72 (IEEE 488.2-1992, 10.14.3).
pub const MAX_LINE: usize = 4096;

/// More bytes came without a terminator than any reply has.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error("more than {MAX_LINE} bytes came without a line end")]
pub struct LineTooLong;

/// The bytes that came since the last terminator.
#[derive(Debug, Default)]
pub struct Framer {
    partial: Vec<u8>,
    /// True after a line was given up as too long, until its terminator comes.
    skipping: bool,
}

impl Framer {
    /// Takes the next bytes, and returns the lines they complete without their terminators.
    ///
    /// Bytes that are not UTF-8 are replaced, so that noise shows in messages and never reads as a number.
    pub fn push(&mut self, bytes: &[u8]) -> Vec<Result<String, LineTooLong>> {
        let mut lines = Vec::new();
        for byte in bytes {
            match byte {
                b'\n' | b'\r' => {
                    if !self.partial.is_empty() {
                        lines.push(Ok(String::from_utf8_lossy(&self.partial).into_owned()));
                    }
                    self.clear();
                }
                _ if self.skipping => {}
                _ if self.partial.len() == MAX_LINE => {
                    lines.push(Err(LineTooLong));
                    self.partial.clear();
                    self.skipping = true;
                }
                byte => self.partial.push(*byte),
            }
        }
        lines
    }

    /// What has come of a line that is not ended.
    pub fn partial(&self) -> String {
        String::from_utf8_lossy(&self.partial).into_owned()
    }

    /// Whether nothing is kept of an unfinished line.
    pub fn is_empty(&self) -> bool {
        self.partial.is_empty() && !self.skipping
    }

    /// Forgets the unfinished line.
    pub fn clear(&mut self) {
        self.partial.clear();
        self.skipping = false;
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    fn lines(bytes: &[u8]) -> Vec<Result<String, LineTooLong>> {
        Framer::default().push(bytes)
    }

    fn ok(texts: &[&str]) -> Vec<Result<String, LineTooLong>> {
        texts.iter().map(|text| Ok((*text).to_owned())).collect()
    }

    #[test]
    fn every_terminator_ends_a_line_and_empty_lines_are_none() {
        assert_eq!(lines(b"1\n2\r\n3\r4\n\n\r\n5\r"), ok(&["1", "2", "3", "4", "5"]));
        assert_eq!(lines(b"\n\r\r\n"), ok(&[]));
    }

    #[test]
    fn a_cut_reply_is_kept_and_is_not_a_line() {
        let mut framer = Framer::default();
        assert_eq!(framer.push(b"+3.8500"), ok(&[]));
        assert_eq!(framer.partial(), "+3.8500");
        assert_eq!(framer.push(b"0E-06\n"), ok(&["+3.85000E-06"]));
        assert!(framer.is_empty());
    }

    #[test]
    fn a_line_that_never_ends_is_an_error_once_and_the_next_line_is_good() {
        let mut framer = Framer::default();
        assert_eq!(framer.push(&[b'x'; MAX_LINE]), ok(&[]));
        assert_eq!(framer.push(&[b'x'; 3 * MAX_LINE]), [Err(LineTooLong)]);
        assert_eq!(framer.push(b"tail\ngood\n"), ok(&["good"]));
        let whole = [b'y'; MAX_LINE].to_vec();
        assert_eq!(lines(&[whole.as_slice(), b"\n"].concat()).len(), 1);
    }

    #[test]
    fn noise_is_shown_and_is_no_number() {
        assert_eq!(lines(b"\xff3.1\n"), ok(&["\u{fffd}3.1"]));
    }

    proptest! {
        #[test]
        fn any_split_of_a_stream_yields_the_same_lines(
            pieces in proptest::collection::vec("[ -~\r\n]{0,12}", 0..20),
            long in 0..2_usize,
            cuts in proptest::collection::vec(0..20_000_usize, 0..12),
        ) {
            let mut stream = pieces.concat().into_bytes();
            stream.extend(std::iter::repeat_n(b'z', long * (MAX_LINE + 700)));
            stream.extend(b"\r\nend\n");
            let mut cuts: Vec<usize> = cuts.into_iter().map(|cut| cut % (stream.len() + 1)).collect();
            cuts.extend([0, stream.len()]);
            cuts.sort_unstable();
            let mut framer = Framer::default();
            let in_pieces: Vec<_> = cuts.windows(2).flat_map(|ends| framer.push(&stream[ends[0]..ends[1]])).collect();
            prop_assert_eq!(in_pieces, lines(&stream));
        }
    }
}
