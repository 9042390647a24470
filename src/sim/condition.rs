//! Named conditions of a board or its bench.

/// What is special about a simulated board or its bench.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Condition {
    /// Nothing: everything is inside the limits.
    Good,
    /// The switch is shorted.
    NeverTrips,
    /// The switch is open for ever.
    NeverOn,
    /// The trip voltage is above its limit.
    HighTrip,
    /// The hysteresis is below its limit.
    NarrowHysteresis,
    /// The open switch leaks more than the limit allows.
    LeakingSwitch,
    /// The pull-up resistor is a decade too low.
    LowPullUp,
    /// The detector is many times slower than its design allows: it takes about a tenth of a second.
    SlowDetector,
    /// The load is not connected.
    NoLoad,
    /// The board is connected the wrong way round.
    Reversed,
    /// Leads so resistive that the load's drop exceeds the hysteresis.
    Chatter,
    /// A supply that cannot pull its output down.
    NoSink,
}

/// A word that names no condition.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
#[error("read \"{read}\", wanted the name of a condition: one of {}", names())]
pub struct UnknownCondition {
    /// The word as found.
    pub read: String,
}

impl Condition {
    /// All conditions, in the order of help texts.
    pub const ALL: [Self; 12] = [
        Self::Good,
        Self::NeverTrips,
        Self::NeverOn,
        Self::HighTrip,
        Self::NarrowHysteresis,
        Self::LeakingSwitch,
        Self::LowPullUp,
        Self::SlowDetector,
        Self::NoLoad,
        Self::Reversed,
        Self::Chatter,
        Self::NoSink,
    ];

    /// The name on the command line.
    pub fn key(self) -> &'static str {
        match self {
            Self::Good => "good",
            Self::NeverTrips => "never-trips",
            Self::NeverOn => "never-on",
            Self::HighTrip => "high-trip",
            Self::NarrowHysteresis => "narrow-hysteresis",
            Self::LeakingSwitch => "leaking-switch",
            Self::LowPullUp => "low-pull-up",
            Self::SlowDetector => "slow-detector",
            Self::NoLoad => "no-load",
            Self::Reversed => "reversed",
            Self::Chatter => "chatter",
            Self::NoSink => "no-sink",
        }
    }

    /// What it is, in one line.
    pub fn description(self) -> &'static str {
        match self {
            Self::Good => "everything inside the limits",
            Self::NeverTrips => "shorted switch: the load stays on down to zero",
            Self::NeverOn => "open switch: the load never gets its current",
            Self::HighTrip => "trip voltage above its limit, hysteresis intact",
            Self::NarrowHysteresis => "hysteresis below its limit, trip intact",
            Self::LeakingSwitch => "the open switch leaks more than the off current may be",
            Self::LowPullUp => "pull-up resistor a decade too low",
            Self::SlowDetector => "detector many times slower than the design allows",
            Self::NoLoad => "load not connected",
            Self::Reversed => "board connected the wrong way round",
            Self::Chatter => "leads so resistive that the load's drop exceeds the hysteresis",
            Self::NoSink => "supply that cannot pull its output down",
        }
    }
}

impl std::str::FromStr for Condition {
    type Err = UnknownCondition;

    fn from_str(text: &str) -> Result<Self, UnknownCondition> {
        let named = |condition: &Self| condition.key() == text;
        Self::ALL.into_iter().find(named).ok_or_else(|| UnknownCondition { read: text.to_owned() })
    }
}

impl std::fmt::Display for Condition {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.pad(self.key())
    }
}

fn names() -> String {
    Condition::ALL.map(Condition::key).join(", ")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_condition_is_read_back_from_its_name() {
        for condition in Condition::ALL {
            assert_eq!(condition.key().parse(), Ok(condition));
        }
    }

    #[test]
    fn an_unknown_name_is_answered_with_the_known_ones() {
        let error = "sleepy".parse::<Condition>().expect_err("no such condition");
        assert!(error.to_string().contains("sleepy") && error.to_string().contains("never-trips"), "{error}");
    }
}
