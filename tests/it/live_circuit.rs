//! The procedure on a circuit that runs inside ngspice, an analogue circuit simulator that shares no code with this project:
//! it chooses its set-points by what the circuit does, and what it finds must be true within its own uncertainty.

mod bench;

use crate::river;
use bench::{Board, CircuitBench};
use ebbmark::analysis::analyse;
use ebbmark::bench::{drive, run_ready};
use ebbmark::procedure::{Plan, Procedure};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::trace::{Claims, Times, Trace};
use ebbmark::units::Volts;
use ebbmark::verdict::{Outcome, Verdict, judge};
use std::collections::BTreeMap;
use std::time::Duration;

/// The simulator's own error of a settled current: its least current, and a share it solves to.
const SOLVED: (f64, f64) = (2e-10, 1e-5);

/// The circuit's comparator has no noise at all, and the profile says so.
fn profile() -> Profile {
    river::with_noise("0 V")
}

fn run(board: &Board) -> (Trace, Verdict) {
    let profile = profile();
    let plan = Plan::new(&profile, &CircuitBench::ability());
    let mut bench = CircuitBench::start(board);
    let trace = run_ready(drive(
        Procedure::new(plan),
        &mut bench,
        Claims::default(),
        &mut (),
        std::future::pending(),
    ));
    let verdict = judge(&analyse(&trace, &profile), &profile, &trace.ending);
    (trace, verdict)
}

/// What was found and what is true, and by how much they may differ.
fn held_against_truth(board: &Board, verdict: &Verdict, times: f64) -> Vec<(QuantityName, bool)> {
    [
        (QuantityName::Trip, board.trip),
        (QuantityName::ReEnable, board.re_enable),
        (QuantityName::Hysteresis, board.re_enable - board.trip),
        (QuantityName::OffCurrent, board.off_current(5.8)),
    ]
    .into_iter()
    .map(|(name, truth)| {
        let judged = verdict.judged.iter().find(|judged| judged.quantity.name == name);
        let judged = judged.unwrap_or_else(|| panic!("{board:?}: no {name:?}: {verdict:#?}"));
        let solved = if name == QuantityName::OffCurrent { SOLVED.0 + SOLVED.1 * truth } else { 0.0 };
        (name, (judged.quantity.value - truth).abs() <= times * judged.expanded_uncertainty() + solved)
    })
    .collect()
}

/// One board may be the one in twenty that U does not cover; but no threshold lies beyond its bracket, of which U covers all
/// but a twentieth.
fn assert_true_within_uncertainty(board: &Board, verdict: &Verdict) {
    let missed: Vec<_> =
        held_against_truth(board, verdict, 1.1).into_iter().filter(|(_, inside)| !inside).collect();
    assert!(missed.is_empty(), "{board:?}: {missed:?}: {:#?}", verdict.judged);
}

#[test]
fn a_good_circuit_passes_with_the_truth_inside_the_uncertainty() {
    let board = Board::good();
    let (_, verdict) = run(&board);
    assert_eq!(verdict.outcome, Outcome::Pass, "{verdict:#?}");
    assert_true_within_uncertainty(&board, &verdict);
}

/// A statement of 95 % may miss one board in twenty, and by chance three; not four, which comes once in sixty times
/// (binomial law).
#[test]
fn thresholds_anywhere_behind_any_leads_are_found() {
    let mut missed: BTreeMap<QuantityName, Vec<Board>> = BTreeMap::new();
    for index in 0..20 {
        let spread = |share: f64| (f64::from(index) * share).fract();
        let board = Board {
            trip: 5.9 + 0.2 * spread(GOLDEN),
            re_enable: 6.3 + 0.2 * spread(GOLDEN * GOLDEN),
            leads: 0.02 + spread(0.31),
            ..Board::good()
        };
        let (_, verdict) = run(&board);
        for (name, inside) in held_against_truth(&board, &verdict, 1.0) {
            if !inside {
                missed.entry(name).or_default().push(board);
            }
        }
    }
    assert!(missed.values().all(|boards| boards.len() <= 3), "{missed:#?}");
}

/// Multiples of the golden section spread evenly, whatever their number.
const GOLDEN: f64 = 0.618_033_988_75;

#[test]
fn a_circuit_that_trips_too_high_fails() {
    let board = Board { trip: 6.21, re_enable: 6.55, ..Board::good() };
    let (_, verdict) = run(&board);
    assert_eq!(verdict.outcome, Outcome::Fail, "{verdict:#?}");
    assert_true_within_uncertainty(&board, &verdict);
}

#[test]
fn the_circuit_is_left_without_voltage() {
    let (trace, _) = run(&Board::good());
    let last = trace.samples.last().map(|sample| sample.terminals());
    assert!(last.is_some_and(|volts| volts.abs() < Volts(0.1)), "{last:?}");
}

/// The delay element discharges a capacitor through 10 kohm and charges it through 10 kohm and 100 kohm in series, and the
/// switch follows at half the voltage: t = -R C ln(1 - Vth / VDD), with Vth / VDD = 1/2 both ways (common practice). The
/// capacitor is chosen for the time through 10 kohm.
#[test]
fn delays_of_a_charged_capacitor_are_those_of_its_law() {
    for delay in [0.5e-3, 4e-3] {
        let board = Board { delay, ..Board::good() };
        let mut profile = profile();
        profile.timing.release_delay = Duration::from_millis(150);
        (profile.measure.detect_delay, profile.measure.release_delay) = (true, true);
        let ability = CircuitBench::ability();
        let times = Times { integration: ability.read_time, settle: ability.settle };
        let mut bench = CircuitBench::start(&board).averaging();
        let trace = run_ready(drive(
            Procedure::new(Plan::new(&profile, &ability)),
            &mut bench,
            Claims { times: Some(times), ..Claims::default() },
            &mut (),
            std::future::pending(),
        ));
        let analysis = analyse(&trace, &profile);
        for (name, law) in [(QuantityName::DetectDelay, delay), (QuantityName::ReleaseDelay, 11.0 * delay)] {
            let found = analysis.quantities.iter().find(|quantity| quantity.name == name);
            let found = found.unwrap_or_else(|| panic!("{board:?}: no {name:?}: {analysis:#?}"));
            let half_width = found.standard_uncertainty * 3.0_f64.sqrt();
            assert!((found.value - law).abs() <= half_width, "{board:?}: {law} s, found {found:?}");
            assert!(half_width < 2.5e-3, "{board:?}: {found:?}");
        }
    }
}
