//! A moment of wall time as a record keeps it: once for computers, once for the people at the station.

use jiff::tz::TimeZone;
use jiff::{Timestamp, Unit};
use serde::{Deserialize, Serialize};

/// A moment in UTC and in local time, both as RFC 3339, to the millisecond.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Moment {
    /// UTC.
    pub utc: Timestamp,
    /// The same moment on the clock on the wall, with its offset from UTC.
    pub local: String,
}

impl Moment {
    /// The moment `utc` as seen in `zone`.
    pub fn new(utc: Timestamp, zone: &TimeZone) -> Self {
        let utc = utc.round(Unit::Millisecond).unwrap_or(utc);
        Self { utc, local: utc.display_with_offset(zone.to_offset(utc)).to_string() }
    }

    /// The day in UTC.
    pub fn date(&self) -> jiff::civil::Date {
        TimeZone::UTC.to_datetime(self.utc).date()
    }

    /// Year and month in UTC, as in the names of the log's files: `2026-10`.
    pub fn month(&self) -> String {
        self.utc.strftime("%Y-%m").to_string()
    }

    /// Local date and time to the second, for people: `2026-10-19 16:22:33`.
    pub fn on_the_wall(&self) -> String {
        self.local.chars().take(19).map(|letter| if letter == 'T' { ' ' } else { letter }).collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use jiff::tz::Offset;

    #[test]
    fn a_moment_is_written_in_utc_and_with_the_local_offset() {
        let utc: Timestamp = "2026-10-31T23:30:00.1234Z".parse().expect("RFC 3339");
        let moment = Moment::new(utc, &TimeZone::fixed(Offset::constant(2)));
        assert_eq!(
            serde_json::to_string(&moment).expect("plain data"),
            r#"{"utc":"2026-10-31T23:30:00.123Z","local":"2026-11-01T01:30:00.123+02:00"}"#
        );
        assert_eq!(moment.month(), "2026-10");
        assert_eq!(moment.on_the_wall(), "2026-11-01 01:30:00");
    }
}
