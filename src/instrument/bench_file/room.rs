//! What room and calendar do to the makers' claims: degrees outside widen them, and an overdue calibration ends them.

use super::parts::Parts;
use super::{BenchFile, BenchInstrument};
use crate::instrument::definition::{Meter, Role, Validity};
use crate::trace::Doubt;
use crate::units::{Celsius, Quantity};
use jiff::civil::Date;
use jiff::{Span, ToSpan};

impl BenchFile {
    /// Says how warm the room is. From here on claims and abilities are those of instruments in such a room.
    pub fn set_room(&mut self, room: Celsius) {
        self.room = Some(room);
        // Bench and parts were checked together; there are the same roles as before.
        if let Ok(stated) = Parts::of(&self.instruments) {
            self.parts = stated.in_room(room);
        }
    }

    /// Temperature of the room, where it is known.
    pub fn room(&self) -> Option<Celsius> {
        self.room
    }

    /// Why claims of this bench may not hold on this day, in the order of the instruments.
    pub fn doubts(&self, today: Date) -> Vec<Doubt> {
        let of = |seat: &BenchInstrument| {
            let instrument = || seat.name.clone();
            let overdue =
                seat.overdue(today).map(|due| Doubt::CalibrationOverdue { instrument: instrument(), due });
            let outside = self.room.and_then(|room| {
                let (from, to) = seat.cannot_widen(room)?;
                Some(Doubt::OutsideTemperature { instrument: instrument(), room, from, to })
            });
            [overdue, outside]
        };
        self.instruments.iter().flat_map(of).flatten().collect()
    }
}

impl BenchInstrument {
    /// The last day on which its calibration holds: as the bench file says, or as long after it was calibrated as its
    /// definition states, whichever comes first.
    pub fn due(&self) -> Option<Date> {
        let holds = self.validities().filter_map(|(valid, _)| valid.since_calibration).min();
        let days = |holds: std::time::Duration| -> Span {
            (holds.as_secs() / 86_400).min(36_500).cast_signed().days()
        };
        let by_age = self
            .calibrated
            .zip(holds)
            .and_then(|(calibrated, holds)| calibrated.checked_add(days(holds)).ok());
        [self.calibration_due, by_age].into_iter().flatten().min()
    }

    /// The temperatures its claim is stated for, when `room` is outside and nothing is known of what a degree adds.
    fn cannot_widen(&self, room: Celsius) -> Option<(Celsius, Celsius)> {
        self.validities()
            .find(|(valid, widens)| valid.degrees_outside(room) > 0.0 && !widens)
            .and_then(|(valid, _)| valid.temperature)
    }

    /// When each part it plays holds, and whether all of it can be widened.
    fn validities(&self) -> impl Iterator<Item = (Validity, bool)> {
        fn meter<Q: Quantity>(meter: &Meter<Q>) -> (Validity, bool) {
            (meter.valid, meter.ranges.iter().all(|range| !range.per_degree.is_nothing()))
        }
        let definition = &self.definition;
        let plays = |role| self.roles.contains(&role);
        let volts = plays(Role::Voltmeter) || plays(Role::LoadVoltmeter);
        let source = definition.source.as_ref().filter(|_| plays(Role::Source));
        let source = source.map(|source| (source.valid, !source.per_degree.is_nothing()));
        let ammeter = definition.ammeter.as_ref().filter(|_| plays(Role::Ammeter)).map(meter);
        let voltmeter = definition.voltmeter.as_ref().filter(|_| volts).map(meter);
        [source, ammeter, voltmeter].into_iter().flatten()
    }
}

impl Parts {
    /// The same parts in a room of this temperature.
    fn in_room(mut self, room: Celsius) -> Self {
        let source = &mut self.source;
        source.programming =
            source.per_degree.widened(source.programming, source.valid.degrees_outside(room));
        widen(&mut self.ammeter, room);
        for meter in [&mut self.voltmeter, &mut self.load_voltmeter].into_iter().flatten() {
            widen(meter, room);
        }
        self
    }
}

