//! The simulated board against circuits solved by somebody else's program.
//!
//! `tests/data/circuit/` holds traces simulated with ngspice, with the circuits' parameters in `cases.json`. The
//! set-points of a trace are played into the same circuit here; states must change at the same step and currents agree
//! within the noise that was added to the traces.

use super::river_node;
use ebbmark::sim::{BoardModel, Condition, Setup, World};
use ebbmark::trace::Current;
use ebbmark::units::{Amps, Farads, Ohms, Siemens, Volts};
use serde::Deserialize;
use std::collections::BTreeMap;
use std::path::PathBuf;
use std::time::Duration;

/// Standard deviation of the noise on the traces, as their own scatter shows it: of voltages in V, of off currents in A.
const VOLTAGE_NOISE: f64 = 0.32e-3;
const OFF_NOISE: f64 = 22e-9;

/// Agreement of on currents, as a share. Their noise is 0.024 %, but within a few steps of re-enabling the circuit's
/// switch, which closes softly, takes up to 0.17 % less.
const ON_TOLERANCE: f64 = 2e-3;

/// Resistance of the closed switch, ohm. Not among the parameters; read from the traces' on currents.
const ON_RESISTANCE: f64 = 0.01;

/// The widest of some thousand normal draws.
const WIDEST: f64 = 4.5;

#[derive(Clone, Copy, Deserialize)]
struct Case {
    trip: f64,
    rel: f64,
    delay: f64,
    lead: f64,
    load: f64,
    pu: f64,
    iq: f64,
    leak: f64,
    dwell: Option<f64>,
}

#[derive(Clone, Copy, Deserialize)]
struct Row {
    time_s: f64,
    set_v: f64,
    sense_v: f64,
    current_a: f64,
}

fn case(name: &str) -> (Case, Vec<Row>) {
    let folder = PathBuf::from(env!("CARGO_MANIFEST_DIR")).join("tests/data/circuit");
    let text = std::fs::read_to_string(folder.join("cases.json")).expect("the parameters are there");
    let cases: BTreeMap<String, Case> = serde_json::from_str(&text).expect("parameters by name");
    let mut rows = csv::Reader::from_path(folder.join(format!("{name}.csv"))).expect("the trace is there");
    (cases[name], rows.deserialize().map(|row| row.expect("a row of four numbers")).collect())
}

/// The circuit of a case on a bench without errors.
fn setup(case: &Case) -> Setup {
    let mut setup = Setup::new(&river_node(), Condition::Good, 0);
    setup.board = BoardModel {
        trip: Volts(case.trip),
        hysteresis: Volts(case.rel - case.trip),
        detect_delay: Duration::from_secs_f64(case.delay),
        release_delay: Duration::from_secs_f64(case.delay),
        noise: Volts(0.0),
        minimum_operating: Volts(0.8),
        pull_up: Ohms(case.pu),
        divider: Siemens(0.0),
        detector_current: Amps(case.iq),
        leakage: Amps(0.0),
        leakage_conductance: Siemens(1.0 / case.leak),
        load: Ohms(case.load),
        load_capacitance: Farads(0.0),
        on_resistance: Ohms(ON_RESISTANCE),
        ..setup.board
    };
    setup.wiring.lead_resistance = Ohms(case.lead);
    setup.supply.gain_error = 0.0;
    setup.supply.offset_error = Volts(0.0);
    setup.supply.time_constant = Duration::from_micros(100);
    for range in &mut setup.ammeter.ranges {
        range.burden = Ohms(0.0);
        range.meter.gain_error = 0.0;
        range.meter.offset_error = 0.0;
        range.meter.noise = 0.0;
        range.meter.claim.resolution = 0.0;
    }
    for range in &mut setup.voltmeter.ranges {
        range.gain_error = 0.0;
        range.offset_error = 0.0;
    }
    setup.voltmeter.input_resistance = None;
    setup
}

/// Plays the set-points of `rows` and reads at their times.
fn play(case: &Case, rows: &[Row]) -> Vec<Row> {
    let mut world = World::new(&setup(case));
    let dwell = case.dwell.expect("a staircase");
    world.set_volts(Volts(rows[0].set_v));
    world.set_output(true);
    let mut read = Vec::new();
    for row in rows {
        let read_before_step_ends = 1e-3;
        world.advance_to(Duration::from_secs_f64(row.time_s - dwell + read_before_step_ends));
        world.set_volts(Volts(row.set_v));
        world.advance_to(Duration::from_secs_f64(row.time_s));
        let mark = world.mark();
        let Current::Value(current) = world.read_current(&mark) else {
            panic!("overload at {} V", row.set_v)
        };
        read.push(Row { sense_v: world.read_sense(&mark).0, current_a: current.0, ..*row });
    }
    read
}

fn on(row: &Row) -> bool {
    row.current_a > 0.01
}

#[test]
fn states_and_currents_agree_with_the_circuit_simulator_at_every_step() {
    for name in ["good", "lead_drop", "leaking_switch", "high_trip", "slow_detector"] {
        let (case, rows) = case(name);
        let changes = rows.windows(2).filter(|pair| on(&pair[0]) != on(&pair[1])).count();
        assert_eq!(changes, 2, "{name}: the trace trips once and comes back once");
        for (ours, theirs) in play(&case, &rows).iter().zip(&rows) {
            let at = format!("{name}, {} V at {} s", theirs.set_v, theirs.time_s);
            assert_eq!(on(ours), on(theirs), "{at}: {} A here, {} A there", ours.current_a, theirs.current_a);
            let volts = (ours.sense_v - theirs.sense_v).abs();
            assert!(
                volts < WIDEST * VOLTAGE_NOISE,
                "{at}: {} V here, {} V there",
                ours.sense_v,
                theirs.sense_v
            );
            let amps = (ours.current_a - theirs.current_a).abs();
            let tolerance = if on(theirs) { ON_TOLERANCE * theirs.current_a } else { WIDEST * OFF_NOISE };
            assert!(amps < tolerance, "{at}: {} A here, {} A there", ours.current_a, theirs.current_a);
        }
    }
}

#[test]
fn a_board_that_cannot_rest_shows_both_states_where_the_circuit_simulator_does() {
    let (case, rows) = case("chatter");
    let ours = play(&case, &rows);
    // On, the load's drop in the leads pulls the terminals below the trip; off, they stand above the re-enable.
    let last = case.trip * (case.lead + case.load) / case.load;
    let restless = |row: &&Row| (case.rel..last).contains(&row.set_v);
    for (who, rows) in [("here", &ours), ("there", &rows)] {
        let states = || rows.iter().filter(restless).map(on);
        assert!(states().any(|on| on) && states().any(|on| !on), "{who}");
    }
    // The circuit's delay is a lag, which keeps swinging for a while above the window; ours is a plain delay.
    let calm = |row: &&Row| row.set_v < case.rel || row.set_v > last + 0.2;
    let agree =
        ours.iter().zip(&rows).filter(|(ours, _)| calm(ours)).all(|(ours, theirs)| on(ours) == on(theirs));
    assert!(agree, "outside the window both rest in the same state");
}
