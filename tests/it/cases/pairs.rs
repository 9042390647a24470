//! Two things wrong at once, on the relay node's board: neither may hide the other, and a bench fault comes first.

use super::table::Wanted::{First, Nothing};
use super::table::{Case, FAIL, INVALID, PASS};
use ebbmark::sim::Condition::*;

pub(super) const PAIRS: &[Case] = &[
    Case::new("P1", "leaks and is slow", &[LeakingSwitch, SlowDetector], FAIL, First("off_current_high")),
    Case::new("P2", "trips high, pull-up low", &[HighTrip, LowPullUp], FAIL, First("off_current_high")),
    Case::new(
        "P3",
        "leaks, on a supply that cannot sink",
        &[NoSink, LeakingSwitch],
        FAIL,
        First("off_current_high"),
    ),
    Case::new(
        "P4",
        "narrow hysteresis behind resistive leads",
        &[Chatter, NarrowHysteresis],
        INVALID,
        First("source_resistance"),
    ),
    Case::new("P5", "trips high, flux film", &[FluxFilm, HighTrip], FAIL, First("trip_high")),
    Case::new(
        "P6",
        "trips high, current limit low",
        &[LowCurrentLimit, HighTrip],
        INVALID,
        First("current_limit"),
    ),
    Case::new("P7", "leaks and is hot", &[HotBoard, LeakingSwitch], INVALID, First("temperature")),
    Case::new(
        "P8",
        "leaks, meter reversed",
        &[MeterReversed, LeakingSwitch],
        INVALID,
        First("meter_reversed"),
    ),
    Case::new(
        "P9",
        "shorted switch behind a blown fuse",
        &[BlownFuse, NeverTrips],
        INVALID,
        First("meter_fuse"),
    ),
    Case::new(
        "P10",
        "narrow hysteresis behind a bad contact",
        &[IntermittentContact, NarrowHysteresis],
        INVALID,
        First("contact"),
    ),
    Case::new(
        "P11",
        "wrong detector and pull-up low",
        &[WrongDetector, LowPullUp],
        FAIL,
        First("wrong_detector_option"),
    ),
    Case::new("P12", "leaks, load missing", &[NoLoad, LeakingSwitch], INVALID, First("no_load")),
    Case::new("P13", "trips high, late reply", &[LateReply, HighTrip], INVALID, First("bench_fault")),
    Case::new(
        "P14",
        "trips high, supply drifts",
        &[DriftingSupply, HighTrip],
        INVALID,
        First("supply_disagrees"),
    ),
    // The film takes about what the pull-up does not: two faults that cancel in the only current there is.
    Case::new("P15", "pull-up high, flux film", &[HighPullUp, FluxFilm], PASS, Nothing),
];
