//! How the board is connected to the bench.

use crate::units::Ohms;

/// The leads between supply and board, and what hangs on the board.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Wiring {
    /// Resistance of both leads and their contacts together, ammeter apart.
    pub lead_resistance: Ohms,
    /// Whether the load is there.
    pub load: LoadWiring,
    /// Which way round the board is connected.
    pub polarity: Polarity,
}

/// Whether the load is connected behind the switch.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum LoadWiring {
    /// As it should be.
    Connected,
    /// A loose or forgotten lead.
    Lifted,
}

/// Which way round the board is connected.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Polarity {
    /// Plus to plus.
    Right,
    /// Plus to minus: the body diode of the switch conducts through the load.
    Reversed,
}
