//! The one place where the program reads the wall clock.

use super::Moment;
use jiff::Timestamp;
use jiff::tz::TimeZone;

/// This moment, in UTC and in the time zone of the computer.
#[expect(clippy::disallowed_methods, reason = "the wall clock is read here and nowhere else")]
pub fn now() -> Moment {
    Moment::new(Timestamp::now(), &TimeZone::system())
}
