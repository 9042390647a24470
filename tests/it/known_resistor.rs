//! A known resistor on benches drawn at random, in virtual time: a good ammeter agrees, a wrong one does not.

use crate::simulated_bench::setup;
use ebbmark::bench::{VirtualBench, drive, run_ready};
use ebbmark::procedure::{BenchWork, Procedure, Task};
use ebbmark::sim::Setup;
use ebbmark::sim::bench::InFixture;
use ebbmark::trace::Stop;
use ebbmark::units::{Amps, Ohms, Volts};
use ebbmark::verification::{KnownLoad, StandardFound, StandardTask, standard};

const RESISTOR: KnownLoad = KnownLoad { resistance: Ohms(1e6), tolerance: 0.01 };
const AT: Volts = Volts(3.0);
const READINGS: usize = 20;

/// A bench of this seed with a resistor of this true value in its fixture.
fn bench(seed: u64, resistance: Ohms) -> Setup {
    let plain = setup();
    InFixture::Resistor(resistance).in_place_of_board(Setup::of(plain.board, plain.wiring, seed))
}

/// What is found, and what is wrong. Whatever it is, the output is off at the end.
fn measured(setup: &Setup) -> (Vec<StandardFound>, Vec<String>) {
    let ability = setup.ability();
    let work = BenchWork::new(&ability, AT, Amps(1e-3), READINGS, Task::SmallRanges(vec![AT]));
    let task = StandardTask {
        resistor: RESISTOR,
        readings: READINGS,
        large_range: work.large_range,
        arrival_tolerance: work.arrival_tolerance,
    };
    let mut bench = VirtualBench::new(setup, ability);
    let procedure = Procedure::on_bench(work);
    let never = std::future::pending();
    let trace = run_ready(drive(procedure, &mut bench, setup.claims(), &mut (), never));
    assert!(!bench.output_is_on(), "the output is on, seed {}", setup.seed);
    assert_eq!(trace.ending.stop, Stop::Completed, "seed {}", setup.seed);
    standard(&trace, &task)
}

/// Every error is drawn inside its claim, and the resistor lies anywhere within its tolerance. Tolerance and the ammeter's
/// offset are two rectangles of like size: beyond twice their standard deviation lie (1 - 2 / sqrt 6) squared, 3.4 %, of
/// such a triangle. Never more than the 5 % that an expanded uncertainty leaves out, and three standard deviations of a
/// count.
#[test]
fn a_good_ammeter_agrees() {
    const BENCHES: u64 = 400;
    const MOST: f64 = 0.05;
    let mut told = [Vec::new(), Vec::new()];
    for seed in 1..=BENCHES {
        let off = (seed % 21) as f64 / 10.0 - 1.0;
        let (found, problems) =
            measured(&bench(seed, RESISTOR.resistance * (1.0 + off * RESISTOR.tolerance)));
        assert_eq!(found.len(), told.len(), "100 µA and 1 mA, seed {seed}: {problems:?}");
        let apart = |found: &StandardFound| found.normalised_error > 1.0;
        assert_eq!(
            problems.len(),
            found.iter().filter(|found| apart(found)).count(),
            "seed {seed}: {problems:?}"
        );
        for (told, _) in told.iter_mut().zip(&found).filter(|(_, found)| apart(found)) {
            told.push(seed);
        }
    }
    let benches = BENCHES as f64;
    let sampling = 3.0 * (MOST * (1.0 - MOST) / benches).sqrt();
    for told in told {
        let share = told.len() as f64 / benches;
        assert!(share < MOST + sampling, "{share} of the good benches are told, seeds {told:?}");
    }
}

/// The true values of the simulation agree exactly: nothing is off but noise.
#[test]
fn an_ideal_bench_reads_what_flows() {
    let mut ideal = bench(1, RESISTOR.resistance);
    for range in &mut ideal.ammeter.ranges {
        (range.meter.gain_error, range.meter.offset_error) = (0.0, 0.0);
    }
    ideal.voltmeter.input_error = 0.0;
    let (found, problems) = measured(&ideal);
    assert_eq!(problems, Vec::<String>::new());
    for found in &found {
        assert!((found.measured_a / found.expected_a - 1.0).abs() < 2e-3, "{found:?}");
    }
}

#[test]
fn a_wrong_gain_on_the_smallest_range_is_told_on_every_bench() {
    for seed in 1..=100 {
        let mut wrong = bench(seed, RESISTOR.resistance);
        wrong.ammeter.ranges[0].meter.gain_error = if seed % 2 == 0 { 0.05 } else { -0.05 };
        let (_, problems) = measured(&wrong);
        let told = problems.iter().any(|told| told.contains("100.0 µA range") && told.contains("E_n = "));
        assert!(told, "seed {seed}: {problems:?}");
    }
}

#[test]
fn a_blown_fuse_an_empty_fixture_and_a_load_are_named() {
    for seed in 1..=20 {
        let named = |setup: &Setup, phrase: &str| {
            let (_, problems) = measured(setup);
            assert!(problems.iter().any(|told| told.contains(phrase)), "seed {seed}: {problems:?}");
        };
        let mut blown = bench(seed, RESISTOR.resistance);
        blown.ammeter.fuse_blown = true;
        named(&blown, "fuse blown");
        let plain = setup();
        let empty = Setup::of(plain.board, plain.wiring, seed);
        named(&InFixture::Nothing.in_place_of_board(empty), "is the resistor in the fixture?");
        named(&bench(seed, Ohms(10e3)), "no small range was read");
    }
}
