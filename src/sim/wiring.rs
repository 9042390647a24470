//! How the board is connected to the bench.

use super::Feed;
use crate::units::{Ohms, Siemens, Volts};

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
    LocksOut {
        /// The voltage below which it draws nothing.
        below: Volts,
    },
}

/// Which way round the board is connected.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Polarity {
    /// Plus to plus.
    Right,
    /// Plus to minus: the body diode of the switch conducts through the load.
    Reversed,
}

/// Within so much a load goes from its full current to none, V.
const LOCKOUT_WIDTH: f64 = 2e-3;

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

    /// Voltages at the terminals where what is connected may bend the characteristic; infinite where nothing does.
    pub(super) fn knots(&self) -> [f64; 3] {
        let fed = self.feed.map_or(f64::INFINITY, |feed| feed.open_voltage());
        match self.load {
            LoadWiring::LocksOut { below } => [fed, below.0 - LOCKOUT_WIDTH, below.0],
            _ => [fed, f64::INFINITY, f64::INFINITY],
        }
    }
}

/// Share of its current that a load with a lockout draws at `volts`.
pub(super) fn running(below: Volts, volts: f64) -> f64 {
    ((volts - below.0) / LOCKOUT_WIDTH + 1.0).clamp(0.0, 1.0)
}
