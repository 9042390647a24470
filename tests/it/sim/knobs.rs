//! Whatever is turned, in whatever order, the simulated bench stays within what is physically possible.

use super::{river_node, silenced, wait};
use ebbmark::sim::{Condition, Setup, World};
use ebbmark::units::{Amps, Volts};
use rand::{RngExt, SeedableRng};

/// Turns one knob at random.
fn turn(world: &mut World, hand: &mut rand_chacha::ChaCha8Rng) {
    match hand.random_range(0..10) {
        0..=3 => world.set_volts(Volts(hand.random_range(-1.0..14.0))),
        4 => world.set_current_limit(Amps(10.0_f64.powf(hand.random_range(-4.0..1.0)))),
        5 => world.set_over_voltage(Volts(hand.random_range(6.0..40.0))),
        6 => world.set_output(false),
        7 => world.set_output(true),
        8 => {
            world.set_range(Amps(10.0_f64.powf(hand.random_range(-5.0..1.0))));
        }
        _ => world.restart_supply(),
    }
    wait(world, hand.random_range(0..400));
}

#[test]
fn no_turn_of_any_knob_breaks_the_laws() {
    for seed in 0..60 {
        for condition in Condition::ALL {
            let mut setup = silenced(Setup::new(&river_node(), condition, seed));
            setup.supply.overshoot = if seed % 2 == 0 { 0.0 } else { 0.03 };
            // What comes in from elsewhere may flow out through the supply, and a supply may drift upwards.
            let fed = setup.wiring.feed.map_or(Amps::ZERO, |feed| feed.source / feed.resistance);
            let highest = 14.5 + setup.supply.drifted.0;
            let mut world = World::new(&setup);
            let mut hand = rand_chacha::ChaCha8Rng::seed_from_u64(seed);
            for step in 0..40 {
                let at = format!("seed {seed}, {condition}, step {step}");
                turn(&mut world, &mut hand);
                let mark = world.mark();
                wait(&mut world, 20);
                let sense = world.read_sense(&mark).0;
                assert!((-1e-6..highest).contains(&sense), "{at}: {sense} V at the terminals");
                let load = world.read_load(&mark).0;
                assert!(load.abs() <= highest, "{at}: {load} V at the load");
                let (_, supplied) = world.read_supply(&mark);
                let supplied = supplied - setup.supply.read_back_current_error;
                assert!(supplied > -fed - Amps(1e-3), "{at}: {supplied} flows back");
                let most = if world.output() { world.current_limit() } else { Amps(14.5 / 50.0) };
                assert!(supplied <= most + Amps(1e-3), "{at}: {supplied} of at most {most}");
            }
        }
    }
}
