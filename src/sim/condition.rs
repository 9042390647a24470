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
    /// The pull-up resistor is a decade too high, so that the gate charges slowly.
    HighPullUp,
    /// The detector's output is stuck on: the gate follows the supply.
    DetectorStuckOn,
    /// The detector is the next lower voltage option.
    WrongDetector,
    /// The capacitor that stretches the release is missing.
    NoDelayCapacitor,
    /// The release takes several times as long as its design allows.
    SlowRelease,
    /// The switch conducts again where the detector has stopped working.
    DeepConduction,
    /// A high trip and a low re-enable voltage: each inside its limits, the hysteresis is not.
    OverlappingThresholds,
    /// Once tripped, the board stays off until its supply has gone.
    Latched,
    /// A film of flux lies across the open switch: more off current, still inside the limit.
    FluxFilm,
    /// The board is at 60 °C.
    HotBoard,
    /// A capacitor at the load that the current limit cannot charge within the detect delay.
    LargeLoadCapacitor,
    /// A contact in the supply line opens partly, for milliseconds at a time.
    IntermittentContact,
    /// The ammeter's leads are swapped.
    MeterReversed,
    /// The ammeter has no range for microamperes.
    CoarseAmmeter,
    /// The relay of the ammeter's ranges hangs on the smallest.
    StuckRange,
    /// The ammeter's fuse is blown.
    BlownFuse,
    /// Mains hum on the supply line.
    MainsRipple,
    /// A supply that drifts, and whose own reading drifts with it.
    DriftingSupply,
    /// 5 V from another source come in at the board.
    BackFeed,
    /// The supply gives way below the load's current, whatever limit is set.
    LowCurrentLimit,
    /// The load has an undervoltage lockout of its own, between trip and re-enable.
    LoadLockout,
    /// The bench was left on between the thresholds; the board is on or off.
    LeftOnInBand,
    /// The supply's sense lead is open, and its output is too high.
    OpenSenseHigh,
    /// The supply's sense lead is open, and its output is too low.
    OpenSenseLow,
    /// A second voltmeter hangs behind the ammeter.
    UnstatedVoltmeter,
    /// One answer of the ammeter comes too late.
    LateReply,
    /// One answer of the ammeter breaks off in the middle.
    CutReply,
    /// The supply restarts in the middle of the run.
    SupplyRestart,
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
    pub const ALL: [Self; 40] = [
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
        Self::HighPullUp,
        Self::DetectorStuckOn,
        Self::WrongDetector,
        Self::NoDelayCapacitor,
        Self::SlowRelease,
        Self::DeepConduction,
        Self::OverlappingThresholds,
        Self::Latched,
        Self::FluxFilm,
        Self::HotBoard,
        Self::LargeLoadCapacitor,
        Self::IntermittentContact,
        Self::MeterReversed,
        Self::CoarseAmmeter,
        Self::StuckRange,
        Self::BlownFuse,
        Self::MainsRipple,
        Self::DriftingSupply,
        Self::BackFeed,
        Self::LowCurrentLimit,
        Self::LoadLockout,
        Self::LeftOnInBand,
        Self::OpenSenseHigh,
        Self::OpenSenseLow,
        Self::UnstatedVoltmeter,
        Self::LateReply,
        Self::CutReply,
        Self::SupplyRestart,
    ];

    /// The name on the command line.
    pub fn key(self) -> &'static str {
        self.words().0
    }

    /// What it is, in one line.
    pub fn description(self) -> &'static str {
        self.words().1
    }

    fn words(self) -> (&'static str, &'static str) {
        match self {
            Self::Good => ("good", "everything inside the limits"),
            Self::NeverTrips => ("never-trips", "shorted switch: the load stays on down to zero"),
            Self::NeverOn => ("never-on", "open switch: the load never gets its current"),
            Self::HighTrip => ("high-trip", "trip voltage above its limit, hysteresis intact"),
            Self::NarrowHysteresis => ("narrow-hysteresis", "hysteresis below its limit, trip intact"),
            Self::LeakingSwitch => {
                ("leaking-switch", "the open switch leaks more than the off current may be")
            }
            Self::LowPullUp => ("low-pull-up", "pull-up resistor a decade too low"),
            Self::SlowDetector => ("slow-detector", "detector many times slower than the design allows"),
            Self::NoLoad => ("no-load", "load not connected"),
            Self::Reversed => ("reversed", "board connected the wrong way round"),
            Self::Chatter => ("chatter", "leads so resistive that the load's drop exceeds the hysteresis"),
            Self::NoSink => ("no-sink", "supply that cannot pull its output down"),
            Self::HighPullUp => ("high-pull-up", "pull-up resistor a decade too high"),
            Self::DetectorStuckOn => {
                ("detector-stuck-on", "detector stuck on: the load stays on until the gate's voltage dies")
            }
            Self::WrongDetector => {
                ("wrong-detector", "detector of the next lower voltage: both thresholds a tenth too low")
            }
            Self::NoDelayCapacitor => {
                ("no-delay-capacitor", "delay capacitor missing: the board comes back at once")
            }
            Self::SlowRelease => {
                ("slow-release", "release delay several times longer than the design allows")
            }
            Self::DeepConduction => {
                ("deep-conduction", "conducts again in deep discharge, below the detector's working voltage")
            }
            Self::OverlappingThresholds => {
                ("overlapping-thresholds", "trip and re-enable inside their limits, too close together")
            }
            Self::Latched => ("latched", "stays off once tripped, until the supply has gone"),
            Self::FluxFilm => {
                ("flux-film", "flux across the open switch: off current high for its kind, inside the limit")
            }
            Self::HotBoard => ("hot-board", "board at 60 °C: thresholds shifted, leakage elevenfold"),
            Self::LargeLoadCapacitor => {
                ("large-load-capacitor", "load capacitor too large for the current limit: the board hiccups")
            }
            Self::IntermittentContact => {
                ("intermittent-contact", "contact in the supply line that comes and goes")
            }
            Self::MeterReversed => ("meter-reversed", "ammeter connected the wrong way round"),
            Self::CoarseAmmeter => ("coarse-ammeter", "ammeter without a range for the off current"),
            Self::StuckRange => ("stuck-range", "ammeter whose relay hangs on its smallest range"),
            Self::BlownFuse => {
                ("blown-fuse", "blown fuse in the ammeter: no current, readings of exactly zero")
            }
            Self::MainsRipple => ("mains-ripple", "50 Hz hum at the board, an eighth of its hysteresis"),
            Self::DriftingSupply => {
                ("drifting-supply", "supply that drifts by millivolts a minute and does not see it")
            }
            Self::BackFeed => ("back-feed", "5 V from a charger or USB come in at the board"),
            Self::LowCurrentLimit => {
                ("low-current-limit", "supply that limits the current below what the load draws")
            }
            Self::LoadLockout => ("load-lockout", "load that stops by itself above the trip voltage"),
            Self::LeftOnInBand => {
                ("left-on-in-band", "output left on between the thresholds, board in either state")
            }
            Self::OpenSenseHigh => ("open-sense-high", "open sense lead: output 5 % too high"),
            Self::OpenSenseLow => ("open-sense-low", "open sense lead: output too low"),
            Self::UnstatedVoltmeter => {
                ("unstated-voltmeter", "second voltmeter behind the ammeter that no file states")
            }
            Self::LateReply => ("late-reply", "one answer of the ammeter comes after its time is up"),
            Self::CutReply => ("cut-reply", "one answer of the ammeter breaks off in the middle"),
            Self::SupplyRestart => ("supply-restart", "supply that restarts in the middle of the run"),
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
