//! The river-level logger of the shipped profiles, for tests that need a board.

#![expect(clippy::expect_used, reason = "a test stops at what it cannot read")]

use ebbmark::profile::Profile;

/// Trip near 6.0 V, re-enable near 6.4 V, 55 ohm.
pub(crate) fn profile() -> Profile {
    Profile::read("river-node.toml", include_str!("../../profiles/river-node.toml")).expect("a good profile")
}
