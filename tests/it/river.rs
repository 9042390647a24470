//! The river-level logger of the shipped profiles, for tests that need a board.

use ebbmark::profile::Profile;

const TEXT: &str = include_str!("../../profiles/river-node.toml");

/// Trip near 6.0 V, re-enable near 6.4 V, 55 ohm.
pub(crate) fn profile() -> Profile {
    read(TEXT)
}

/// The same of a design of which the noise at the detector is known.
pub(crate) fn with_noise(noise: &str) -> Profile {
    let (head, rest) = TEXT.split_once("[detector]").unwrap_or((TEXT, ""));
    let rest = rest.trim_start_matches(|it| it != '\n');
    read(&format!("{head}[detector]\nnoise = \"{noise}\"{rest}"))
}

fn read(text: &str) -> Profile {
    Profile::read("river-node.toml", text).unwrap_or_else(|problems| panic!("{problems}"))
}
