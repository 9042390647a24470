//! The profile of a logger's battery cut-off, written out, for tests that need a board but no file.
#![expect(clippy::expect_used, reason = "a test stops at what it cannot read")]

use ebbmark::profile::{Limit, Load, Profile, QuantityName, Ramp, Supply, Timing};
use ebbmark::units::{Amps, Ohms, Volts, Watts};
use std::collections::BTreeMap;
use std::time::Duration;

/// Trip near 6.0 V, re-enable near 6.4 V, 55 ohm.
pub(crate) fn profile() -> Profile {
    let limit = |min, max| Limit { at: None, min: Some(min), max: Some(max) };
    Profile {
        board: "RN-204".to_owned(),
        revision: "C".to_owned(),
        title: "River-level logger, battery cut-off".to_owned(),
        serial_number: regex_lite::Regex::new("RN[0-9]{6}").expect("a pattern"),
        supply: Supply {
            start: Volts(7.6),
            floor: Volts(5.2),
            maximum: Volts(8.4),
            current_limit: Amps(0.35),
        },
        load: Load { resistance: Ohms(55.0), tolerance: 0.01, rating: Watts(3.0) },
        timing: Timing { detect_delay: Duration::from_millis(5), release_delay: Duration::from_millis(20) },
        ramp: Ramp::Staircase { step: Volts(0.01) },
        limits: BTreeMap::from([
            (QuantityName::Trip, limit(5.88, 6.12)),
            (QuantityName::ReEnable, limit(6.24, 6.56)),
            (QuantityName::Hysteresis, limit(0.3, 0.5)),
            (QuantityName::OffCurrent, Limit { at: Some(Volts(5.8)), ..limit(1e-6, 4e-6) }),
        ]),
    }
}
