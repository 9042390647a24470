//! The burst of short readings, line by line: short while it lasts, long again afterwards whatever happens.

use super::{MAXIMUM, bench_of, block_on, seat};
use crate::scripted::{Act, Device, Scripted, say};
use ebbmark::bench::Bench;
use ebbmark::bench::serial::connect;
use ebbmark::clock::Clock;
use ebbmark::instrument::definition::Role;
use ebbmark::procedure::{Action, Event};
use ebbmark::trace::{Burst, FaultKind};
use ebbmark::units::Volts;
use std::time::Duration;

const BEGIN: &str = "SENS:VOLT:NPLC 0.02";
const END: &str = "SENS:VOLT:NPLC 1";

/// A voltmeter as a [`Device`] that also knows how to be configured, and to read at once.
fn obey(device: &mut Device, line: &str) -> Vec<Act> {
    match line {
        "CONF:VOLT" => Vec::new(),
        "READ?" => say("+6.0000E+00"),
        line => device.obey(line),
    }
}

/// A voltmeter whose readings `tell` words, the first of them being number 0, while they are short.
fn voltmeter(mut tell: impl FnMut(usize) -> String + Send + 'static) -> Scripted {
    let (mut short, mut count) = (false, 0);
    Scripted::start(Device::default(), move |device, line| {
        short = (short || line == BEGIN) && line != END;
        if line != "READ?" || !short {
            return obey(device, line);
        }
        count += 1;
        say(&tell(count - 1))
    })
}

/// What a burst, and a reading after it, bring.
fn burst_and_reading(voltmeter: &Scripted) -> [Event; 2] {
    let supply = Scripted::well_behaved();
    let seats = vec![
        seat(&supply, "source-measure-unit", &[Role::Source, Role::Ammeter]),
        seat(voltmeter, "bench-meter-voltage", &[Role::Voltmeter]),
    ];
    block_on(async {
        let mut bench = connect(&bench_of(seats), MAXIMUM, Clock::real()).await.expect("a good bench");
        [bench.perform(&Action::Burst).await, bench.perform(&Action::Read).await]
    })
}

/// The lines of the burst: from the command that makes readings short to the one that makes them long again.
fn lines(voltmeter: &Scripted) -> Vec<String> {
    let heard = voltmeter.heard();
    let begin = heard.iter().position(|line| line == BEGIN).expect("made short");
    let end = heard.iter().rposition(|line| line == END).expect("made long again");
    assert!(begin < end, "long again at the end: {heard:?}");
    heard[begin..=end].to_vec()
}

/// By hand: of a voltage that goes between 5.98 V and 6.02 V, and once to 6.05 V, the median is 6.02 V, the upper of the
/// two in the middle; half the readings lie 40 mV from it.
#[test]
fn forty_short_readings_are_taken_and_the_meter_is_put_back() {
    let voltmeter = voltmeter(|count| match count {
        7 => "+6.0500E+00".to_owned(),
        even if even % 2 == 0 => "+5.9800E+00".to_owned(),
        _ => "+6.0200E+00".to_owned(),
    });
    let [burst, reading] = burst_and_reading(&voltmeter);
    let Event::Burst(burst) = burst else { panic!("{burst:?}") };
    let close = |found: Volts, wanted: f64| (found.0 - wanted).abs() < 1e-9;
    assert!(close(burst.median_deviation, 0.04) && close(burst.peak_to_peak, 0.07), "{burst:?}");
    assert_eq!((burst.readings, burst.aperture), (40, Duration::from_micros(400)));
    let Event::Reading(reading) = reading else { panic!("{reading:?}") };
    assert_eq!(reading.sense, Some(Volts(6.0)), "of its own time again");

    let lines = lines(&voltmeter);
    let asked = lines.iter().filter(|line| *line == "READ?").count();
    assert_eq!((lines.len(), asked), (42, Burst::LENGTH as usize), "{lines:?}");
}

#[test]
fn a_burst_that_fails_leaves_the_meter_as_it_was() {
    for (reply, kind) in [("+9.9E37", FaultKind::Overload), ("six volts", FaultKind::BadReply)] {
        let voltmeter =
            voltmeter(move |count| if count == 3 { reply.to_owned() } else { "+6.0000E+00".to_owned() });
        let [burst, reading] = burst_and_reading(&voltmeter);
        assert!(matches!(&burst, Event::Failed(fault) if fault.kind == kind), "{reply}: {burst:?}");
        assert!(matches!(reading, Event::Reading(_)), "{reply}: {reading:?}");
        let asked = lines(&voltmeter).iter().filter(|line| *line == "READ?").count();
        assert_eq!(asked, 4, "none after the one that failed");
    }
}

#[test]
fn a_meter_that_refuses_to_read_shortly_is_named() {
    let voltmeter = Scripted::start(Device::default(), |device, line| match line {
        BEGIN => device.fail("-113,\"Undefined header\""),
        line => obey(device, line),
    });
    let [burst, _] = burst_and_reading(&voltmeter);
    assert!(matches!(&burst, Event::Failed(fault) if fault.kind == FaultKind::InstrumentError), "{burst:?}");
}
