//! The definitions that come with the program, against the simulated instruments: the bench file of a simulated bench
//! is read like any other, and every command of every instrument on it is understood.

#![expect(clippy::expect_used, reason = "a test fails by panicking")]

use super::simulated_bench::setup;
use ebbmark::instrument::bench_file::{BenchFile, BenchInstrument};
use ebbmark::instrument::definition::{Meter, Source};
use ebbmark::instrument::library::open_bench;
use ebbmark::sim::bench::{Arrangement, Options, SimulatedBench};
use ebbmark::sim::device::{Device, Kind};
use ebbmark::sim::{JumpingClock, Setup, SharedWorld, World};
use ebbmark::units::Quantity;
use std::sync::Arc;

fn bench_file(arrangement: Arrangement) -> BenchFile {
    let bench =
        SimulatedBench::start(&setup(), Options { arrangement, ..Options::default() }).expect("a bench");
    let directory = tempfile::tempdir().expect("a directory");
    let path = directory.path().join("sim.toml");
    std::fs::write(&path, bench.bench_file()).expect("a file");
    open_bench(&path).expect("a sound bench file")
}

/// A message, and the number that its reply must be if it must be one.
type Line = (String, Option<f64>);

fn source_lines(source: &Source) -> Vec<Line> {
    let commands = &source.commands;
    let mut lines: Vec<Line> = source.setup.iter().map(|line| (line.clone(), None)).collect();
    for (set, ask, least, most) in [
        (&commands.set_voltage, &commands.ask_voltage, source.voltage.min.0, source.voltage.max.0),
        (&commands.set_current, &commands.ask_current, source.current.min.0, source.current.max.0),
        (
            &commands.set_over_voltage,
            &commands.ask_over_voltage,
            source.over_voltage.min.0,
            source.over_voltage.max.0,
        ),
    ] {
        for value in [least, most] {
            lines.extend([(set.with(value), None), (ask.clone(), Some(value))]);
        }
    }
    lines.extend([(commands.output_on.clone(), None), (commands.ask_output.clone(), Some(1.0))]);
    lines.extend(commands.ask_limited.iter().map(|limited| (limited.query.clone(), None)));
    lines.extend(commands.ask_limited.iter().filter_map(|limited| Some((limited.since.clone()?, None))));
    lines.extend([(commands.output_off.clone(), None), (commands.ask_output.clone(), Some(0.0))]);
    lines
}

fn meter_lines<Q: Quantity>(meter: &Meter<Q>) -> Vec<Line> {
    let mut lines: Vec<Line> = meter.setup.iter().map(|line| (line.clone(), None)).collect();
    if let Some(commands) = &meter.range {
        for range in meter.ranges.iter().map(|range| range.full_scale.si()) {
            lines.extend([(commands.set.with(range), None), (commands.ask.clone(), Some(range))]);
        }
    }
    let short = meter.short.iter().flat_map(|short| [short.begin.clone(), short.end.clone()]);
    lines.extend(short.map(|line| (line, None)));
    lines.push((meter.read.clone(), None));
    lines
}

fn lines_of(instrument: &BenchInstrument) -> Vec<Line> {
    let definition = &instrument.definition;
    let mut lines: Vec<Line> = definition.setup.iter().map(|line| (line.clone(), None)).collect();
    lines.extend(definition.source.iter().flat_map(source_lines));
    lines.extend(definition.ammeter.iter().flat_map(meter_lines));
    lines.extend(definition.voltmeter.iter().flat_map(meter_lines));
    lines.extend(definition.local.iter().map(|line| (line.clone(), None)));
    lines
}

fn kind_of(instrument: &BenchInstrument) -> Kind {
    match instrument.name.as_str() {
        "supply" => Kind::Supply,
        "ammeter" => Kind::Ammeter,
        "voltmeter" => Kind::Voltmeter,
        "load_voltmeter" => Kind::LoadVoltmeter,
        _ => Kind::SourceMeasureUnit,
    }
}

fn every_command_is_understood(arrangement: Arrangement, setup: &Setup) {
    for instrument in bench_file(arrangement).instruments() {
        let world = SharedWorld::new(World::new(setup), Arc::new(JumpingClock::default()));
        let mut device = Device::new(kind_of(instrument), setup);
        instrument.identity.check(device.identity()).expect("the instrument of the bench file");
        for (line, wanted) in lines_of(instrument) {
            let reply = device.execute(&line, &world);
            let error = device.execute("SYST:ERR?", &world);
            let name = &instrument.name;
            assert_eq!(error.as_deref(), Some("0,\"No error\""), "{name}: {line}");
            assert_eq!(reply.is_some(), line.ends_with('?'), "{name}: {line} gave {reply:?}");
            if let Some(wanted) = wanted {
                let number: f64 = reply.expect("a reply").parse().expect("a number");
                assert!(
                    (number - wanted).abs() <= 1e-6 * wanted.abs(),
                    "{name}: {line} gave {number}, not {wanted}"
                );
            }
        }
    }
}

#[test]
fn separate_instruments_understand_every_command_of_their_definitions() {
    every_command_is_understood(Arrangement::Separate, &setup());
}

#[test]
fn a_source_measure_unit_understands_every_command_of_its_definition() {
    every_command_is_understood(Arrangement::SourceMeasureUnit, &setup().with_source_measure_unit());
}
