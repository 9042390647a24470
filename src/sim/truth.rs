//! What a simulated board really is, to hold measurements against.

use super::{BoardModel, Wiring};
use crate::units::{Amps, Volts};
use std::time::Duration;

/// What the board really is, noise and meters apart, at its terminals.
///
/// Thresholds and delays are the detector's; a stuck switch does not obey it.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Truth {
    /// Voltage below which the switch opens.
    pub trip: Volts,
    /// Voltage above which it closes.
    pub re_enable: Volts,
    /// Re-enable less trip.
    pub hysteresis: Volts,
    /// Time below the trip until the switch opens.
    pub detect_delay: Duration,
    /// Time above the re-enable until it closes.
    pub release_delay: Duration,
    board: BoardModel,
    wiring: Wiring,
}

impl Truth {
    pub(super) fn of(board: &BoardModel, wiring: &Wiring) -> Self {
        Self {
            trip: board.trip,
            re_enable: board.re_enable(),
            hysteresis: board.hysteresis,
            detect_delay: board.detect_delay,
            release_delay: board.release_delay,
            board: *board,
            wiring: *wiring,
        }
    }

    /// Current into the board at `at` across its terminals while the detector says off.
    pub fn off_current(&self, at: Volts) -> Amps {
        self.current(false, at)
    }

    /// Current into the board at `at` across its terminals while the detector says on.
    pub fn on_current(&self, at: Volts) -> Amps {
        self.current(true, at)
    }

    fn current(&self, on: bool, at: Volts) -> Amps {
        let branches = self.board.branches(&self.wiring, on, 0.0, at.0);
        Amps(branches.beside + branches.load_current)
    }
}
