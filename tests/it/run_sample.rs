//! Runs made up for the tests of the log and of the reports.
#![expect(clippy::expect_used, reason = "a test that cannot be set up has failed")]

use ebbmark::analysis::{About, Contribution, Finding, FindingCode, Quantity};
use ebbmark::profile::{Limit, QuantityName};
use ebbmark::record::{
    BenchUsed, BoardUnderTest, Finished, Instrument, Moment, Occasion, ProfileUsed, Simulated, Subject,
};
use ebbmark::trace::{Claims, Current, Ending, OutputState, Sample, Setting, Stop, Trace};
use ebbmark::units::{Amps, Volts};
use ebbmark::verdict::{Decision, Judged, Outcome, Verdict};
use jiff::tz::{Offset, TimeZone};
use std::time::Duration;

/// A moment at a station two hours ahead of UTC.
pub(crate) fn moment(utc: &str) -> Moment {
    Moment::new(utc.parse().expect("RFC 3339"), &TimeZone::fixed(Offset::constant(2)))
}

/// A board on a simulated bench.
pub(crate) fn subject(serial_number: &str) -> Subject {
    let limits = limits().into_iter().collect();
    Subject {
        board: BoardUnderTest {
            board: "RN-204".to_owned(),
            revision: "C".to_owned(),
            serial_number: serial_number.to_owned(),
            batch: Some("42".to_owned()),
            work_order: None,
        },
        profile: ProfileUsed { path: "profiles/river-node.toml".to_owned(), sha256: "ab".repeat(32), limits },
        bench: BenchUsed {
            name: "sim".to_owned(),
            instruments: vec![Instrument {
                roles: vec!["source".to_owned(), "voltmeter".to_owned()],
                maker: "EBBMARK".to_owned(),
                model: "SIM-PSU".to_owned(),
                serial_number: Some("1".to_owned()),
                firmware: Some("0.1".to_owned()),
                port: "/dev/pts/3".to_owned(),
                calibration_due: Some(jiff::civil::date(2027, 1, 31)),
            }],
            simulated: Some(Simulated { condition: "good".to_owned(), seed: 7 }),
        },
        operator: Some("Ada".to_owned()),
        occasion: Occasion::Production,
    }
}

pub(crate) fn limits() -> [(QuantityName, Limit); 4] {
    let between = |min, max| Limit { at: None, min: Some(min), max: Some(max) };
    [
        (QuantityName::Trip, between(5.88, 6.12)),
        (QuantityName::ReEnable, between(6.24, 6.56)),
        (QuantityName::Hysteresis, between(0.3, 0.5)),
        (QuantityName::OffCurrent, Limit { at: Some(Volts(5.8)), min: Some(1e-6), max: Some(4e-6) }),
    ]
}

/// A quantity with the decision somebody made about it.
pub(crate) fn judged(name: QuantityName, value: f64, uncertainty: f64, decision: Option<Decision>) -> Judged {
    let limit = limits().into_iter().find(|(limited, _)| *limited == name).map(|(_, limit)| limit);
    let quantity = Quantity::new(name, value, vec![Contribution::normal("last digit", uncertainty / 2.0)]);
    Judged {
        coverage_factor: 2.0,
        coverage_probability: None,
        limit,
        decision,
        ..Judged::new(quantity, None)
    }
}

/// What a good board shows.
pub(crate) fn passing() -> Verdict {
    let pass = Some(Decision::Pass);
    Verdict {
        outcome: Outcome::Pass,
        judged: vec![
            judged(QuantityName::Trip, 6.0004, 0.0016, pass),
            judged(QuantityName::ReEnable, 6.4012, 0.0021, pass),
            judged(QuantityName::Hysteresis, 0.4008, 0.0026, pass),
            judged(QuantityName::OnCurrent, 0.10912, 0.000_12, None),
            judged(QuantityName::OffCurrent, 2.4e-6, 3.1e-8, pass),
        ],
        findings: Vec::new(),
    }
}

pub(crate) fn finding(code: FindingCode, about: About, text: &str) -> Finding {
    Finding { code, about, text: text.to_owned() }
}

/// A short trace that ended as it should.
pub(crate) fn trace() -> Trace {
    let sample = |step: u32| Sample {
        at: Duration::from_millis(u64::from(50 * step)),
        set: Volts(7.6 - 0.1 * f64::from(step)),
        sense: Some(Volts(7.59 - 0.1 * f64::from(step))),
        current: if step == 3 { Current::OVERLOAD } else { Current::Value(Amps(0.1 / f64::from(step + 1))) },
        load: None,
        range: Some(Amps(0.5)),
        limited: Some(false),
        was_limited: None,
    };
    Trace {
        samples: (0..6).map(sample).collect(),
        settings: vec![Setting { at: Duration::ZERO, what: "current limit 350.0 mA".to_owned() }],
        claims: Claims::default(),
        ending: Ending { stop: Stop::Completed, output: OutputState::Off },
    }
}

pub(crate) fn finished(verdict: Verdict) -> Finished {
    Finished { verdict, ended: moment("2026-10-19T14:22:51.500Z"), duration: Duration::from_millis(18_250) }
}
