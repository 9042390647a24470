//! A nine-volt board with figures that are common practice in the trade: currents five decades apart.

use super::staircase::off_current;
use super::{quiet, read, wait};
use crate::nine_volt;
use ebbmark::sim::{Setup, World};
use ebbmark::units::{Amps, Ohms, Volts};

/// A cut-off near 7.0 V for a nine-volt block with a load of 27 ohm, a 4.7 Mohm pull-up, a 0.6 µA detector and less than
/// 0.5 µA of leakage.
fn nine_volt_board() -> Setup {
    let mut setup = quiet(9);
    setup.board = nine_volt::board(setup.board);
    setup.wiring.lead_resistance = Ohms(0.05);
    setup
}

#[test]
fn the_pull_up_alone_draws_a_microamp_and_a_half_at_the_trip() {
    let setup = nine_volt_board();
    assert!((Volts(7.0) / setup.board.pull_up - Amps(1.49e-6)).abs() < Amps(0.005e-6));
}

#[test]
fn the_two_states_of_a_nine_volt_board_are_five_decades_apart() {
    let setup = nine_volt_board();
    let mut world = World::new(&setup);
    world.set_volts(Volts(9.7));
    world.set_output(true);
    wait(&mut world, 500);
    world.set_volts(Volts(7.33));
    wait(&mut world, 500);
    let (sense, on, _) = read(&mut world);
    assert!((sense - 7.3).abs() < 0.02, "{sense} V");
    assert!((on - 0.27).abs() < 0.005, "about 0.27 A at 7.3 V, read {on} A");
    world.set_volts(Volts(6.95));
    wait(&mut world, 500);
    let off = off_current(&mut world, &setup);
    assert!((off - 2.4e-6).abs() < 0.1e-6, "about 2.4 µA off, read {off} A");
    assert!((on / off).log10() > 5.0 && (on / off).log10() < 5.1, "{}", (on / off).log10());
    world.set_volts(Volts(7.8));
    wait(&mut world, 500);
    assert!(!world.board_on(), "re-enable comes above the trip");
    world.set_volts(Volts(8.0));
    wait(&mut world, 500);
    assert!(world.board_on());
}
