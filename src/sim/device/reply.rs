//! What a device answers: numbers in the forms of IEEE 488.2, 8.7, and the answers of one message joined.

/// Stands for an overload (SCPI-1999 vol. 1, 7.2.1.4).
pub(super) const INFINITY: f64 = 9.9e37;

/// The answers to one message, separated by semicolons.
#[derive(Debug, Default)]
pub(super) struct Replies {
    line: Option<String>,
    closed: bool,
}

impl Replies {
    pub(super) fn add(&mut self, reply: String) {
        self.line = Some(match self.line.take() {
            Some(line) => line + ";" + &reply,
            None => reply,
        });
    }

    /// Adds text that only the end of the message ends, so that no other answer may follow (IEEE 488.2, 8.7.11).
    pub(super) fn add_indefinite(&mut self, reply: String) {
        self.add(reply);
        self.closed = true;
    }

    pub(super) fn are_closed(&self) -> bool {
        self.closed
    }

    pub(super) fn is_empty(&self) -> bool {
        self.line.is_none()
    }

    pub(super) fn line(self) -> Option<String> {
        self.line
    }
}

/// NR3 with sign, eight significant digits: `+6.0001200E+00`.
pub(super) fn nr3(value: f64) -> String {
    let text = format!("{value:+.7E}");
    match text.split_once('E') {
        Some((mantissa, exponent)) => {
            let exponent: i32 = exponent.parse().unwrap_or_default();
            format!("{mantissa}E{exponent:+03}")
        }
        None => text,
    }
}

/// NR1 for a state: `1` or `0`.
pub(super) fn nr1(state: bool) -> String {
    u8::from(state).to_string()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_have_a_sign_a_point_and_an_exponent_of_two_digits() {
        assert_eq!(nr3(6.00012), "+6.0001200E+00");
        assert_eq!(nr3(-2.4e-6), "-2.4000000E-06");
        assert_eq!(nr3(0.0), "+0.0000000E+00");
        assert_eq!(nr3(INFINITY), "+9.9000000E+37");
    }
}
