//! The cases, one thing wrong at a time, on the relay node's board.
//!
//! Three more are not played in virtual time, because they are about the log and the operator: a serial number tested
//! before (the log counts every attempt, `log::leftover`), a program killed in the middle of a run (`cli::leftover`),
//! and a run stopped after a failing reading (`verdict::judge`, `cli::stopped`). Late and cut replies are played here
//! as what the bench makes of them; over a real line they are in `cli::fault_mid_run`.

use super::table::Wanted::{First, Nothing, OneOf};
use super::table::{Case, FAIL, INVALID, PASS};
use ebbmark::sim::Condition::*;
use ebbmark::units::{Amps, Ohms, Volts};
use std::time::Duration;

/// A limit on the release delay: a board without its capacitor must not pass.
const RELEASE: &[(&str, &str)] = &[("release_delay", r#"{ min = "85 ms" }"#)];

/// A limit on what flows below the trip.
const DEEP: &[(&str, &str)] = &[("deep_current", r#"{ max = "1 mA" }"#)];

/// No limits on the way back on, because there is none.
const ONE_WAY: &[(&str, &str)] = &[("latched", "true"), ("re_enable", ""), ("hysteresis", "")];

pub(super) const CASES: &[Case] = &[
    Case::new("1", "good board", &[Good], PASS, Nothing),
    Case::new("2", "pull-up of 100 kΩ", &[LowPullUp], FAIL, First("off_current_high")),
    Case::new("3", "pull-up of 10 MΩ", &[HighPullUp], FAIL, First("off_current_low")),
    Case::new("4", "switch that leaks 40 µA", &[LeakingSwitch], FAIL, First("off_current_high"))
        .figures(|setup| setup.board.leakage = Amps(40e-6)),
    Case::new("5a", "no delay capacitor", &[NoDelayCapacitor], FAIL, First("release_delay_short"))
        .limits(RELEASE),
    Case::new(
        "5b",
        "no delay capacitor, source of 0.6 Ω",
        &[NoDelayCapacitor],
        INVALID,
        First("source_resistance"),
    )
    .figures(|setup| setup.wiring.lead_resistance = Ohms(0.5))
    .limits(RELEASE),
    Case::new(
        "5c",
        "no delay capacitor, 220 µF at the load",
        &[NoDelayCapacitor, LargeLoadCapacitor],
        FAIL,
        // The board goes on and off while the load charges, and only a delay read in between is short.
        OneOf(&["release_delay_short", "chatter", "neither_on_nor_off"]),
    )
    .limits(RELEASE),
    Case::new("6", "shorted switch", &[NeverTrips], FAIL, First("never_trips")),
    Case::new("7", "detector stuck on", &[DetectorStuckOn], FAIL, First("detector_stuck_on")),
    Case::new("8", "open switch", &[NeverOn], FAIL, First("never_on")),
    Case::new("9", "load missing", &[NoLoad], INVALID, First("no_load")),
    Case::new("10", "detector of 2.7 V", &[WrongDetector], FAIL, First("wrong_detector_option")),
    Case::new("11", "hysteresis of 30 mV", &[NarrowHysteresis], FAIL, First("chatter"))
        .figures(|setup| setup.board.hysteresis = Volts(0.03)),
    Case::new("12", "reversed board", &[Reversed], INVALID, First("reversed")),
    Case::new("13", "detector of 50 ms", &[SlowDetector], PASS, First("slower_than_design"))
        .figures(|setup| setup.board.detect_delay = Duration::from_millis(50)),
    Case::new("14", "conducts in deep discharge", &[DeepConduction], FAIL, First("conducts_when_deep"))
        .limits(DEEP),
    Case::new("15", "intermittent contact", &[IntermittentContact], INVALID, First("contact")),
    Case::new("16", "ammeter's leads swapped", &[MeterReversed], INVALID, First("meter_reversed")),
    Case::new("17", "supply that cannot sink", &[NoSink], PASS, First("still_charged")),
    Case::new("18", "late reply", &[LateReply], INVALID, First("bench_fault")),
    Case::new("19", "cut reply", &[CutReply], INVALID, First("bench_fault")),
    Case::new("20a", "ammeter without a small range", &[CoarseAmmeter], INVALID, First("range_not_adequate")),
    Case::new(
        "20b",
        "ammeter stuck on its smallest range",
        &[StuckRange],
        INVALID,
        First("range_not_adequate"),
    ),
    Case::new("21", "blown fuse in the ammeter", &[BlownFuse], INVALID, First("meter_fuse")),
    Case::new("22", "20 mV of hum", &[MainsRipple], INVALID, First("ripple")),
    Case::new("23a", "source of 0.6 Ω", &[Chatter], INVALID, First("source_resistance"))
        .figures(|setup| setup.wiring.lead_resistance = Ohms(0.5)),
    Case::new("24", "supply that drifts", &[DriftingSupply], INVALID, First("supply_disagrees")),
    Case::new("25", "board at 60 °C", &[HotBoard], INVALID, First("temperature")),
    Case::new("26", "5 V from elsewhere", &[BackFeed], INVALID, First("back_feed")),
    Case::new("27a", "current limit of 0.2 A", &[LowCurrentLimit], INVALID, First("current_limit")),
    Case::new("27b", "220 µF at the load", &[LargeLoadCapacitor], INVALID, First("current_limit")),
    Case::new("28a", "load stops at 3.10 V, seen at the load", &[LoadLockout], PASS, First("load_stopped")),
    Case::new("28b", "load stops at 3.10 V, not seen", &[LoadLockout], INVALID, First("load_stopped"))
        .bench(|ability| ability.load_voltmeter = false),
    Case::new("29", "flux film of 2 MΩ", &[FluxFilm], PASS, Nothing),
    Case::new("30", "left on between the thresholds", &[LeftOnInBand], PASS, Nothing),
    Case::new("31", "supply restarts", &[SupplyRestart], INVALID, First("bench_fault")),
    Case::new("32a", "open sense lead, 5 % high", &[OpenSenseHigh], INVALID, First("supply_disagrees")),
    Case::new("32b", "open sense lead, low", &[OpenSenseLow], INVALID, First("supply_disagrees")),
    Case::new("33a", "latched", &[Latched], FAIL, First("never_re_enables")),
    Case::new("33b", "latched, as its profile says", &[Latched], PASS, Nothing).limits(ONE_WAY),
    Case::new("33c", "comes back, though its profile says it latches", &[Good], FAIL, First("not_latched"))
        .limits(ONE_WAY),
    Case::new(
        "34",
        "trip at 3.06 V, release at 3.10 V",
        &[OverlappingThresholds],
        FAIL,
        First("hysteresis_narrow"),
    )
    .figures(|setup| {
        setup.board.trip = Volts(3.06);
        setup.board.hysteresis = Volts(0.04);
    }),
    Case::new("35", "voltmeter that no file states", &[UnstatedVoltmeter], PASS, Nothing),
];