fn widen<Q: Quantity>(meter: &mut Meter<Q>, room: Celsius) {
    let degrees = meter.valid.degrees_outside(room);
    for range in &mut meter.ranges {
        range.accuracy = range.per_degree.widened(range.accuracy, degrees);
    }
}

#[cfg(test)]
mod tests {
    use super::super::sample::{bench, problems};
    use super::*;
    use crate::profile::Profile;
    use crate::trace::Claims;
    use jiff::civil::date;

    const DUE: &str = "calibration_due = 2027-03-31";

    fn claims(bench: &BenchFile) -> Claims {
        let profile = Profile::read("p.toml", include_str!("../../../profiles/river-node.toml"));
        bench.claims(&profile.expect("a good profile").supply)
    }

    /// By hand at 33 °C, 5 degrees outside. Supply: 0.05 % + 5 x 0.01 % and 5 mV + 5 x 2 mV. Ammeter on 100 µA:
    /// 0.05 % + 5 x 0.002 % and 25 nA + 5 x 3 nA. Voltmeter on 10 V: 0.0035 % + 5 x 0.0005 % and 50 µV + 5 x 10 µV.
    #[test]
    fn a_warm_room_widens_every_claim_by_its_own_coefficients() {
        let mut warm = bench(&[]);
        let cool = claims(&warm);
        warm.set_room(Celsius(25.0));
        assert_eq!(Claims { room: None, ..claims(&warm) }, cool, "inside what the makers state");
        warm.set_room(Celsius(33.0));
        let wide = claims(&warm);
        let near = |found: f64, wanted: f64| assert!((found / wanted - 1.0).abs() < 1e-9, "{found} {wanted}");
        let set = wide.set.expect("a supply");
        near(set.relative, 0.001);
        near(set.absolute, 15e-3);
        near(wide.current[0].accuracy.relative, 0.0006);
        near(wide.current[0].accuracy.absolute, 40e-9);
        let sense = wide.sense.expect("a voltmeter");
        near(sense.relative, 6e-5);
        near(sense.absolute, 100e-6);
        assert_eq!(wide.room, Some(Celsius(33.0)));
        assert_eq!(warm.doubts(date(2026, 12, 1)), []);
    }

    #[test]
    fn a_room_outside_an_instrument_without_coefficients_is_a_doubt() {
        let mut warm = bench(&[(
            "definition = \"programmable-supply\"",
            "definition = \"supply-with-low-current-range\"",
        )]);
        warm.set_room(Celsius(33.0));
        let (instrument, room) = ("supply".to_owned(), Celsius(33.0));
        let doubt = Doubt::OutsideTemperature { instrument, room, from: Celsius(18.0), to: Celsius(28.0) };
        assert_eq!(warm.doubts(date(2026, 12, 1)), [doubt]);
    }

    #[test]
    fn a_calibration_ends_as_the_file_says_or_as_the_definition_does() {
        let due = |changes: &[(&str, &str)]| bench(changes).instruments()[0].due();
        assert_eq!(due(&[]), Some(date(2027, 3, 31)));
        assert_eq!(due(&[(DUE, "calibrated = 2026-03-31")]), Some(date(2027, 3, 31)));
        assert_eq!(
            due(&[(DUE, "calibrated = 2026-01-10\ncalibration_due = 2027-03-31")]),
            Some(date(2027, 1, 10))
        );
        assert_eq!(due(&[(DUE, "")]), None);
        let late = bench(&[(DUE, "calibrated = 2025-03-31")]);
        let overdue = Doubt::CalibrationOverdue { instrument: "supply".to_owned(), due: date(2026, 3, 31) };
        assert_eq!(late.doubts(date(2026, 4, 1)), [overdue]);
        assert_eq!(late.doubts(date(2026, 3, 31)), [], "it holds through its last day");
    }

    #[test]
    fn a_room_is_read_from_the_file_with_its_unit() {
        let room = |text: &str| format!("[room]\ntemperature = {text}\n\n[fixture]");
        assert_eq!(bench(&[("[fixture]", &room("\"24 degC\""))]).room(), Some(Celsius(24.0)));
        let told = problems(&[("[fixture]", &room("\"24 V\""))]);
        assert!(told.contains("which is a voltage, wanted a temperature"), "{told}");
    }
}
