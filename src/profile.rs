//! What a board must do: a profile, read from hand-written TOML and checked in full.
//!
//! ```toml
//! schema = 1                          # version of this format
//! board = "RN-204"                    # part number
//! revision = "C"
//! title = "River-level logger"        # for people
//! serial_number = "RN[0-9]{6}"        # regular expression, matched in full
//! latched = false                     # optional: true where a board that tripped stays off until its supply has gone
//!
//! [supply]                            # how the supply is driven
//! start = "7.60 V"                    # board certainly on
//! floor = "5.20 V"                    # end of the downward ramp
//! maximum = "8.40 V"                  # never exceeded; at most 30 V
//! current_limit = "350 mA"            # above the load's current; at most 5 A
//!
//! [load]                              # what the board drives during the test
//! resistance = "55 ohm"
//! tolerance = "1 %"
//! rating = "3 W"                      # at least maximum^2 / resistance
//! capacitance = "10 uF"               # optional: across it; can the supply charge it before the board trips again?
//!
//! [timing]                            # slowest the design allows
//! detect_delay = "5 ms"               # crossing the trip to open switch
//! release_delay = "20 ms"             # crossing the re-enable to closed switch
//!
//! [ramp]
//! mode = "search"                     # or "staircase"
//! step = "10 mV"                      # of a staircase; needed when the mode is staircase
//! resolution = "2 mV"                 # of a search; needed when the mode is search
//!
//! [limits]                            # any quantity of QuantityName; min, max or both
//! trip = { min = "5.88 V", max = "6.12 V" }
//! off_current = { at = "5.80 V", max = "4.0 uA" }   # only this one has "at"
//!
//! [measure]                           # may be left out; a limit on a quantity measures it by itself
//! delays = true                       # detect and release delay, by steps across the thresholds
//! ramp_rates = 3                      # the same from ramps of so many rates as well; 3 to 6
//! deep_floor = "0.3 V"                # sweep from the floor down to here: does the switch conduct again?
//! in_band = "6.18 V"                  # switch on at this voltage between trip and re-enable, and note the state
//! in_band_times = 3                   # how often; 3 if left out
//! wanted_in_band = "off"              # the state the design wants; either is right if left out
//!
//! [off_line]                          # optional: the off current over a span, to tell a resistance from a leak
//! from = "2.00 V"                     # the detector works here for certain
//! to = "5.80 V"                       # below every trip the limits allow
//! points = 5                          # 4 to 20
//!
//! [[off_path]]                        # optional, one block a path: the off-state budget
//! name = "pull-up"
//! resistance = "6.8 Mohm"             # or current = "0.4 uA"
//! tolerance = "5 %"
//! conducts = "off"                    # "off", "on" or "always"
//!
//! [pack]                              # optional: the battery behind the board
//! chemistry = "li-ion"                # with cells: are the voltages plausible?
//! cells = 2
//! resistance = "150 mohm"             # the voltage rises by current x resistance when the switch opens,
//! recovery = "200 mV"                 # and by this in the hours after
//! rebound_hold = "2 s"                # optional: try it out, so long
//! remaining_capacity = "200 mAh"      # between cut-off and harm
//! capacity = "2.6 Ah"                 # loses self_discharge of it a month
//! self_discharge = "2 %"
//! tolerance = "30 %"                  # of remaining capacity and self-discharge
//! storage_voltage = "5.80 V"          # where off_current has "at", if left out
//!
//! [bench]                             # may be left out, each key too: what a bench must have shown before a test
//! check_every = "24 h"                # `ebbmark bench check`, with everything in order
//! zero_every = "8 h"                  # `ebbmark bench zero`
//! reference_every = "24 h"            # `ebbmark bench check --reference`
//! when_overdue = "refuse"             # or "warn"
//! when_calibration_overdue = "warn"   # or "refuse"
//! ```
//!
//! A table `[decision]` may say how values are held against the limits: [`DecisionRule`].
//!
//! The tables `[detector]`, `[divider]` and `[environment]` may say what the thresholds are made of; see [`Parts`].

