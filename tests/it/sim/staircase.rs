//! A plain staircase down and up, to see what a board does without any procedure.

use super::{read, river_node, wait};
use ebbmark::sim::{Setup, World};
use ebbmark::units::{Amps, Volts};

/// What a staircase saw.
#[derive(Debug, Default)]
pub(crate) struct Seen {
    /// Terminal voltages just before and after the board tripped.
    pub(crate) trip: Option<(f64, f64)>,
    /// Terminal voltages just before and after it came back.
    pub(crate) re_enable: Option<(f64, f64)>,
    /// Current at the off current's voltage on the way up, A.
    pub(crate) off_current: f64,
    /// Changes between on and off, step to step.
    pub(crate) edges: usize,
}

/// Walks from the start voltage to the floor and back in steps of 10 mV and 120 ms.
pub(crate) fn walk(setup: &Setup) -> Seen {
    let profile = river_node();
    let (top, bottom) = (760, 520);
    let mut world = World::new(setup);
    world.set_current_limit(profile.supply.current_limit);
    world.set_volts(profile.supply.start);
    world.set_output(true);
    wait(&mut world, 200);
    let mut seen = Seen::default();
    let mut before: Option<(f64, bool)> = None;
    for step in (bottom..=top).rev().chain(bottom..=top) {
        let volts = f64::from(step) / 100.0;
        world.set_volts(Volts(volts));
        wait(&mut world, 100);
        let (sense, current, _) = read(&mut world);
        let on = current > 0.5 * sense / profile.load.resistance.0;
        if let Some((last, was_on)) = before
            && was_on != on
        {
            seen.edges += 1;
            let edge = if on { &mut seen.re_enable } else { &mut seen.trip };
            edge.get_or_insert((last, sense));
        }
        before = Some((sense, on));
        if step == 580 && !on {
            seen.off_current = off_current(&mut world, setup);
        }
    }
    seen
}

/// The board's current on the smallest range that can show it, without the voltmeter's; back on the large range
/// afterwards.
pub(crate) fn off_current(world: &mut World, setup: &Setup) -> f64 {
    world.set_range(Amps(100e-6));
    wait(world, 100);
    let (sense, current, _) = read(world);
    world.reset_meter_range();
    current - sense * setup.voltmeter.input_conductance().0
}
