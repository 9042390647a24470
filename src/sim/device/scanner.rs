//! A place in the text of a program message, moved forward by the readers of its parts.

/// The text not yet read.
#[derive(Clone, Debug)]
pub(super) struct Scanner<'t>(&'t str);

impl<'t> Scanner<'t> {
    pub(super) fn new(text: &'t str) -> Self {
        Self(text)
    }

    pub(super) fn peek(&self) -> Option<char> {
        self.0.chars().next()
    }

    pub(super) fn next(&mut self) -> Option<char> {
        let next = self.peek()?;
        self.0 = &self.0[next.len_utf8()..];
        Some(next)
    }

    /// Takes the longest run of wanted characters, which may be empty.
    pub(super) fn take_while(&mut self, wanted: impl Fn(char) -> bool) -> &'t str {
        let end = self.0.find(|c| !wanted(c)).unwrap_or(self.0.len());
        let (taken, rest) = self.0.split_at(end);
        self.0 = rest;
        taken
    }

    /// White space of IEEE 488.2, 7.4.1.2: the blank and all control characters but the terminator.
    pub(super) fn skip_space(&mut self) -> bool {
        !self.take_while(|c| c <= ' ').is_empty()
    }

    /// Takes an exponent with its sign and digits; takes nothing where an E begins something else.
    pub(super) fn take_exponent(&mut self) -> Option<String> {
        let mut ahead = self.clone();
        ahead.skip_space();
        if !matches!(ahead.next()?, 'e' | 'E') {
            return None;
        }
        ahead.skip_space();
        let sign = ahead.take_while(|c| matches!(c, '+' | '-'));
        let digits = ahead.take_while(|c| c.is_ascii_digit());
        if sign.len() > 1 || digits.is_empty() {
            return None;
        }
        *self = ahead;
        Some(format!("{sign}{digits}"))
    }
}
