//! The simulated board and bench.

#![expect(clippy::expect_used, reason = "a test that cannot be set up has failed")]

mod bench;
mod bench_trouble;
mod board_trouble;
mod circuit;
mod class;
mod conditions;
mod knobs;
mod laws;
mod noise;
mod staircase;
mod supply;
mod trade;

use ebbmark::profile::Profile;
use ebbmark::sim::{Condition, Setup, World};
use ebbmark::units::Volts;
use std::time::Duration;

/// The profiles that come with the program.
pub(crate) const PROFILES: [(&str, &str); 3] = [
    ("river-node", include_str!("../../profiles/river-node.toml")),
    ("garden-probe", include_str!("../../profiles/garden-probe.toml")),
    ("mast-beacon", include_str!("../../profiles/mast-beacon.toml")),
];

/// A profile that comes with the program.
pub(crate) fn profile((name, text): (&str, &str)) -> Profile {
    Profile::read(name, text).unwrap_or_else(|problems| panic!("{problems}"))
}

/// The river-level logger's cut-off.
pub(crate) fn river_node() -> Profile {
    profile(PROFILES[0])
}

/// The river node's good board of this seed on a bench without errors and noise.
pub(crate) fn quiet(seed: u64) -> Setup {
    silenced(Setup::new(&river_node(), Condition::Good, seed))
}

/// The same setup without errors and noise of instruments and detector.
pub(crate) fn silenced(mut setup: Setup) -> Setup {
    setup.board.noise = Volts(0.0);
    setup.supply.gain_error = 0.0;
    setup.supply.offset_error = Volts(0.0);
    let ammeter = setup.ammeter.ranges.iter_mut().map(|range| &mut range.meter);
    let voltmeters = setup.voltmeter.ranges.iter_mut().chain(&mut setup.load_voltmeter.ranges);
    for range in ammeter.chain(voltmeters) {
        range.gain_error = 0.0;
        range.offset_error = 0.0;
        range.noise = 0.0;
        range.claim.resolution = 0.0;
    }
    setup
}

/// Lets `millis` milliseconds pass.
pub(crate) fn wait(world: &mut World, millis: u64) {
    world.advance_to(world.now() + Duration::from_millis(millis));
}

/// A bench with its output on at the start voltage and the board given a second to come up.
pub(crate) fn armed(setup: &Setup) -> World {
    let mut world = World::new(setup);
    world.set_volts(river_node().supply.start);
    world.set_output(true);
    wait(&mut world, 1000);
    world
}

/// What the meters say over the next 20 ms: terminals, current, load.
pub(crate) fn read(world: &mut World) -> (f64, f64, f64) {
    let mark = world.mark();
    wait(world, 20);
    let current = world.read_current(&mark).amps().map_or(f64::INFINITY, |amps| amps.0);
    (world.read_sense(&mark).0, current, world.read_load(&mark).0)
}
