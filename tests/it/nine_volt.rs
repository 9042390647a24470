//! The program on a nine-volt board whose figures are common practice in the trade: it must report five decades
//! between the two states, and the re-enable above the trip.

use ebbmark::analysis::analyse;
use ebbmark::bench::{VirtualBench, drive, run_ready};
use ebbmark::procedure::{Plan, Procedure};
use ebbmark::profile::{Profile, QuantityName};
use ebbmark::sim::{BoardModel, Condition, PullUp, Setup};
use ebbmark::units::{Amps, Ohms, Siemens, Volts};
use ebbmark::verdict::{Outcome, judge};

/// Common practice: cut-off near 7.0 V, 9.7 V when charged, a load of about 27 ohm.
const PROFILE: &str = r#"
schema = 1
board = "NV-9"
revision = "A"
title = "Nine-volt block, battery cut-off"
serial_number = "[0-9]+"
[supply]
start = "9.20 V"
floor = "6.20 V"
maximum = "9.70 V"
current_limit = "600 mA"
[load]
resistance = "27 ohm"
tolerance = "1 %"
rating = "5 W"
[timing]
detect_delay = "5 ms"
release_delay = "20 ms"
[ramp]
mode = "staircase"
step = "20 mV"
[limits]
trip = { min = "6.90 V", max = "7.10 V" }
re_enable = { min = "7.70 V", max = "8.10 V" }
hysteresis = { min = "700 mV", max = "1.10 V" }
off_current = { at = "6.80 V", min = "1.5 uA", max = "3.0 uA" }
"#;

/// Common practice: a 4.7 Mohm pull-up, a detector of 0.6 µA, less than 0.5 µA of switch leakage; `other` for the rest.
pub(crate) fn board(other: BoardModel) -> BoardModel {
    BoardModel {
        trip: Volts(7.0),
        hysteresis: Volts(0.9),
        pull_up: Ohms(4.7e6),
        pull_up_conducts: PullUp::WhenOff,
        divider: Siemens(0.0),
        detector_current: Amps(0.6e-6),
        leakage: Amps(0.3e-6),
        leakage_conductance: Siemens(0.0),
        load: Ohms(27.0),
        on_resistance: Ohms(0.05),
        ..other
    }
}

#[test]
fn the_program_reports_the_figures_of_the_trade() {
    let profile = Profile::read("nine-volt.toml", PROFILE).expect("a good profile");
    let mut setup = Setup::new(&profile, Condition::Good, 9);
    setup.board = board(setup.board);
    let mut bench = VirtualBench::new(&setup, setup.ability());
    let procedure = Procedure::new(Plan::new(&profile, &setup.ability()));
    let trace = run_ready(drive(procedure, &mut bench, setup.claims(), &mut (), std::future::pending()));
    let verdict = judge(&analyse(&trace, &profile), &profile, &trace.ending);

    let value = |name: QuantityName| {
        let judged = verdict.judged.iter().find(|judged| judged.quantity.name == name);
        judged.unwrap_or_else(|| panic!("no {name:?}: {verdict:#?}")).quantity.value
    };
    let (trip, re_enable) = (value(QuantityName::Trip), value(QuantityName::ReEnable));
    assert!((trip - 7.0).abs() < 0.02, "cut-off near 7.0 V, reported {trip}");
    assert!(re_enable > trip + 0.7, "re-enable {re_enable} comes above the trip {trip}");
    let (on, off) = (value(QuantityName::OnCurrent), value(QuantityName::OffCurrent));
    assert!((off - 2.4e-6).abs() < 0.1e-6, "about 2.4 µA off, reported {off}");
    assert!((on / off).log10() > 4.95, "five decades between {on} and {off}");

    let at_7v3 = trace.samples.iter().filter_map(|sample| Some((sample.sense?, sample.current.amps()?)));
    let (volts, amps) = at_7v3
        .filter(|(_, amps)| *amps > Amps(0.1))
        .min_by(|a, b| (a.0.0 - 7.3).abs().total_cmp(&(b.0.0 - 7.3).abs()))
        .expect("readings while on");
    assert!((amps.0 - 0.27).abs() < 0.005, "about 0.27 A on at 7.3 V, read {amps} at {volts}");
    assert_eq!(verdict.outcome, Outcome::Pass, "{:#?}", verdict.findings);
}
