//! How the board is connected to the bench.

use super::{Feed, Lockout};
use crate::units::{Ohms, Siemens};

/// The leads between supply and board, and what hangs on the board.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Wiring {
    /// Resistance of both leads and their contacts together, ammeter apart.
    pub lead_resistance: Ohms,
    /// Resistance that a bad contact adds now and then, where there is one.
    pub bad_contact: Option<Ohms>,
    /// Whether the load is there.
    pub load: LoadWiring,
    /// Which way round the board is connected.
    pub polarity: Polarity,
    /// Another source at the board, where there is one.
    pub feed: Option<Feed>,
    /// What else conducts across the terminals, behind the ammeter.
    pub stray: Siemens,
}

/// What is connected behind the switch.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum LoadWiring {
    /// The load, as it should be.
    Connected,
    /// Nothing: a loose or forgotten lead.
    Lifted,
    /// A load that stops by itself.
    LocksOut(Lockout),
}

/// Which way round the board is connected.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Polarity {
    /// Plus to plus.
    Right,
    /// Plus to minus: the body diode of the switch conducts through the load.
    Reversed,
}

impl Wiring {
    /// Nothing but the load, the right way round, on leads of this resistance.
    pub fn plain(lead_resistance: Ohms) -> Self {
        Self {
            lead_resistance,
            bad_contact: None,
            load: LoadWiring::Connected,
            polarity: Polarity::Right,
            feed: None,
            stray: Siemens::ZERO,
        }
    }

    /// What another source feeds in at `volts` across the terminals, A.
    pub(super) fn fed(&self, volts: f64) -> f64 {
        self.feed.map_or(0.0, |feed| feed.current(volts))
    }

    /// The lockout of the load, where it has one.
    pub(super) fn lockout(&self) -> Option<Lockout> {
        match self.load {
            LoadWiring::LocksOut(lockout) => Some(lockout),
            LoadWiring::Connected | LoadWiring::Lifted => None,
        }
    }
}