mod bench;
mod check;
mod check_limits;
mod decision;
mod detector_noise;
mod draft;
mod limit;
mod measure;
mod off_line;
mod off_path;
mod pack;
mod parts;
mod rewrite;
#[cfg(test)]
mod sample;
mod serial_number;

pub use bench::{BenchRules, WhenOverdue};
pub use decision::{Acceptance, DecisionRule, WhenBelow};
pub use detector_noise::{DetectorNoise, noise_rate};
pub use limit::{Limit, QuantityName};
pub use measure::{InBand, Measure, WantedInBand};
pub use off_line::OffLine;
pub use off_path::{Conducts, Draws, OffBudget, OffPath, Span};
pub use pack::{Chemistry, Pack, Rebound, Storage};
pub use parts::{Detector, Divider, Environment, Parts, Spread, Temperatures};
pub use rewrite::{NewLimit, RewriteError, with_limits};

use crate::document::{Document, Problems};
use crate::units::{Amps, Farads, Ohms, Volts, Watts};
use draft::Draft;
use sha2::{Digest, Sha256};
use std::collections::BTreeMap;
use std::time::Duration;

/// What one board, at one revision, must do on the bench. One that exists has been checked.
#[derive(Clone, Debug)]
pub struct Profile {
    /// Part number.
    pub board: String,
    /// Revision of the board.
    pub revision: String,
    /// What it is, for people.
    pub title: String,
    /// Pattern of serial numbers, anchored at both ends; [`Profile::matches`] applies it.
    pub serial_number: regex_lite::Regex,
    /// Whether a board that has tripped must stay off until its supply has gone, however high the voltage.
    pub latched: bool,
    /// How the supply is driven.
    pub supply: Supply,
    /// What the board drives during the test.
    pub load: Load,
    /// The slowest the design allows.
    pub timing: Timing,
    /// How the thresholds are looked for.
    pub ramp: Ramp,
    /// Limits by quantity.
    pub limits: BTreeMap<QuantityName, Limit>,
    /// How values are held against them.
    pub decision: DecisionRule,
    /// What is measured beyond thresholds and off current.
    pub measure: Measure,
    /// What its thresholds are made of, where the profile says so.
    pub parts: Option<Parts>,
    /// The off-state budget, path by path; empty where the profile gives none.
    pub off_paths: Vec<OffPath>,
    /// Where the off current is read at several voltages, as the file says; [`Profile::off_line`] knows more.
    pub off_line: Option<OffLine>,
    /// The battery behind the board, as far as the file tells.
    pub pack: Pack,
    /// What the bench must have shown before, and how long ago at most.
    pub bench: BenchRules,
    /// SHA-256 (FIPS 180-4) of the file's text, 64 hexadecimal digits.
    pub hash: String,
}

/// Voltages and current of the supply during a run.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Supply {
    /// Board certainly on.
    pub start: Volts,
    /// End of the downward ramp.
    pub floor: Volts,
    /// Never exceeded, whatever happens.
    pub maximum: Volts,
    /// Current limit set in the supply.
    pub current_limit: Amps,
}

/// The load behind the switch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Load {
    /// Nominal resistance.
    pub resistance: Ohms,
    /// Tolerance, as a fraction of one.
    pub tolerance: f64,
    /// Power it may take for as long as a run lasts.
    pub rating: Watts,
    /// Capacitance across it, charged when the switch closes; `None` where nothing is said.
    pub capacitance: Option<Farads>,
}

impl Load {
    /// Most current a load inside its tolerance draws at `voltage`.
    pub fn most_current(&self, voltage: Volts) -> Amps {
        voltage / (self.resistance * (1.0 - self.tolerance))
    }
}

/// Longest delays of the board.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Timing {
    /// From crossing the trip voltage to the switch being open.
    pub detect_delay: Duration,
    /// From crossing the re-enable voltage to the switch being closed.
    pub release_delay: Duration,
}

/// How the thresholds are looked for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Ramp {
    /// Every step of the whole ramp.
    Staircase {
        /// Height of a step.
        step: Volts,
    },
    /// Narrowing, until each threshold is known to lie within one cell.
    Search {
        /// Width of a cell.
        resolution: Volts,
    },
}

