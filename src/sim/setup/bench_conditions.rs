//! What a condition changes about the bench: supply, meters, wiring, and the lines to the instruments.

use super::{LeftOn, Setup};
use crate::sim::device::Kind;
use crate::sim::draw::Draw;
use crate::sim::link_faults::{Effect, Lasting, LinkFault, When};
use crate::sim::{Condition, Feed, LoadWiring, Lockout, Polarity, Ripple};
use crate::units::{Amps, Ohms, Siemens, Volts};
use std::time::Duration;

/// Smallest range of an ammeter that has none for microamperes.
const COARSEST: Amps = Amps(10e-3);

/// Share of the load's current at which a supply gives way too early.
const TOO_LITTLE: f64 = 2.0 / 3.0;

/// Drop of the load's current across a bad contact, as a multiple of the hysteresis.
const CONTACT_DROP: f64 = 3.0;

/// Hum, root mean square, as a share of the hysteresis: its crests are then not quite a fifth of it.
const HUM: f64 = 2.0 / 15.0;

/// Frequency of the mains, Hz.
const MAINS: f64 = 50.0;

/// Drift of a supply in a minute, as a share of the trip voltage.
const DRIFT: f64 = 5e-3 / 3.0;

/// Where a load stops and starts by itself, as shares of the hysteresis above the trip; the gap is more than what the
/// leads drop.
const LOCKOUT: [f64; 2] = [2.0 / 3.0, 4.0 / 3.0];

/// Where such a load draws what the board's resistor would, as a multiple of where it starts.
const RATED: f64 = 1.1;

/// What an open sense lead adds to the output of one class of supplies.
const SENSE_HIGH: f64 = 0.05;

/// What it takes from that of another.
const SENSE_LOW: (f64, f64) = (0.05, 0.15);

/// A charger or USB port.
const CHARGER: Feed = Feed { source: Volts(5.0), resistance: Ohms(100.0) };

/// Input of a common voltmeter.
const SECOND_VOLTMETER: Siemens = Siemens(1.0 / 10e6);

/// Which of a run's messages of one kind something happens to.
const MID_RUN: (f64, f64) = (8.0, 25.0);

/// Begins a reading of the ammeter.
const READ: &str = "READ?";

/// Sets the supply's voltage.
const SET_VOLTS: &str = "VOLT ";

/// How late a reply comes that comes too late.
const LATE: Duration = Duration::from_millis(1200);

/// How long a supply is away that restarts.
const AWAY: Duration = Duration::from_secs(2);

/// Changes the bench of `setup`; conditions of the board leave it alone.
pub(super) fn apply(condition: Condition, setup: &mut Setup, draw: &mut Draw) {
    let board = &setup.board;
    let load_current = board.trip / board.load;
    match condition {
        Condition::NoLoad => setup.wiring.load = LoadWiring::Lifted,
        Condition::Reversed => setup.wiring.polarity = Polarity::Reversed,
        Condition::Chatter => {
            let drop = board.hysteresis * draw.between(1.3, 1.6);
            setup.wiring.lead_resistance = drop / load_current;
        }
        Condition::IntermittentContact => {
            setup.wiring.bad_contact = Some(board.hysteresis * CONTACT_DROP / load_current);
        }
        Condition::LoadLockout => {
            let [stops, starts] = LOCKOUT.map(|share| board.trip + board.hysteresis * share);
            setup.wiring.load = LoadWiring::LocksOut(Lockout { stops, starts, rated: starts * RATED });
        }
        Condition::BackFeed => setup.wiring.feed = Some(CHARGER),
        Condition::UnstatedVoltmeter => setup.wiring.stray = SECOND_VOLTMETER,
        Condition::MainsRipple => {
            setup.ripple = Some(Ripple { rms: board.hysteresis * HUM, frequency: MAINS });
        }
        Condition::LeftOnInBand => {
            let volts = board.trip + board.hysteresis * draw.between(0.3, 0.7);
            setup.left_on = Some(LeftOn { volts, board_on: draw.chance(0.5) });
        }
        Condition::NoSink => {
            setup.supply.sinks = false;
            setup.supply.bleed = Amps(0.1e-3);
            setup.supply.off_resistance = Ohms(10e3);
        }
        Condition::LowCurrentLimit => setup.supply.gives_way = load_current * TOO_LITTLE,
        Condition::DriftingSupply => {
            let a_minute = board.trip * DRIFT;
            setup.supply.drift = a_minute.0 / 60.0;
            setup.supply.drifted = a_minute * draw.between(10.0, 60.0);
        }
        Condition::OpenSenseHigh => setup.supply.gain_error += SENSE_HIGH,
        Condition::OpenSenseLow => setup.supply.gain_error -= draw.in_window(SENSE_LOW),
        Condition::MeterReversed => setup.ammeter.reversed = true,
        Condition::CoarseAmmeter => {
            setup.ammeter.ranges.retain(|range| range.meter.full_scale >= COARSEST.0);
        }
        Condition::StuckRange => setup.ammeter.stuck_on = Some(0),
        Condition::BlownFuse => setup.ammeter.fuse_blown = true,
        Condition::LateReply => fail_once(setup, Kind::Ammeter, READ, Effect::LateReply(LATE), draw),
        Condition::CutReply => fail_once(setup, Kind::Ammeter, READ, Effect::CutReply(LATE), draw),
        Condition::SupplyRestart => fail_once(setup, Kind::Supply, SET_VOLTS, Effect::Restart(AWAY), draw),
        _ => {}
    }
}

fn fail_once(setup: &mut Setup, instrument: Kind, message: &str, effect: Effect, draw: &mut Draw) {
    let when = When::Nth(draw.in_window(MID_RUN) as u64, message.to_owned());
    setup.link_faults.push(LinkFault { instrument, when, lasting: Lasting::Once, effect });
}
