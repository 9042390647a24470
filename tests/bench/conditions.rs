//! The conditions under which coverage is studied: what is varied of a good board on a good bench, and what its profile
//! knows of it.

use super::Vary;
use ebbmark::profile::noise_rate;
use ebbmark::units::{Ohms, Volts};
use std::error::Error;

/// One condition.
pub(crate) struct Studied {
    /// For people.
    pub(crate) name: &'static str,
    /// The noise at the detector that the profile states, as it is written there.
    states: Option<&'static str>,
    /// Whether delays are measured as well; that takes its time.
    in_full: bool,
    /// Changes board and bench.
    pub(crate) vary: Vary,
    /// Whether U must cover here: boards as they are drawn, or noise that the profile states.
    pub(crate) claimed: bool,
}

impl Studied {
    /// Boards drawn with the noise that is usual.
    const fn drawn(name: &'static str, vary: Vary) -> Self {
        Self { name, states: None, in_full: false, vary, claimed: true }
    }

    /// Boards of a design of which the profile states the noise: drawn about that level.
    const fn stated(name: &'static str, noise: &'static str) -> Self {
        Self { name, states: Some(noise), in_full: false, vary: |_, _| {}, claimed: true }
    }

    /// Boards that all have just the noise that the profile states.
    const fn exactly(name: &'static str, noise: &'static str, vary: Vary) -> Self {
        Self { name, states: Some(noise), in_full: false, vary, claimed: false }
    }

    /// Boards that all have one noise, of which the profile says nothing.
    const fn unstated(name: &'static str, vary: Vary) -> Self {
        Self { name, states: None, in_full: false, vary, claimed: false }
    }

    /// Boards drawn with the noise that is usual, of which delays are measured as well: what is stated of those are bounds,
    /// which hold all of them.
    const fn in_full(name: &'static str) -> Self {
        Self { name, states: None, in_full: true, vary: |_, _| {}, claimed: false }
    }

    /// How many quantities are measured at least.
    pub(crate) const fn quantities(&self) -> usize {
        if self.in_full { 12 } else { 10 }
    }

    /// The text of the profile with the noise stated, and with all that is to be measured.
    pub(crate) fn profile(&self, text: &str) -> Result<String, Box<dyn Error>> {
        let more = if self.in_full { "\n[measure]\ndelays = true\n" } else { "" };
        let text = &format!("{text}{more}");
        let Some(noise) = self.states else { return Ok(text.to_owned()) };
        let (head, rest) =
            text.split_once("[detector]").ok_or("the profile has no [detector] to state noise in")?;
        Ok(format!("{head}[detector]\nnoise = \"{noise}\"{}", rest.trim_start_matches(|it| it != '\n')))
    }
}

/// All of them.
pub(crate) fn all() -> [Studied; 19] {
    [
        Studied::drawn("as drawn", |_, _| {}),
        Studied::drawn("noisy meters", |setup, _| {
            for range in &mut setup.voltmeter.ranges {
                range.noise *= 30.0;
            }
            for range in &mut setup.ammeter.ranges {
                range.meter.noise *= 10.0;
            }
        }),
        Studied::drawn("long leads", |setup, _| setup.wiring.lead_resistance = Ohms(0.6)),
        Studied::drawn("slowest board", |setup, profile| {
            setup.board.detect_delay = profile.timing.detect_delay;
            setup.board.release_delay = profile.timing.release_delay;
            setup.board.noise_rate = noise_rate(setup.board.detect_delay.min(setup.board.release_delay));
        }),
        Studied::drawn("coarse supply", |setup, _| setup.supply.set_step = Volts(5e-3)),
        Studied::drawn("coarse voltmeter", |setup, _| {
            for range in &mut setup.voltmeter.ranges {
                range.claim.resolution = 1e-3;
            }
        }),
        Studied::in_full("with delays"),
        Studied::stated("no noise, stated", "0 V"),
        Studied::stated("0.1 mV of noise, stated", "0.1 mV"),
        Studied::stated("0.3 mV of noise, stated", "0.3 mV"),
        Studied::stated("0.5 mV of noise, stated", "0.5 mV"),
        Studied::stated("1 mV of noise, stated", "1 mV"),
        Studied::exactly("0.3 mV on every board, stated", "0.3 mV", |setup, _| {
            setup.board.noise = Volts(0.3e-3);
        }),
        Studied::exactly("1 mV on every board, stated", "1 mV", |setup, _| setup.board.noise = Volts(1e-3)),
        Studied::unstated("no noise, not stated", |setup, _| setup.board.noise = Volts::ZERO),
        Studied::unstated("0.1 mV of noise, not stated", |setup, _| setup.board.noise = Volts(0.1e-3)),
        Studied::unstated("0.3 mV of noise, not stated", |setup, _| setup.board.noise = Volts(0.3e-3)),
        Studied::unstated("0.5 mV of noise, not stated", |setup, _| setup.board.noise = Volts(0.5e-3)),
        Studied::unstated("1 mV of noise, not stated", |setup, _| setup.board.noise = Volts(1e-3)),
    ]
}