impl Profile {
    /// Reads and checks the profile in `text`, which came from the file called `name`.
    ///
    /// # Errors
    /// Every problem of the file: what cannot be read, what is unknown, and what does not fit together.
    pub fn read(name: &str, text: &str) -> Result<Self, Problems> {
        Document::new(name, text).read(|root| {
            let draft = Draft::read(root);
            check::check(&draft, root);
            check_limits::check(&draft, root);
            measure::check(&draft, root);
            parts::fits_the_ramp(&draft, root);
            off_path::check(&draft, root);
            off_line::check(&draft, root);
            pack::check(&draft, root);
            draft.finish(hash(text))
        })
    }

    /// The pattern of the serial numbers, as the profile has it.
    pub fn serial_numbers(&self) -> &str {
        serial_number::as_written(&self.serial_number)
    }

    /// True when the whole of `serial` is a serial number of this board.
    pub fn matches(&self, serial: &str) -> bool {
        self.serial_number.is_match(serial)
    }
}

fn hash(text: &str) -> String {
    Sha256::digest(text.as_bytes()).iter().map(|byte| format!("{byte:02x}")).collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    #[test]
    fn every_shipped_profile_is_read_without_complaint() {
        for (name, text) in [
            ("river-node.toml", sample::RIVER_NODE),
            ("garden-probe.toml", include_str!("../profiles/garden-probe.toml")),
            ("mast-beacon.toml", include_str!("../profiles/mast-beacon.toml")),
        ] {
            if let Err(problems) = Profile::read(name, text) {
                panic!("{problems}");
            }
        }
    }

    #[test]
    fn the_river_node_is_read_as_written() {
        let profile = Profile::read("river-node.toml", sample::RIVER_NODE).expect("a good profile");
        assert_eq!(profile.board, "RN-204");
        assert_eq!(profile.revision, "C");
        assert_eq!(
            profile.supply,
            Supply { start: Volts(7.6), floor: Volts(5.2), maximum: Volts(8.4), current_limit: Amps(0.35) }
        );
        assert_eq!(
            profile.load,
            Load { resistance: Ohms(55.0), tolerance: 0.01, rating: Watts(3.0), capacitance: None }
        );
        assert_eq!(profile.timing.release_delay, Duration::from_millis(20));
        assert_eq!(profile.ramp, Ramp::Search { resolution: Volts(0.002) });
        assert_eq!(profile.limits.len(), 4);
        assert_eq!(
            profile.limits[&QuantityName::OffCurrent],
            Limit { at: Some(Volts(5.8)), min: Some(1e-6), max: Some(4e-6) }
        );
    }

    #[test]
    fn a_serial_number_matches_in_full_or_not_at_all() {
        let profile = Profile::read("river-node.toml", sample::RIVER_NODE).expect("a good profile");
        assert!(profile.matches("RN000123"));
        for wrong in ["", "RN00012", "RN0001234", "xRN000123", "rn000123", "RN000123\n"] {
            assert!(!profile.matches(wrong), "{wrong:?}");
        }
    }

    /// FIPS 180-4, the one-block example message "abc".
    #[test]
    fn the_hash_is_sha_256_of_the_text() {
        assert_eq!(hash("abc"), "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad");
    }

    proptest! {
        #[test]
        fn any_text_is_read_or_refused_without_panic(text in "\\PC{0,200}") {
            if let Err(problems) = Profile::read("p.toml", &text) {
                prop_assert!(problems.lines().count() > 0);
                prop_assert!(!problems.to_string().is_empty());
            }
        }

        #[test]
        fn a_good_profile_with_any_damage_is_read_or_refused_without_panic(
            at in 0..sample::RIVER_NODE.len(),
            length in 0_usize..40,
            damage in "[\\PC\"\\[\\]{}=.0-9\n]{0,12}",
        ) {
            let mut text = sample::RIVER_NODE.to_owned();
            let end = (at + length).min(text.len());
            if text.is_char_boundary(at) && text.is_char_boundary(end) {
                text.replace_range(at..end, &damage);
            }
            if let Err(problems) = Profile::read("p.toml", &text) {
                prop_assert!(problems.lines().count() > 0, "refused without a reason: {text}");
                prop_assert!(!problems.to_string().is_empty());
            }
        }
    }
}
